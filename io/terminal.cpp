#include "io/terminal.h"

#include <sys/ioctl.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cstdlib>
#include <ctime>

namespace io {
namespace {

std::string environment(const char* name) {
  const char* value = std::getenv(name);
  return value == nullptr ? "" : value;
}

}  // namespace

int output_width() {
  winsize size{};
  if (::isatty(STDOUT_FILENO) == 0 || ::ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) != 0 || size.ws_col == 0)
    return 100;
  return std::clamp<int>(size.ws_col, 60, 100);
}

bool output_colour() {
  return ::isatty(STDOUT_FILENO) == 1 && environment("NO_COLOR").empty() && environment("TERM") != "dumb";
}

bool messages_on_terminal() { return ::isatty(STDERR_FILENO) == 1 && environment("TERM") != "dumb"; }

int message_width() {
  winsize size{};
  if (::ioctl(STDERR_FILENO, TIOCGWINSZ, &size) != 0 || size.ws_col == 0) return 79;
  return size.ws_col - 1;  // a full line would wrap
}

std::string today() {
  const std::string fixed = environment("SOURCE_DATE_EPOCH");
  std::tm parts{};
  if (!fixed.empty() && fixed.find_first_not_of("0123456789") == std::string::npos) {
    const std::time_t time = std::strtoll(fixed.c_str(), nullptr, 10);
    ::gmtime_r(&time, &parts);
  } else {
    const std::time_t time = std::time(nullptr);
    ::localtime_r(&time, &parts);
  }
  std::array<char, 32> text{};
  std::strftime(text.data(), text.size(), "%Y-%m-%d", &parts);
  return text.data();
}

}  // namespace io
