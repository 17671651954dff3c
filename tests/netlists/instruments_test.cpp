// Instruments with three terminals, needles on every range, receptacle testers, and readings that lie both
// ways.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "io/catalogue_file.h"
#include "netlists/reading.h"
#include "netlists/receptacle.h"
#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

using Complex = std::complex<double>;
using ::testing::HasSubstr;

constexpr double k_two_pi = 2 * std::numbers::pi;

const Reading* find(const ConductorFindings& found, const std::string& place, const std::string& instrument,
                    const std::string& reference) {
  for (const PlaceFindings& at : found.places) {
    for (const Reading& reading : at.readings) {
      if (at.place == place && reading.instrument == instrument && reading.reference == reference)
        return &reading;
    }
  }
  return nullptr;
}

// One soft point of U behind C, the other tied to earth through C2 alone. By hand: the common lead's
// capacitance Cc adds to whichever point it is on, so the two readings are dividers of capacitances.
TEST(SoftPair, SwappedLeadsReadByTheCapacitiveDivider) {
  InstrumentType meter;
  meter.resistance = 1e15;
  meter.common_to_earth = 150e-12;
  const double w = k_two_pi * 60, c1 = 100e-12, c2 = 50e-12;
  const PointPair points{80.0, 20.0, Complex(0, -1 / (w * c1)), Complex(0, -1 / (w * c2)), 0.0};
  const Reading reading = read_soft(meter, points, 60.0);
  EXPECT_NEAR(reading.volts, 80.0 - 20.0 * c2 / (c2 + 150e-12), 1e-6);
  ASSERT_TRUE(reading.swapped);
  EXPECT_NEAR(*reading.swapped, std::abs(20.0 - 80.0 * c1 / (c1 + 150e-12)), 1e-6);
}

TEST(SoftPair, WithoutThatCapacitanceTheLeadsDoNotMatter) {
  InstrumentType meter;
  meter.resistance = 10e6;
  const PointPair points{80.0, 20.0, Complex(0, -1e6), Complex(0, -3e6), Complex(0, -2e5)};
  const Reading reading = read_soft(meter, points, 60.0);
  EXPECT_FALSE(reading.swapped);
  const Complex between(0, -1e6 - 3e6 + 2 * 2e5);
  EXPECT_NEAR(reading.volts, read(meter, {60.0, between}, 60.0).volts, 1e-9);
}

// With its common lead in the air a meter of R beside no capacitance, 20 pF to earth: U R / |R + 1/(jwC)|.
TEST(LeadInAir, ClosesThroughTheCaseAlone) {
  InstrumentType meter;
  meter.resistance = 10e6;
  meter.common_to_earth = 20e-12;
  const double x = 1 / (k_two_pi * 60 * 20e-12);
  EXPECT_NEAR(read_lead_in_air(meter, {120.0, 1.0}, 60.0), 120.0 * 10e6 / std::hypot(10e6, x), 1e-3);
}

// 5 kohm per volt (common practice): 12.5 kohm, 50 kohm, 250 kohm, 1.25 Mohm, 2.5 Mohm.
TEST(Needle, HasTheResistanceOfEachRange) {
  const InstrumentType& needle = io::builtin_catalogue().instruments.at("analog_5k");
  const std::pair<double, double> expected[] = {
      {2.5, 12.5e3}, {10, 50e3}, {50, 250e3}, {250, 1.25e6}, {500, 2.5e6}};
  ASSERT_EQ(needle.ranges.size(), 5u);
  const Port port{90.0, Complex(0.0, -500e3)};
  const Reading reading = read(needle, port, 60.0);
  for (std::size_t i = 0; i < 5; ++i) {
    EXPECT_DOUBLE_EQ(needle.ranges[i].full_scale, expected[i].first);
    EXPECT_DOUBLE_EQ(needle.ranges[i].resistance, expected[i].second);
    const double r = expected[i].second;
    EXPECT_NEAR(reading.on_ranges[i].volts, 90.0 * r / std::hypot(r, 500e3), 1e-9);
  }
  // 88 V on 500, 84 V on 250; the 50 V range would show 40 V, but nobody goes there from 84 V.
  EXPECT_EQ(reading.range, 250.0);
}

// The patterns printed on such testers, common practice.
TEST(Receptacle, PatternsHaveTheirMeaning) {
  const auto meaning = [](double hn, double hg, double ng) {
    ReceptaclePattern pattern;
    pattern.hot_neutral = hn;
    pattern.hot_ground = hg;
    pattern.neutral_ground = ng;
    name_pattern(pattern, 20.0);
    return pattern.meaning;
  };
  EXPECT_THAT(meaning(120, 120, 0), HasSubstr("as it should be"));
  EXPECT_EQ(meaning(120, 0, 0), "open ground");
  EXPECT_EQ(meaning(0, 120, 0), "open neutral");
  EXPECT_EQ(meaning(120, 0, 120), "hot and neutral reversed");
  EXPECT_EQ(meaning(0, 120, 120), "hot and ground reversed");
  EXPECT_THAT(meaning(0, 0, 0), HasSubstr("open hot"));
}

