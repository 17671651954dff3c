#include "io/yaml_reader.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace io {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;
using testing::IsEmpty;

std::vector<std::string> words(const std::vector<netlists::Fault>& faults) {
  std::vector<std::string> out;
  for (const auto& fault : faults) out.push_back(to_string(fault));
  return out;
}

std::vector<std::string> refusal(const std::string& text) {
  std::vector<netlists::Fault> faults;
  EXPECT_FALSE(parse_yaml(text, "f", faults).has_value());
  return words(faults);
}

TEST(ParseYaml, KeepsTextAndPlaces) {
  std::vector<netlists::Fault> faults;
  const auto root = parse_yaml("a: no\nb: [1e3, '42']\n", "f", faults);
  ASSERT_TRUE(root.has_value());
  EXPECT_THAT(faults, IsEmpty());
  ASSERT_EQ(root->items.size(), 4u);
  EXPECT_EQ(root->items[1].text, "no");
  EXPECT_EQ(root->items[3].items[0].text, "1e3");
  EXPECT_EQ(root->items[3].items[1].text, "42");
  EXPECT_EQ(root->items[3].items[1].line, 2);
  EXPECT_EQ(root->items[3].items[1].column, 10);
}

TEST(ParseYaml, RefusesWhatCanBlowUp) {
  EXPECT_THAT(refusal(""), ElementsAre("f: error: the file is empty"));
  EXPECT_THAT(refusal("# only words\n"), ElementsAre("f: error: the file is empty"));
  EXPECT_THAT(
      refusal("a: &x [1]\nb: *x\n"),
      ElementsAre("f:1:4: error: an anchor (&x) is not taken here; write the value out where it is needed",
                  "f:2:4: error: an alias (*name) is not taken here; write the value out"));
  EXPECT_THAT(refusal("a: !!binary aGk=\n"), ElementsAre(HasSubstr("a tag (")));
  EXPECT_THAT(refusal("a: 1\n---\nb: 2\n"), ElementsAre(HasSubstr("a second document begins")));
  EXPECT_THAT(refusal("? [a]\n: 1\n"), ElementsAre(HasSubstr("a key must be a plain word")));
  EXPECT_THAT(refusal("a:\n\tb: 1\n"),
              ElementsAre("f:2:2: error: a tab in the indentation; YAML takes spaces only"));
  EXPECT_THAT(refusal(std::string("a: b\0c\n", 7)),
              ElementsAre("f:1:5: error: byte 0x00 is no text; a model is a plain text file"));
  EXPECT_THAT(refusal("a: caf\xe9\n"),
              ElementsAre("f:1:7: error: byte 0xe9 is no UTF-8; save the file as UTF-8 text"));
  EXPECT_THAT(refusal("a: [1, 2\n"), ElementsAre(HasSubstr("not YAML")));
}

TEST(ParseYaml, BoundsTheDepthWithoutRecursing) {
  EXPECT_THAT(refusal(std::string(1'000'000, '[')), ElementsAre(HasSubstr("more than 64 levels")));
  std::string maps, dashes;
  for (int i = 0; i < 100000; ++i) maps += "{a: ";
  for (int i = 0; i < 100000; ++i) dashes += "- ";
  EXPECT_THAT(refusal(maps), ElementsAre(HasSubstr("more than 64 levels")));
  EXPECT_THAT(refusal(dashes + "x"), ElementsAre(HasSubstr("more than 64 levels")));
}

TEST(ParseYaml, ReportsKeysGivenTwiceAndKeepsTheFirst) {
  std::vector<netlists::Fault> faults;
  const auto root = parse_yaml("a: 1\nb: 2\na: 3\n", "f", faults);
  ASSERT_TRUE(root.has_value());
  EXPECT_THAT(words(faults), ElementsAre("f:3:1: error: 'a' is given twice; first in line 1"));
  YamlReader reader("f", faults);
  EXPECT_EQ(YamlMap(reader, *root, "", {"a", "b"}).text("a"), "1");
}

