// Models that are wrong, each with all that the program says of it, word for word and in order. What is
// expected stands at the end of a file as "# expect: line:column: error: ...", or beside it in
// NAME.expect where the file cannot hold it.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <functional>
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

// Long chains, long lists and long files of slips. Each is harmless if its cost grows with its length, and
// a hang if it grows with the square: 20000 to the square is 4e8 lookups, for each fault.
class Monster : public testing::Test {
 protected:
  static constexpr int k_size = 20000;
  static std::string repeat(const std::function<std::string(int)>& line) {
    std::string text;
    for (int i = 0; i < k_size; ++i) text += line(i);
    return text;
  }
  static std::string number(int i) { return std::to_string(i); }
  static std::size_t errors(const std::string& text) {
    return static_cast<std::size_t>(
        std::ranges::count_if(check_model_text(text, "monster").faults,
                              [](const auto& f) { return f.severity == netlists::Severity::error; }));
  }
  const std::string head_ = "format: idlewire/1\nsupplies:\n  T1: {system: 208Y/120}\n";
  const std::string runs_ = "runs:\n  C1: {from: P0, to: A, length: 1 m, raceway: none}\n";
};

TEST_F(Monster, ChainOfFeeders) {
  const auto panel = [](int i) {
    return "  P" + number(i) + ": {feeder: {from: P" + number(i + 1) + ", wires: {line1: THHN 2}, runs: [F" +
           number(i) + "]}}\n";
  };
  const auto run = [](int i) {
    return "  F" + number(i) + ": {from: P" + number(i + 1) + ", to: P" + number(i) +
           ", length: 1 m, raceway: none}\n";
  };
  const std::string body = "panels:\n" + repeat(panel);
  const std::string end = "  P" + number(k_size) + ": ";
  EXPECT_EQ(errors(head_ + body + end + "{supply: T1}\nruns:\n" + repeat(run)), 0u);
  const std::string circle = "{feeder: {from: P0, wires: {line1: THHN 2}, runs: [F0]}}\nruns:\n";
  EXPECT_GE(errors(head_ + body + end + circle + repeat(run)), 1u);
}

TEST_F(Monster, ChainOfAliases) {
  const auto circuit = [](int i) {
    return "  k" + number(i) + ": {wires: {w: k" + number(i + 1) + ".w}, runs: [C1]}\n";
  };
  const std::string model = head_ + runs_ + "circuits:\n" + repeat(circuit);
  EXPECT_EQ(errors(model + "  k" + number(k_size) + ": {wires: {w: THHN 12}, runs: [C1]}\n"), 0u);
  EXPECT_GE(errors(model + "  k" + number(k_size) + ": {wires: {w: k0.w}, runs: [C1]}\n"), 1u);
}

TEST_F(Monster, ManySlips) {
  const auto circuit = [](int i) {
    return "  k" + number(i) + ": {panel: LP" + number(i) + ", slot: 1, wires: {a: k" + number(i) +
           "x.w}, rnus: [C" + number(i) + "], runs: [C" + number(i + 2) + "]}\n";
  };
  EXPECT_GE(errors(head_ + runs_ + "circuits:\n" + repeat(circuit)), 3u * k_size);
}

TEST_F(Monster, ManyWiresInOneRunAndManyRunsOfOneWire) {
  const auto wire = [](int i) { return "w" + number(i) + ": THHN 12, "; };
  EXPECT_GE(errors(head_ + runs_ + "circuits:\n  k: {runs: [C1], wires: {" + repeat(wire) + "z: THHN 12}}\n"),
            1u);
  const auto run = [](int i) {
    return "  R" + number(i) + ": {from: N" + number(i) + ", to: N" + number(i + 1) +
           ", length: 1 m, raceway: none}\n";
  };
  const auto name = [](int i) { return "R" + number(i) + ", "; };
  EXPECT_EQ(errors(head_ + "runs:\n" + repeat(run) + "circuits:\n  k: {wires: {a: THHN 12}, runs: [" +
                   repeat(name) + "]}\n"),
            1u);
}

}  // namespace
}  // namespace io