std::string receptacle(const std::string& more) {
  return one_circuit("20 m", "none") +
         "    loads: []\n"
         "instruments: [dmm, receptacle_tester_led]\n" +
         more;
}

TEST(Receptacle, ReadsTheFaultsOfAModel) {
  const auto lit = [](const std::string& more) {
    const Findings findings = Solved(receptacle(more)).findings();
    EXPECT_EQ(findings.patterns.size(), 1u);
    return findings.patterns.empty() ? "" : findings.patterns.front().meaning;
  };
  EXPECT_THAT(lit(""), HasSubstr("as it should be"));
  // The lamps of the tester itself feed a neutral that is cut: L-N and N-G share the voltage, 60 V each, and
  // lamps that respond from 20 V all light: a pattern that no single fault has on the printed list.
  EXPECT_EQ(lit("cuts: [{at: LP, wire: L1.neutral, side: C1}]\n"), "no pattern of one fault");
}

// ---- conditions that lie both ways ---------------------------------------------------------------------

std::string spare(const std::string& length, const std::string& more) {
  return one_circuit(length, "none") +
         "    loads: []\n"
         "  spare: {wires: {a: THHN 12, b: THHN 12}, runs: [C1]}\n" +
         more;
}

// Two spares that hang together read little to each other and much to ground.
TEST(BothWays, TwoFloatingWiresReadLittleToEachOther) {
  const Findings findings = Solved(spare("40 m", "")).findings();
  const ConductorFindings& a = conductor(findings, "spare.a");
  EXPECT_EQ(a.condition, Condition::floating);
  const double between = reading(a, "Room", "dmm", "spare.b");
  EXPECT_LT(between, 0.5 * reading(a, "Room", "dmm", "ground"));
}

// A low-impedance mode of 300 kohm keeps most of a coupled voltage on a long run; one of 3 kohm does not.
TEST(BothWays, AWeakLowImpedanceModeStillShowsALongRun) {
  const Findings findings =
      Solved(spare("400 m", "instruments: [dmm, low_impedance, low_impedance_weak]\n")).findings();
  const ConductorFindings& a = conductor(findings, "spare.a");
  const double open = reading(a, "Room", "dmm", "ground");
  EXPECT_GT(reading(a, "Room", "low_impedance_weak", "ground"), 0.7 * open);
  EXPECT_LT(reading(a, "Room", "low_impedance", "ground"), 0.1 * open);
}

// A leak of 300 kohm behind which 3 kohm shows next to nothing: leakage, whose 120 V R / (R + 300 kohm) is
// most of the reading, and nothing settles it.
TEST(BothWays, AWeakRealFeedIsCalledLeakage) {
  const Findings findings =
      Solved(spare("10 m", "leaks: [{at: Room, between: [L1.hot, spare.a], resistance: 300 kohm}]\n"))
          .findings();
  const ConductorFindings& a = conductor(findings, "spare.a");
  EXPECT_TRUE(a.leakage);
  EXPECT_NEAR(reading(a, "Room", "low_impedance", "ground"), 120.0 * 3 / 303, 0.05);
  EXPECT_FALSE(a.settle.instrument);
  EXPECT_THAT(a.settle.why, HasSubstr("leakage"));
  EXPECT_FALSE(conductor(Solved(spare("10 m", "")).findings(), "spare.a").leakage);
}

// A detector without contact responds to a floating wire as to a fed one.
TEST(BothWays, ANonContactDetectorCannotTell) {
  const Findings findings = Solved(spare("40 m", "instruments: [dmm, non_contact_detector]\n")).findings();
  const Reading* hot = find(conductor(findings, "L1.hot"), "Room", "non_contact_detector", "ground");
  ASSERT_NE(hot, nullptr);
  EXPECT_TRUE(hot->indicates);
  EXPECT_EQ(find(conductor(findings, "L1.hot"), "Room", "non_contact_detector", "L1.neutral"), nullptr);
}

// A magnetically induced voltage has an impedance of milliohms behind it: 3 kohm shows what 10 Mohm shows.
TEST(BothWays, AnInducedLoopDoesNotCollapse) {
  std::string model = spare("100 m", "bonds: [{at: LP, joins: [spare.a, ground]}]\n");
  const auto at = model.find("loads: []");
  model.replace(at, 9, "loads: [{at: Room, between: [hot, neutral], kind: resistive, power: 1800 W}]");
  const Solved solved(model);
  const Findings findings = solved.findings();
  const ConductorFindings& a = conductor(findings, "spare.a");
  EXPECT_EQ(a.condition, Condition::grounded);
  const double high = reading(a, "Room", "dmm", "ground");
  EXPECT_GT(high, 1e-4);
  EXPECT_NEAR(reading(a, "Room", "low_impedance", "ground"), high, 0.01 * high);
}

}  // namespace
}  // namespace netlists
