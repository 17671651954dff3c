// Models that are wrong, each with all that the program says of it, word for word and in order. What is
// expected stands at the end of a file as "# expect: line:column: error: ...", or beside it in
// NAME.expect where the file cannot hold it.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <sstream>

#include "io/check_report.h"

namespace io {
namespace {

namespace fs = std::filesystem;

const fs::path k_folder = fs::path(IDLEWIRE_TESTS) / "broken";

std::string content(const fs::path& path) {
  std::ifstream stream(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(stream), {}};
}

std::vector<std::string> broken_models() {
  std::vector<std::string> names;
  for (const auto& entry : fs::directory_iterator(k_folder))
    if (entry.path().extension() == ".yaml") names.push_back(entry.path().stem().string());
  std::sort(names.begin(), names.end());
  return names;
}

std::vector<std::string> expected(const std::string& name) {
  const std::string mark = "# expect: ";
  const fs::path beside = k_folder / (name + ".expect");
  std::istringstream lines(content(fs::exists(beside) ? beside : k_folder / (name + ".yaml")));
  std::vector<std::string> list;
  for (std::string line; std::getline(lines, line);) {
    if (fs::exists(beside))
      list.push_back(line);
    else if (line.starts_with(mark))
      list.push_back(line.substr(mark.size()));
  }
  return list;
}

class BrokenModel : public testing::TestWithParam<std::string> {};

TEST_P(BrokenModel, SaysWhatIsWrongAndWhere) {
  const std::string file = (k_folder / (GetParam() + ".yaml")).string();
  std::vector<std::string> found;
  for (const auto& fault : check_model(file).faults) {
    const std::string text = to_string(fault);
    ASSERT_TRUE(text.starts_with(file + ":")) << text;
    const std::size_t skip = file.size() + (text[file.size() + 1] == ' ' ? 2 : 1);
    found.push_back(text.substr(skip));
  }
  ASSERT_FALSE(expected(GetParam()).empty());
  EXPECT_EQ(found, expected(GetParam()));
}

INSTANTIATE_TEST_SUITE_P(Corpus, BrokenModel, testing::ValuesIn(broken_models()),
                         [](const auto& param) { return param.param; });

// A model cut off anywhere, or with any byte replaced, is refused or read, and never more than that.
TEST(MangledModel, IsNeverMoreThanRefused) {
  const std::string whole = content(k_folder / "mohm_for_Mohm.yaml");
  for (std::size_t cut = 0; cut < whole.size(); cut += 7) check_model_text(whole.substr(0, cut), "cut");
  std::size_t refused = 0, tried = 0;
  for (std::size_t at = 0; at < whole.find("# expect"); at += 3)
    for (const char c : {'\0', '{', ']', ':', '&', '*', '-', '9', '\n', '"', '\xc3'}) {
      std::string text = whole;
      text[at] = c;
      refused += any_error(check_model_text(text, "mangled").faults) ? 1 : 0;
      ++tried;
    }
  EXPECT_GT(refused, tried / 2);  // most bytes of a model mean something
}

}  // namespace
}  // namespace io
