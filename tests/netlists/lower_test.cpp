#include "netlists/lower.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

using ::testing::Contains;
using ::testing::HasSubstr;

// One panel, one box, one room; what a test adds comes after.
std::string branch(const std::string& more) {
  return "frequency: 60 Hz\n"
         "supplies: {T1: {system: 120/240, grounding: solid}}\n"
         "panels: {LP: {supply: T1}}\n"
         "runs:\n"
         "  C1: {from: LP, to: Box, length: 20 m, raceway: EMT 3/4}\n"
         "  C2: {from: Box, to: Room, length: 10 m, raceway: PVC 40 3/4}\n" +
         more;
}

const char* const k_circuit =
    "circuits:\n"
    "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}, runs: [C1, C2], "
    "loads: []}\n";

TEST(Lower, JoinsWhatTouchesAndNothingElse) {
  const Solved model(branch(k_circuit));
  EXPECT_EQ(model.node("L1.neutral@LP"), 0);  // the grounded pole of a supply without an electrode
  EXPECT_EQ(model.node("ground@LP"), 0);
  EXPECT_EQ(model.node("C1.raceway@Box"), model.node("ground@Box"));  // bonded at a metal box
  EXPECT_EQ(model.node("L1.ground@Box"), model.node("ground@Box"));
  EXPECT_NE(model.node("L1.neutral@Box"), model.node("ground@Box"));
  EXPECT_EQ(model.node("L1.ground@Room"), model.node("ground@Room"));
  ASSERT_EQ(model.lowered.network.lines.size(), 2u);
  EXPECT_EQ(model.lowered.line_conductors[0].back(), "C1.raceway");
  EXPECT_EQ(model.lowered.network.lines[1].from.size(), 3u);  // no raceway in plastic
}

// Armour a micrometre from armour took 400 harmonics and half a minute a layout, for a capacitance
// between two tubes that are bonded to each other.
TEST(RunSection, KeepsBareArmourApart) {
  const Solved model(
      branch("circuits:\n"
             "  M1: {panel: LP, slot: 1, cable: MC 12-2, runs: [C3], loads: []}\n"
             "  M3: {panel: LP, slot: 3, cable: MC 12-2, runs: [C3], loads: []}\n")
          .replace(branch("").find("  C2:"), 0, "  C3: {from: LP, to: Rack, length: 9 m, raceway: none}\n"));
  const auto& shells = run_section(model.building, "C3", 1).section.shells;
  ASSERT_EQ(shells.size(), 2u);
  const double gap = (shells[0].centre - shells[1].centre).norm() - 2 * shells[0].covered_radius();
  EXPECT_GE(gap, 99e-6);   // m, twice the 50 um that bare metal keeps on each side
  EXPECT_LE(gap, 110e-6);  // m
}

TEST(Lower, BreakerOffLeavesTheHotOpen) {
  const Solved on(branch(k_circuit));
  EXPECT_NEAR(std::abs(on.volts("L1.hot@Room")), 120, 0.1);
  const Solved off(branch(std::string(k_circuit) + "stages: [{name: off, set: {L1.breaker: off}}]\n"));
  EXPECT_LT(std::abs(off.volts("L1.hot@Room")), 60);
  EXPECT_THAT(off.lowered.states, Contains(HasSubstr("off")));
}

TEST(Lower, SharedNeutralIsOneConductorInTheRunsOfBoth) {
  const Solved model(branch(
      "circuits:\n"
      "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12}, runs: [C1], loads: []}\n"
      "  L3: {panel: LP, slot: 3, wires: {hot: THHN 12, neutral: L1.neutral}, runs: [C1, C2], loads: []}\n"));
  EXPECT_THAT(model.lowered.line_conductors[0],
              testing::UnorderedElementsAre("L1.hot", "L1.neutral", "L3.hot", "C1.raceway"));
  EXPECT_THAT(model.lowered.line_conductors[1], testing::UnorderedElementsAre("L1.neutral", "L3.hot"));
  // Slots 1 and 3 are opposite legs (common practice): 240 V between them.
  EXPECT_NEAR(std::abs(model.volts("L1.hot@LP", "L3.hot@LP")), 240, 0.01);
}

