#include "netlists/effects.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "netlists/load_effects.h"
#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

using engine::Complex;
using ::testing::HasSubstr;

constexpr double k_two_pi = 2 * std::numbers::pi;

const Effect* effect(const Findings& findings, const std::string& what, const std::string& subject) {
  for (const Effect& found : findings.effects) {
    if (found.what == what && found.subject.find(subject) != std::string::npos) return &found;
  }
  return nullptr;
}

// A control cable whose switched wire is open at the supply end: a coil from its far end to the other pole,
// the wire coupled to the live one only, as the published limits of control-cable length take it.
Port coil_in_cable(double length, double volts, double per_metre, Complex coil) {
  auto matrices = std::make_shared<engine::LineMatrices>();
  matrices->impedance = Eigen::MatrixXcd::Identity(2, 2) * Complex(7.4e-3, 0.0);  // ohm/m, 2.5 mm2
  matrices->capacitance = Eigen::MatrixXd::Zero(2, 2);
  matrices->capacitance << per_metre, -per_metre, -per_metre, per_metre;
  matrices->conductance = Eigen::MatrixXd::Zero(2, 2);
  engine::Network network;
  network.frequency = 50.0;
  network.node_count = 5;
  network.lines.push_back({matrices, length, 1, {1, 2}, {3, 4}});
  network.sources.push_back({1, 0, volts, Complex(0.01, 0.01)});
  network.elements.push_back({4, 0, 1.0 / coil});
  const engine::SolvedNetwork solved(network);
  return {solved.volts(4), solved.source_impedance(4, 0)};
}

// A works engineering note of 2007 gives 910 m at 110 V and 191 m at 240 V for 0.26 uF/km, 50 Hz, a coil of
// 4.5 VA that drops out at 25 %: with the purely inductive coil of its formula. Here the network is solved.
TEST(Effects, ReproduceThePublishedLimitsOfControlCables) {
  for (const auto& [volts, limit] : {std::pair{110.0, 910.0}, std::pair{240.0, 191.0}}) {
    const Complex coil(0.0, volts * volts / 4.5);
    const Port loaded = coil_in_cable(100.0, volts, 0.26e-9, coil);
    const auto share = length_share(without_load(loaded, 1.0 / coil), coil, 0.25 * volts);
    ASSERT_TRUE(share);
    EXPECT_EQ(std::floor(100.0 * *share), limit);  // the note prints whole metres, 910 for 910.6
    // And at that length the network itself holds the coil at its drop-out voltage.
    EXPECT_NEAR(std::abs(coil_in_cable(limit, volts, 0.26e-9, coil).volts), 0.25 * volts, 0.002 * volts);
  }
}

// A coil of power factor 0.3 resonates less with the cable: the limit moves out, to 921 m by bisection of the
// divider of coil and capacitance outside the program.
TEST(Effects, ARealPowerFactorMovesTheLimit) {
  const double volts = 110.0, size = volts * volts / 4.5;
  const Complex coil = std::polar(size, std::acos(0.3));
  const auto share =
      length_share(without_load(coil_in_cable(100.0, volts, 0.26e-9, coil), 1.0 / coil), coil, 0.25 * volts);
  ASSERT_TRUE(share);
  double least = 100.0, most = 2000.0;
  for (int step = 0; step < 60; ++step) {
    const double middle = (least + most) / 2;
    (std::abs(coil_in_cable(middle, volts, 0.26e-9, coil).volts) < 0.25 * volts ? least : most) = middle;
  }
  EXPECT_NEAR(100.0 * *share, least, 1e-3 * least);
  EXPECT_NEAR(least, 921.2, 1.0);  // the wires' resistance is left out of the divider
}

// Coil and cable in resonance put more than the supply across the coil: X_C = X_L with Q = 5, so five times.
TEST(Effects, CoilAndCableResonate) {
  const Complex coil(0.2 * 3000.0, 3000.0);  // ohm
  const double farads = 1 / (k_two_pi * 50 * 3000.0);
  EXPECT_NEAR(std::abs(coil_in_cable(100.0, 110.0, farads / 100.0, coil).volts), 110 * std::sqrt(1 + 25.0),
              3.0);
}

// A current source in effect: a bridge behind C into V_dc, by the charge that swings each half period, summed
// here in small steps of time.
TEST(Effects, RectifiedCurrentAgreesWithTheWaveform) {
  const double frequency = 60.0, farads = 1e-9, peak = 100.0, dc = 20.0;
  double held = 0.0, charge = 0.0;  // V across C; C through the bridge
  const int steps = 200000, periods = 6;
  for (int k = 0; k < steps * periods; ++k) {
    if (k == steps * (periods - 1)) charge = 0.0;
    const double v = peak * std::sin(k_two_pi * k / steps);
    const double before = held;
    if (v - held > dc) held = v - dc;
    if (v - held < -dc) held = v + dc;
    charge += farads * std::abs(held - before);
  }
  const Port port{peak / std::numbers::sqrt2, Complex(0.0, -1 / (k_two_pi * frequency * farads))};
  EXPECT_NEAR(rectified_current(port, dc, frequency), charge * frequency, 1e-3 * charge * frequency);
}

