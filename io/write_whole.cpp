#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <climits>
#include <cstdlib>
#include <filesystem>
#include <memory>
#include <stdexcept>
#include <string>
#include <system_error>

#include "io/writers.h"

namespace io {
namespace {

[[noreturn]] void fail(const std::string& path, int error) {
  throw std::runtime_error("cannot write " + (path == "-" ? "standard output" : "'" + path + "'") + ": " +
                           std::generic_category().message(error));
}

/// All of `content` to an open file; the system's error number, 0 where all went well.
int write_all(int file, const std::string& content) {
  std::size_t done = 0;
  while (done < content.size()) {
    const ssize_t n = ::write(file, content.data() + done, content.size() - done);
    if (n < 0 && errno == EINTR) continue;
    if (n < 0) return errno;
    done += static_cast<std::size_t>(n);
  }
  return 0;
}

/// Devices and pipes have no content to keep: written as they are.
void write_through(const std::string& path, const std::string& content) {
  const int file = ::open(path.c_str(), O_WRONLY | O_CLOEXEC);
  if (file < 0) fail(path, errno);
  int error = write_all(file, content);
  if (::close(file) != 0 && error == 0) error = errno;
  if (error != 0) fail(path, error);
}

/// The rights of the file that is replaced; of a new one those of the process, 0666 less its umask.
mode_t rights_for(const std::string& path) {
  struct stat old {};
  if (::stat(path.c_str(), &old) == 0) return old.st_mode & 07777;
  const mode_t mask = ::umask(0);
  ::umask(mask);
  return 0666 & ~mask;
}

/// The new name in the folder must outlast a power cut too. A file system that cannot flush a folder
/// says EINVAL, and nothing more can be done there.
int flush_folder(const std::string& folder) {
  const int file = ::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (file < 0) return errno;
  int error = ::fsync(file) == 0 || errno == EINVAL ? 0 : errno;
  if (::close(file) != 0 && error == 0) error = errno;
  return error;
}

/// A link is followed, so that the file it points to is replaced and the link stays.
std::string without_links(const std::string& path) {
  const std::unique_ptr<char, decltype(&std::free)> resolved(::realpath(path.c_str(), nullptr), &std::free);
  return resolved ? resolved.get() : path;
}

/// Messages name the path as the user gave it.
void replace_file(const std::string& given, const std::string& content) {
  const std::string path = without_links(given);
  std::string beside = path + ".XXXXXX";
  const int file = ::mkostemp(beside.data(), O_CLOEXEC);
  if (file < 0) fail(given, errno);
  int error = write_all(file, content);
  if (error == 0 && ::fchmod(file, rights_for(path)) != 0) error = errno;
  if (error == 0 && ::fsync(file) != 0) error = errno;
  if (::close(file) != 0 && error == 0) error = errno;
  if (error == 0 && ::rename(beside.c_str(), path.c_str()) != 0) error = errno;
  if (error != 0) {
    ::unlink(beside.c_str());
    fail(given, error);
  }
  const std::string folder = std::filesystem::path(path).parent_path().string();
  error = flush_folder(folder.empty() ? "." : folder);
  if (error != 0) fail(given, error);
}

}  // namespace

std::string unwritable(const std::string& path) {
  if (path == "-") return "";
  if (path.empty()) return "cannot write '': no file name";
  namespace fs = std::filesystem;
  std::error_code error;
  if (fs::is_directory(path, error)) return "cannot write '" + path + "': Is a directory";
  const fs::path folder = fs::path(path).parent_path();
  if (!folder.empty() && !fs::is_directory(folder, error))
    return "cannot write '" + path + "': there is no folder '" + folder.string() + "'";
  return "";
}

void write_whole(const std::string& path, const std::string& content) {
  if (path == "-") {
    const int error = write_all(STDOUT_FILENO, content);
    if (error != 0) fail(path, error);
    return;
  }
  const std::string why = unwritable(path);
  if (!why.empty()) throw std::runtime_error(why);
  struct stat old {};
  const bool exists = ::stat(path.c_str(), &old) == 0;
  if (exists && !S_ISREG(old.st_mode)) return write_through(path, content);
  replace_file(path, content);
}

}  // namespace io