TEST(ReadTextFile, RefusesWhatIsNoFile) {
  std::vector<netlists::Fault> faults;
  EXPECT_FALSE(read_text_file("no/such/file.yaml", faults).has_value());
  EXPECT_FALSE(read_text_file("/", faults).has_value());
  EXPECT_FALSE(read_text_file("/dev/zero", faults).has_value());
  EXPECT_THAT(words(faults),
              ElementsAre("no/such/file.yaml: error: there is no such file",
                          "/: error: is a directory, not a file", "/dev/zero: error: is not a regular file"));
}

class Reading : public testing::Test {
 protected:
  YamlMap map(const std::string& text) {
    root_ = parse_yaml(text, "f", faults_);
    EXPECT_TRUE(root_.has_value());
    return YamlMap(reader_, *root_, "run 'C2'", {"length", "on", "kind", "runs", "n"});
  }
  std::vector<netlists::Fault> faults_;
  YamlReader reader_{"f", faults_};
  std::optional<YamlNode> root_;
};

constexpr Range k_range{0.001, 1e5, "1 mm to 100 km"};

TEST_F(Reading, TakesValues) {
  const auto m = map("{length: 3 m, on: 'Yes', kind: off, runs: [a, b], n: 7}");
  EXPECT_EQ(m.quantity("length", Dimension::length, k_range), 3.0);
  EXPECT_EQ(m.flag("on"), true);
  EXPECT_EQ(m.choice<int>("kind", {{"none", 1}, {"off", 2}}), 2);
  EXPECT_EQ(m.texts("runs", "[a]").size(), 2u);
  EXPECT_EQ(m.whole("n", 1, 9), 7);
  EXPECT_THAT(faults_, IsEmpty());
}

TEST_F(Reading, CollectsEveryFault) {
  const auto m = map("lenght: 3\nlength: 18\non: maybe\nkind: metl\nruns: a\nn: 1.5\n");
  EXPECT_FALSE(m.quantity("length", Dimension::length, k_range));
  EXPECT_FALSE(m.flag("on"));
  EXPECT_FALSE(m.choice<int>("kind", {{"metal", 1}, {"plastic", 2}}));
  EXPECT_TRUE(m.texts("runs", "[C1, C2]").empty());
  EXPECT_FALSE(m.whole("n", 1, 9));
  EXPECT_THAT(
      words(faults_),
      ElementsAre(
          "f:1:1: error: run 'C2': unknown key 'lenght'; the nearest is 'length'",
          "f:2:9: error: run 'C2': length 18 has no unit; write '18 m'",
          "f:3:5: error: run 'C2': on 'maybe' must be on or off",
          "f:4:7: error: run 'C2': kind 'metl' is not one of metal or plastic; the nearest is 'metal'",
          "f:5:7: error: run 'C2': runs must be a list, as in [C1, C2], not a single value",
          "f:6:4: error: run 'C2': n '1.5' must be a whole number from 1 to 9"));
}

TEST_F(Reading, HoldsQuantitiesToTheirRange) {
  EXPECT_FALSE(map("length: -3 m").quantity("length", Dimension::length, k_range));
  EXPECT_FALSE(map("length: 200 km").quantity("length", Dimension::length, k_range));
  EXPECT_THAT(words(faults_),
              ElementsAre("f:1:9: error: run 'C2': length '-3 m' is not within 1 mm to 100 km",
                          "f:1:9: error: run 'C2': length '200 km' is not within 1 mm to 100 km"));
}

TEST_F(Reading, ReportsWhatIsMissingOrEmpty) {
  const auto m = map("n: 1\nlength:\n");
  EXPECT_EQ(m.require("runs"), nullptr);
  EXPECT_EQ(m.require("length"), nullptr);
  EXPECT_THAT(words(faults_), ElementsAre("f:1:1: error: run 'C2': runs is missing",
                                          "f:2:1: error: run 'C2': length has no value"));
}

}  // namespace
}  // namespace io