TEST(Effects, RectifiedCurrentBehindAResistanceAgreesWithTheWaveform) {
  const double peak = 170.0, dc = 20.0, ohms = 2e5;
  double sum = 0.0;
  const int steps = 100000;
  for (int k = 0; k < steps; ++k)
    sum += std::max(0.0, std::abs(peak * std::sin(k_two_pi * k / steps)) - dc) / ohms / steps;
  EXPECT_NEAR(rectified_current({peak / std::numbers::sqrt2, ohms}, dc, 60.0), sum, 1e-4 * sum);
  EXPECT_EQ(rectified_current({10.0, ohms}, dc, 60.0), 0.0);  // never reaches it
}

// IEC 61131-2, 100 to 120 V, type 1 (from memory): surely off to 20 V, and to 79 V at 1 mA or less.
TEST(Effects, InputThresholdsAreThoseOfTheStandard) {
  LoadEffect input;
  input.volts = 20.0;
  input.volts_at_low_current = 79.0;
  input.current = 1e-3;
  EXPECT_DOUBLE_EQ(threshold_volts(input, 120.0, 15e3), 20.0);   // 1.33 mA at 20 V already
  EXPECT_DOUBLE_EQ(threshold_volts(input, 120.0, 50e3), 50.0);   // reaches 1 mA at 50 V
  EXPECT_DOUBLE_EQ(threshold_volts(input, 120.0, 100e3), 79.0);  // never draws 1 mA below 79 V
}

std::string switched(const std::string& load, int length = 30) {
  return "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
         "runs: {C1: {from: LP, to: Room, length: " +
         std::to_string(length) +
         " m, raceway: none}}\n"
         "circuits:\n"
         "  L1:\n"
         "    panel: LP\n"
         "    slot: 1\n"
         "    wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12, switched: THHN 12}\n"
         "    lands: {switched: none}\n"
         "    runs: [C1]\n"
         "    loads: [{at: Room, between: [switched, neutral], " +
         load + "}]\n";
}

// A lamp with a filament of 25 W on an idle switched wire does not glow, an LED lamp may: common practice.
TEST(Effects, LedLampsGlowWhereFilamentsDoNot) {
  const Findings led = Solved(switched("kind: led_lamp, power: 9 W")).findings();
  const Effect* glow = effect(led, "lamp_glows", "L1");
  ASSERT_NE(glow, nullptr);
  EXPECT_TRUE(glow->happens);
  ASSERT_TRUE(glow->run_length);
  EXPECT_LT(*glow->run_length, 30.0);
  const Findings filament = Solved(switched("kind: lamp, power: 25 W")).findings();
  EXPECT_EQ(effect(filament, "lamp_glows", "L1"), nullptr);  // below a hundredth of its threshold
}

// The length at which the margin is gone is one at which it is: the model built anew with that length.
TEST(Effects, RunLengthIsWhereTheThresholdIsReached) {
  const Findings first = Solved(switched("kind: plc_input_120_type1", 400)).findings();
  const Effect* found = effect(first, "input_reads_on", "L1");
  ASSERT_NE(found, nullptr);
  ASSERT_TRUE(found->run_length);
  const Findings again =
      Solved(switched("kind: plc_input_120_type1", static_cast<int>(std::lround(*found->run_length))))
          .findings();
  const Effect* there = effect(again, "input_reads_on", "L1");
  ASSERT_NE(there, nullptr);
  EXPECT_NEAR(there->value, there->threshold, 0.02 * there->threshold);  // layouts of the two lengths differ
}

// What is fed by wire at both ends works as drawn: no effect of coupling is told.
TEST(Effects, AFedLoadIsNoEffect) {
  std::string model = switched("kind: contactor_coil");
  const auto at = model.find("[switched, neutral]");
  model.replace(at, 19, "[hot, neutral]");
  EXPECT_EQ(effect(Solved(model).findings(), "coil_stays_in", "L1"), nullptr);
}