TEST(Lower, CutPartsAWireIntoPieces) {
  const Solved model(branch(std::string(k_circuit) + "cuts: [{at: Box, wire: L1.neutral, side: C2}]\n"));
  std::vector<std::string> ids;
  for (const ConductorPath& path : model.lowered.conductors) ids.push_back(path.id);
  EXPECT_THAT(ids, Contains("L1.neutral"));
  EXPECT_THAT(ids, Contains("L1.neutral/C2"));
  EXPECT_NE(model.node("L1.neutral@Box"), model.node("L1.neutral/C2@Box"));
}

TEST(Lower, CutAtThePanelLeavesTheWholeWireItsName) {
  const Solved model(branch(std::string(k_circuit) + "cuts: [{at: LP, wire: L1.neutral, side: C1}]\n"));
  EXPECT_NE(model.node("L1.neutral@LP"), 0);
  EXPECT_NE(model.node("L1.neutral@Room"), 0);
}

TEST(Lower, IsolatedGroundPassesThroughItsBoxes) {
  const Solved model(
      branch("circuits:\n"
             "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: {type: THHN 12, "
             "isolated_ground: yes}}, runs: [C1], loads: []}\n"));
  EXPECT_EQ(model.node("L1.ground@LP"), model.node("ground@LP"));
  EXPECT_NE(model.node("L1.ground@Box"), model.node("ground@Box"));
}

TEST(Lower, RacewayBondedAtOneEndStaysOpenAtTheOther) {
  const Solved model(
      "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
      "runs: {C1: {from: LP, to: Box, length: 20 m, raceway: EMT 3/4, bonded: from}}\n" +
      std::string("circuits:\n  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: "
                  "THHN 12}, runs: [C1], loads: []}\n"));
  EXPECT_EQ(model.node("C1.raceway@LP"), model.node("ground@LP"));
  EXPECT_NE(model.node("C1.raceway@Box"), model.node("ground@Box"));
}

// The capacitive divider in closed form, from the very matrices of the section: V = -C_fe V_e / C_ff for
// one floating wire beside one live wire in a tube at earth.
TEST(Lower, SpareReadsTheDividerOfItsSection) {
  const Solved model(
      "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
      "runs: {C1: {from: LP, to: Box, length: 20 m, raceway: EMT 3/4}}\n"
      "circuits:\n"
      "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12}, runs: [C1], loads: []}\n"
      "  spare: {wires: {a: THHN 12}, runs: [C1]}\n");
  const engine::LineMatrices& m = *model.lowered.network.lines[0].matrices;
  const auto& names = model.lowered.line_conductors[0];
  const auto row = [&](const std::string& name) {
    return std::find(names.begin(), names.end(), name) - names.begin();
  };
  const double omega = 2 * 3.141592653589793 * 60;
  const auto y = [&](auto i, auto j) {
    return engine::Complex(m.conductance(i, j), omega * m.capacitance(i, j));
  };
  const engine::Complex expected =
      -120.0 * y(row("spare.a"), row("L1.hot")) / y(row("spare.a"), row("spare.a"));
  EXPECT_LT(std::abs(model.volts("spare.a@Box") - expected), 1e-5 * std::abs(expected));  // series drops
}

struct SystemCase {
  const char* system;
  const char* grounding;
  int slot;
  double to_ground;  // V
};

class SystemVoltage : public testing::TestWithParam<SystemCase> {};

// Line-to-ground voltages of the trade's systems (common practice; 120 * sqrt 3 = 208 on the high leg). Where
// nothing is grounded, equal strays far above what a metre of one leg's wire adds put the middle of the
// windings at earth.
TEST_P(SystemVoltage, IsThatOfTheTrade) {
  const SystemCase& c = GetParam();
  const std::string grounding = *c.grounding ? std::string(", grounding: ") + c.grounding : "";
  const bool floating = std::string(c.system) == "230 IT" || std::string(c.grounding) == "isolated";
  const std::string stray = floating ? ", stray: {line_to_ground: [100 nF]}" : "";
  const Solved model("supplies: {T1: {system: " + std::string(c.system) + grounding + stray +
                     "}}\npanels: {LP: {supply: T1}}\n" +
                     "runs: {C1: {from: LP, to: Box, length: 1 m, raceway: EMT 3/4}}\n"
                     "circuits: {L1: {panel: LP, slot: " +
                     std::to_string(c.slot) + ", wires: {hot: THHN 12}, runs: [C1], loads: []}}\n");
  EXPECT_NEAR(std::abs(model.volts("L1.hot@Box")), c.to_ground, 0.02 * c.to_ground + 1e-3);
}

