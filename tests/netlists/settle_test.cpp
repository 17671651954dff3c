#include "netlists/settle.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

namespace netlists {
namespace {

using ::testing::HasSubstr;

// 3 kohm at 120 V: 120 * 3 / (3 + 240) = 1.48 V by Ohm's law.
TEST(WeakestSource, IsOhmsLaw) { EXPECT_NEAR(weakest_source_reading(120, 3e3, 0.5e-3), 1.4815, 1e-4); }

TEST(SettleCoupling, PicksTheInstrumentThatSeparatesBest) {
  const Settle settle = settle_coupling({{"dmm", 10e6, 41}, {"low_impedance", 3e3, 0.18}}, {120, 48, 0.5e-3});
  ASSERT_TRUE(settle.instrument);
  EXPECT_EQ(*settle.instrument, "low_impedance");
  EXPECT_NEAR(settle.treat_as_live_above, 1.4815, 1e-4);
  EXPECT_DOUBLE_EQ(settle.expect, 0.18);
  EXPECT_THAT(settle.why, HasSubstr("never proves"));
}

// "Treat as live above 117 V" was once the advice for a 10 Mohm meter: a supply that sags by 10 % reads less.
TEST(SettleCoupling, TakesNoInstrumentThatLoadsNothing) {
  const Settle settle = settle_coupling({{"dmm", 10e6, 2}, {"analog_5k", 1.25e6, 1}}, {120, 48, 0.5e-3});
  EXPECT_FALSE(settle.instrument);
  EXPECT_DOUBLE_EQ(settle.treat_as_live_above, 0.0);
}

// 200 kohm shows 120 * 200 / (200 + 240) = 54.5 V of the weakest source; from 48 V on it looks live.
TEST(SettleCoupling, NeverAllowsWhatLooksLive) {
  const Settle settle = settle_coupling({{"meter", 200e3, 2}}, {120, 48, 0.5e-3});
  ASSERT_TRUE(settle.instrument);
  EXPECT_DOUBLE_EQ(settle.treat_as_live_above, 48);
  EXPECT_THAT(settle.why, HasSubstr("54.5 V"));
}

// A long run: the reading is above half of what the weak source shows.
TEST(SettleCoupling, NamesNoInstrumentWhereNoneSeparates) {
  const Settle settle =
      settle_coupling({{"low_impedance_weak", 200e3, 45}, {"low_impedance", 3e3, 0.9}}, {120, 48, 0.5e-3});
  EXPECT_FALSE(settle.instrument);
  EXPECT_THAT(settle.why, HasSubstr("10 kohm"));
  EXPECT_THAT(settle.why, HasSubstr("one at a time"));
}

// With draws it is the 95th percentile that must lie below the limit, and the limit is what all but one in
// twenty of the weakest sources show: below 1.48 V by 1.645 of the spread in quadrature.
TEST(SettleCoupling, JudgesByTheBandWhereThereIsOne) {
  const RealSource source{120, 48, 0.5e-3, 0.03, 0.03, 0.012};
  const Band narrow{0.1, 0.18, 0.3};
  const Settle settle = settle_coupling({{"low_impedance", 3e3, 0.18, narrow}}, source);
  ASSERT_TRUE(settle.instrument);
  const double behind = 240.0 / 243.0;  // of the EMF, what the instrument does not get
  const double spread = std::hypot((1 - behind) * 0.03, behind * 0.03, 0.012);
  EXPECT_NEAR(settle.treat_as_live_above, 1.4815 * std::exp(-1.6448536 * spread), 1e-4);
  EXPECT_LT(settle.treat_as_live_above, 1.4815);
  ASSERT_TRUE(settle.source_taken_for_coupling);
  EXPECT_NEAR(*settle.source_taken_for_coupling, 0.05, 1e-9);
  EXPECT_THAT(settle.why, HasSubstr("0.1 V to 0.3 V"));
  // The same median with a tail above the limit settles nothing.
  EXPECT_FALSE(settle_coupling({{"low_impedance", 3e3, 0.18, Band{0.1, 0.18, 1.45}}}, source).instrument);
}

TEST(SettleIsolated, SaysThatNoReadingToGroundSettlesIt) {
  const Settle settle = settle_isolated("IT1", 120);
  EXPECT_FALSE(settle.instrument);
  EXPECT_THAT(settle.why, HasSubstr("no reading to ground settles it"));
  EXPECT_THAT(settle.why, HasSubstr("full voltage to ground"));
}

}  // namespace
}  // namespace netlists