// Two equal filter capacitors put a floating chassis at half voltage; its current is that of one of them,
// omega C U: 99.5 uA at 120 V 60 Hz and 159 uA at 230 V 50 Hz for 2.2 nF.
TEST(Effects, AFloatingChassisSitsAtHalfVoltage) {
  for (const auto& [system, frequency, volts] :
       {std::tuple{"120/240", 60.0, 120.0}, std::tuple{"400Y/230", 50.0, 230.0}}) {
    const Solved model("frequency: " + std::to_string(static_cast<int>(frequency)) +
                       " Hz\nsupplies: {T1: {system: " + std::string(system) +
                       "}}\npanels: {LP: {supply: T1}}\n"
                       "runs: {C1: {from: LP, to: Desk, length: 1 m, raceway: none, clearance: 1 m}}\n"
                       "circuits:\n"
                       "  L1:\n"
                       "    panel: LP\n"
                       "    slot: 1\n"
                       "    wires: {hot: THHN 12, neutral: THHN 12, chassis: THHN 12}\n"
                       "    lands: {chassis: none}\n"
                       "    runs: [C1]\n"
                       "    loads:\n"
                       "      - {name: Y1, at: Desk, between: [hot, chassis], kind: filter_capacitor}\n"
                       "      - {name: Y2, at: Desk, between: [neutral, chassis], kind: filter_capacitor}\n");
    const Findings findings = model.findings();
    const ConductorFindings& chassis = conductor(findings, "L1.chassis");
    EXPECT_EQ(chassis.condition, Condition::floating);
    const PlaceFindings* desk = nullptr;
    for (const PlaceFindings& at : chassis.places)
      if (at.place == "Desk") desk = &at;
    ASSERT_NE(desk, nullptr);
    EXPECT_NEAR(std::abs(desk->open_circuit), volts / 2, 0.03 * volts);  // a metre of wire beside 4.4 nF
    EXPECT_NEAR(desk->short_circuit, k_two_pi * frequency * 2.2e-9 * volts, 0.04 * desk->short_circuit);
    const Effect* felt = effect(findings, "person_feels", "L1.chassis");
    ASSERT_NE(felt, nullptr);
    EXPECT_NEAR(felt->value, desk->short_circuit, 0.01 * desk->short_circuit);
    EXPECT_FALSE(felt->happens);
    EXPECT_THAT(felt->subject, HasSubstr("AC-1"));
  }
}

// Residual current goes with the length of the live wire along an earthed plane; more than 4 mA trips.
TEST(Effects, AResidualCurrentDeviceSeesTheCablesCharge) {
  const Solved model(
      one_circuit("300 m", "EMT 1/2", "Pump") +
      "    loads: [{at: Pump, between: [hot, neutral], kind: ground_fault_receptacle, state: standby}]\n");
  const Findings findings = model.findings();
  const Effect* trip = effect(findings, "device_trips", "L1");
  ASSERT_NE(trip, nullptr);
  EXPECT_DOUBLE_EQ(trip->threshold, 4e-3);
  // The charging current of the hot wire against all but the neutral, from the section's own matrix.
  const engine::Line& line = model.lowered.network.lines.front();
  Eigen::MatrixXd c = line.matrices->capacitance;
  const auto& names = model.lowered.line_conductors.front();
  double to_rest = 0.0;  // F/m
  for (std::size_t i = 0; i < names.size(); ++i) {
    if (names[i] != "L1.hot") continue;
    for (std::size_t j = 0; j < names.size(); ++j)
      if (names[j] == "L1.hot" || names[j] == "L1.neutral")
        to_rest += c(static_cast<int>(i), static_cast<int>(j));
  }
  EXPECT_NEAR(trip->value, k_two_pi * 60 * to_rest * 300 * 120, 0.03 * trip->value);
}

// An isolated 120 V supply of two legs: with one faulted to ground a person on the other has all of 120 V,
// and the current is that of the body network alone, 120 V / 1986 ohm.
TEST(Effects, AFaultOfAnIsolatedSupplyPutsItsVoltageOnTheOtherLeg) {
  const Findings findings =
      Solved(
          "supplies: {IT1: {system: 120 two-wire, grounding: isolated, insulation: 10 Mohm}}\n"
          "panels: {IP: {supply: IT1}}\n"
          "runs: {C1: {from: IP, to: Room, length: 20 m, raceway: EMT 1/2}}\n"
          "circuits:\n"
          "  I1:\n"
          "    panel: IP\n"
          "    slot: [1, 3]\n"
          "    wires: {line1: THHN 12, line2: THHN 12, ground: THHN 12}\n"
          "    runs: [C1]\n"
          "    loads: []\n")
          .findings();
  const Effect* felt = effect(findings, "person_feels", "I1.line");
  ASSERT_NE(felt, nullptr);
  EXPECT_THAT(felt->subject, HasSubstr("faulted to ground"));
  EXPECT_THAT(felt->subject, HasSubstr("AC-4"));
  EXPECT_NEAR(felt->value, 120.0 / 1986.0, 1e-3 * felt->value + 1e-4);
}

}  // namespace
}  // namespace netlists
