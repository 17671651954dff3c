#include "netlists/reading.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

namespace netlists {
namespace {

InstrumentType meter(double resistance, double capacitance = 0.0) {
  InstrumentType type;
  type.name = "meter";
  type.resistance = resistance;
  type.capacitance = capacitance;
  return type;
}

InstrumentType needle() {  // 5 kohm per volt, common practice
  InstrumentType type;
  type.name = "analog_5k";
  for (const double full : {2.5, 10.0, 50.0, 250.0, 500.0}) type.ranges.push_back({full, 5e3 * full});
  return type;
}

// The capacitance at which the reactance equals the meter's resistance takes the reading to 0.707 of
// the open-circuit voltage: the pairs are those of the trade's loading table (derived, 60 and 50 Hz).
TEST(Read, FollowsTheLoadingTable) {
  struct Row {
    double resistance, at_60, at_50;  // ohm, F, F
  };
  const Row rows[] = {{10e6, 0.265e-9, 0.318e-9}, {1e6, 2.65e-9, 3.18e-9}, {300e3, 8.8e-9, 10.6e-9},
                      {100e3, 26.5e-9, 31.8e-9},  {10e3, 265e-9, 318e-9},  {3e3, 884e-9, 1.06e-6}};
  for (const Row& row : rows) {
    for (const auto& [frequency, c] : {std::pair{60.0, row.at_60}, std::pair{50.0, row.at_50}}) {
      const Port port{100.0, std::complex<double>(0, -1 / (2 * std::numbers::pi * frequency * c))};
      EXPECT_NEAR(read(meter(row.resistance), port, frequency).volts, 100 / std::sqrt(2.0), 0.3)
          << row.resistance;
    }
  }
}

// Closed form: a divider of two capacitances, loaded by a meter of resistance and capacitance.
TEST(Read, LoadsACapacitiveDividerLikeTheClosedForm) {
  const double omega = 2 * std::numbers::pi * 60, c12 = 2e-9, c20 = 3e-9, r = 10e6, cm = 100e-12, u = 120;
  const Port port{u * c12 / (c12 + c20), std::complex<double>(0, -1 / (omega * (c12 + c20)))};
  const double expected = u * omega * c12 / std::hypot(1 / r, omega * (c12 + c20 + cm));
  EXPECT_NEAR(read(meter(r, cm), port, 60).volts, expected, 1e-12 * expected);
}

TEST(Read, StiffSourceIsShownInFull) { EXPECT_NEAR(read(meter(3e3), {120.0, 0.02}, 60).volts, 120.0, 1e-3); }

// A person goes down as long as the next range holds the pointer: 120 V stiff stays on 250 V, and a
// soft 52 V that the 250 kohm of the 50 V range pulls under 50 V ends there.
TEST(Read, TakesTheRangeAPersonSettlesOn) {
  const Reading stiff = read(needle(), {120.0, 1.0}, 60);
  EXPECT_EQ(stiff.range, 250.0);
  const Reading soft = read(needle(), {52.0, std::complex<double>(0, -530e3)}, 60);
  EXPECT_EQ(soft.range, 50.0);
  EXPECT_NEAR(soft.volts, 52 * 250e3 / std::hypot(250e3, 530e3), 1e-9);
  EXPECT_EQ(resistance_in_force(needle(), soft), 250e3);
}

TEST(Read, IndicatorsIndicateFromTheirThreshold) {
  InstrumentType lamp = meter(200e3);
  lamp.kind = InstrumentKind::indicator;
  lamp.threshold = 80;
  EXPECT_TRUE(read(lamp, {120.0, 0.1}, 60).indicates);
  EXPECT_FALSE(read(lamp, {120.0, std::complex<double>(0, -500e3)}, 60).indicates);
}

}  // namespace
}  // namespace netlists