INSTANTIATE_TEST_SUITE_P(
    Systems, SystemVoltage,
    testing::Values(SystemCase{"120/240", "", 1, 120}, SystemCase{"120/240", "", 3, 120},
                    SystemCase{"208Y/120", "", 1, 120}, SystemCase{"208Y/120", "", 3, 120},
                    SystemCase{"480Y/277", "", 5, 277}, SystemCase{"400Y/230", "", 1, 230},
                    SystemCase{"240 delta high leg", "", 1, 120},
                    SystemCase{"240 delta high leg", "", 3, 207.8},
                    SystemCase{"240 delta high leg", "", 5, 120}, SystemCase{"230 IT", "", 1, 132.8},
                    SystemCase{"120 two-wire", "isolated", 1, 60}));

TEST(Lower, SecondaryDiesWithItsPrimary) {
  const std::string text =
      "supplies:\n"
      "  T1: {system: 120/240}\n"
      "  IT1: {system: 120 two-wire, grounding: isolated, fed_from: {circuit: L1}}\n"
      "panels: {LP: {supply: T1}, IP: {supply: IT1}}\n"
      "runs:\n"
      "  C1: {from: LP, to: Vault, length: 5 m, raceway: EMT 3/4}\n"
      "  C2: {from: IP, to: Room, length: 15 m, raceway: PVC 40 3/4}\n"
      "circuits:\n"
      "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}, runs: [C1], "
      "loads: []}\n"
      "  I1: {panel: IP, slot: [1, 3], wires: {line1: THHN 12, line2: THHN 12, ground: THHN 12}, runs: [C2], "
      "loads: []}\n"
      "stages: [{name: as found}, {name: off, set: {L1.breaker: off}}]\n";
  const Solved live(text);
  EXPECT_NEAR(std::abs(live.volts("I1.line1@Room", "I1.line2@Room")), 120, 0.1);
  const Solved dead(text, "off");
  EXPECT_LT(std::abs(dead.volts("I1.line1@Room", "I1.line2@Room")), 1e-3);
  EXPECT_THAT(dead.lowered.states, Contains(HasSubstr("its primary is not fed")));
}

TEST(Lower, AlongsideCouplesTwoRuns) {
  const std::string text =
      "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
      "runs:\n"
      "  C1: {from: LP, to: East, length: 30 m, raceway: none}\n"
      "  C2: {from: LP, to: West, length: 20 m, raceway: none}\n"
      "circuits:\n"
      "  L1: {panel: LP, slot: 1, cable: NM-B 12-2, runs: [C1], loads: []}\n"
      "  old: {cable: NM-B 12-2, runs: [C2]}\n";
  const Solved apart(text);
  const Solved beside(text + "alongside: [{runs: [C1, C2], spacing: 5 mm, over: 12 m}]\n");
  EXPECT_LT(std::abs(apart.volts("old.hot@West")), 0.5);
  EXPECT_GT(std::abs(beside.volts("old.hot@West")), 3 * std::abs(apart.volts("old.hot@West")));
  EXPECT_THAT(beside.lowered.line_runs, Contains("C1+C2"));
  double metres = 0;
  for (const engine::Line& line : beside.lowered.network.lines) metres += line.length;
  EXPECT_NEAR(metres, 12 + 18 + 8, 1e-9);
}

TEST(Lower, SameSeedSameNetwork) {
  const Building building = building_of(branch(k_circuit));
  const Lowered a = lower(building, "", 7);
  const Lowered b = lower(building, "", 7);
  const Lowered c = lower(building, "", 8);
  EXPECT_EQ(a.network.lines[0].matrices->capacitance, b.network.lines[0].matrices->capacitance);
  EXPECT_NE(a.network.lines[0].matrices->capacitance, c.network.lines[0].matrices->capacitance);
}

TEST(Lower, RefusesAStageThatIsNotThere) {
  const Building building = building_of(branch(std::string(k_circuit) + "stages: [{name: As found}]\n"));
  try {
    lower(building, "As fond", 1);
    FAIL();
  } catch (const std::invalid_argument& e) {
    EXPECT_THAT(e.what(), HasSubstr("'As found'"));
  }
}

}  // namespace
}  // namespace netlists
