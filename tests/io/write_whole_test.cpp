#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <sys/stat.h>

#include <filesystem>
#include <fstream>
#include <sstream>

#include "io/writers.h"

namespace {
namespace fs = std::filesystem;

std::string content_of(const fs::path& path) {
  std::ostringstream out;
  out << std::ifstream(path, std::ios::binary).rdbuf();
  return out.str();
}

class WriteWhole : public testing::Test {
 protected:
  void SetUp() override {
    const auto* test = testing::UnitTest::GetInstance()->current_test_info();
    folder_ = fs::path(testing::TempDir()) / ("idlewire-" + std::string(test->name()));
    fs::remove_all(folder_);
    fs::create_directories(folder_);
  }
  void TearDown() override { fs::remove_all(folder_); }

  std::string reason(const fs::path& path) {
    try {
      io::write_whole(path.string(), "new");
    } catch (const std::runtime_error& error) {
      return error.what();
    }
    return "";
  }
  std::size_t files() const {
    return static_cast<std::size_t>(std::distance(fs::directory_iterator(folder_), fs::directory_iterator()));
  }

  fs::path folder_;
};

TEST_F(WriteWhole, ReplacesAFileAndKeepsItsRights) {
  const fs::path path = folder_ / "result.json";
  io::write_whole(path.string(), "old");
  fs::permissions(path, fs::perms(0640));
  io::write_whole(path.string(), "new");
  EXPECT_EQ(content_of(path), "new");
  EXPECT_EQ(fs::status(path).permissions(), fs::perms(0640));
  EXPECT_EQ(files(), 1u) << "a file was left beside the result";
}

TEST_F(WriteWhole, GivesANewFileTheRightsOfTheProcess) {
  const mode_t mask = ::umask(027);
  io::write_whole((folder_ / "result.json").string(), "new");
  ::umask(mask);
  EXPECT_EQ(fs::status(folder_ / "result.json").permissions(), fs::perms(0640));
}

TEST_F(WriteWhole, FollowsALink) {
  io::write_whole((folder_ / "target").string(), "old");
  fs::create_symlink("target", folder_ / "link");
  io::write_whole((folder_ / "link").string(), "new");
  EXPECT_TRUE(fs::is_symlink(folder_ / "link"));
  EXPECT_EQ(content_of(folder_ / "target"), "new");
}

TEST_F(WriteWhole, RefusesADirectoryAndAMissingFolder) {
  EXPECT_EQ(reason(folder_), "cannot write '" + folder_.string() + "': Is a directory");
  EXPECT_THAT(reason(folder_ / "no" / "result.json"), testing::HasSubstr("there is no folder"));
  EXPECT_EQ(reason(""), "cannot write '': no file name");
  EXPECT_EQ(files(), 0u);
}

TEST_F(WriteWhole, NamesAFullDevice) {
  EXPECT_EQ(reason("/dev/full"), "cannot write '/dev/full': No space left on device");
}

// The name beside the target would be too long: the failure comes before anything is replaced.
TEST_F(WriteWhole, KeepsTheOldFileWhereTheNewCannotBeWritten) {
  const fs::path path = folder_ / std::string(252, 'a');
  std::ofstream(path) << "old";
  EXPECT_THAT(reason(path), testing::HasSubstr("File name too long"));
  EXPECT_EQ(content_of(path), "old");
  EXPECT_EQ(files(), 1u);
}

}  // namespace
