#include "netlists/fault.h"

#include <gtest/gtest.h>

namespace netlists {
namespace {

TEST(Fault, PrintsAsCompilersDo) {
  EXPECT_EQ(to_string({Severity::error, {"annex.yaml", 17, 42}, "it is wrong"}),
            "annex.yaml:17:42: error: it is wrong");
  EXPECT_EQ(to_string({Severity::warning, {"annex.yaml", 0, 0}, "it is odd"}),
            "annex.yaml: warning: it is odd");
  EXPECT_EQ(to_string({Severity::error, {}, "it is wrong"}), "error: it is wrong");
}

TEST(Fault, AWarningIsNoError) {
  EXPECT_FALSE(any_error({}));
  EXPECT_FALSE(any_error({{Severity::warning, {}, ""}}));
  EXPECT_TRUE(any_error({{Severity::warning, {}, ""}, {Severity::error, {}, ""}}));
}

TEST(Nearest, ForgivesOneSlipInThreeLetters) {
  const std::vector<std::string> keys{"switches", "slot", "runs", "at"};
  EXPECT_EQ(nearest("swiches", keys), "switches");
  EXPECT_EQ(nearest("slots", keys), "slot");
  EXPECT_EQ(nearest("ta", keys), "");  // two slips in two letters
  EXPECT_EQ(nearest("a", keys), "at");
  EXPECT_EQ(nearest("breaker", keys), "");
  EXPECT_EQ(nearest("", {}), "");
  EXPECT_EQ(nearest_hint("swiches", keys), "; the nearest is 'switches'");
  EXPECT_EQ(nearest_hint("breaker", keys), "");
}

// A word far longer than all candidates costs nothing: its distance is never less than the difference.
TEST(Nearest, TakesEndlessWords) { EXPECT_EQ(nearest(std::string(1'000'000, 'x'), {"slot"}), ""); }

TEST(SortByPlace, OrdersAndDropsRepetitions) {
  const Fault a{Severity::error, {"m", 2, 9}, "a"}, b{Severity::error, {"m", 10, 1}, "b"},
      c{Severity::warning, {"m", 2, 9}, "c"};
  std::vector<Fault> faults{b, c, a, b};
  sort_by_place(faults);
  ASSERT_EQ(faults.size(), 3u);
  EXPECT_EQ(faults[0].what, "a");
  EXPECT_EQ(faults[1].what, "c");
  EXPECT_EQ(faults[2].what, "b");
}

}  // namespace
}  // namespace netlists
