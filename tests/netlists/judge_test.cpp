#include "netlists/judge.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

using ::testing::HasSubstr;

std::string open_neutral(const std::string& load) {
  return one_circuit("25 m", "EMT 1/2") +
         "    loads: [{at: Room, between: [hot, neutral], kind: resistive, " + load +
         "}]\n"
         "cuts: [{at: LP, wire: L1.neutral, side: C1}]\n";
}

// An open neutral behind 900 W: full voltage on every instrument, and never a phantom.
TEST(Judge, OpenNeutralBehindALoadIsThroughLoad) {
  const Findings findings = Solved(open_neutral("power: 900 W")).findings();
  const ConductorFindings& neutral = conductor(findings, "L1.neutral");
  EXPECT_EQ(neutral.condition, Condition::through_load);
  EXPECT_EQ(neutral.misleads, Misleads::no);
  for (const char* instrument : {"dmm", "low_impedance", "analog_5k"}) {
    EXPECT_NEAR(reading(neutral, "Room", instrument, "ground"), 120, 1.2) << instrument;
  }
  EXPECT_FALSE(neutral.settle.instrument);
  EXPECT_THAT(neutral.settle.why, HasSubstr("treat as live"));
}

// The ground wire beside an open neutral reads 120 V to it: that speaks of the neutral.
TEST(Judge, AGroundWireIsNotBlamedForAFedNeutral) {
  const Findings findings = Solved(open_neutral("power: 900 W")).findings();
  const ConductorFindings& ground = conductor(findings, "L1.ground");
  EXPECT_EQ(ground.condition, Condition::grounded);
  EXPECT_NEAR(reading(ground, "Room", "dmm", "L1.neutral"), 120, 1.2);
  EXPECT_EQ(ground.misleads, Misleads::no);
  // Its hot reads nothing to the same neutral, and that can mislead.
  EXPECT_EQ(conductor(findings, "L1.hot").misleads, Misleads::false_dead);
}

// A cable of a dead end beside nothing live: the millivolts on it come from a neutral's drop, partly by loss.
// That was once called leakage.
TEST(Judge, CallsNothingLeakageThatLooksDead) {
  const Findings findings =
      Solved(
          "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
          "runs:\n"
          "  C1: {from: LP, to: Box, length: 42 m, raceway: EMT 3/4}\n"
          "  C3: {from: Box, to: Room, length: 22 m, raceway: none}\n"
          "circuits:\n"
          "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}, runs: [C1],\n"
          "       loads: [{at: Box, between: [hot, neutral], kind: resistive, power: 900 W}]}\n"
          "  spare: {wires: {a: THHN 12}, runs: [C1]}\n"
          "  old: {cable: NM-B 14-2, runs: [C3]}\n"
          "leaks: [{at: Box, between: [L1.hot, spare.a], resistance: 300 kohm}]\n")
          .findings();
  const ConductorFindings& old = conductor(findings, "old.hot");
  ASSERT_FALSE(old.places[0].contributions.empty());
  EXPECT_LT(std::abs(old.places[0].open_circuit), 3.0);
  EXPECT_FALSE(old.leakage);
  EXPECT_TRUE(conductor(findings, "spare.a").leakage);
}

// A reading once named the whole wire as its reference beyond a cut, where only a piece of it is reached.
TEST(Judge, ReferencesNamePiecesThatAreReachedThere) {
  const Solved model(
      "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
      "runs:\n"
      "  C1: {from: LP, to: Box, length: 15 m, raceway: EMT 1/2}\n"
      "  C2: {from: Box, to: Room, length: 5 m, raceway: EMT 1/2}\n"
      "circuits:\n"
      "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}, runs: [C1, C2],\n"
      "       loads: [{at: Room, between: [hot, neutral], kind: resistive, power: 900 W}]}\n"
      "cuts: [{at: Box, wire: L1.neutral, side: C1}]\n");
  const Findings findings = model.findings();
  for (const ConductorFindings& found : findings.conductors) {
    for (const PlaceFindings& at : found.places) {
      for (const Reading& reading : at.readings) {
        const std::string name = reading.reference + "@" + at.place;
        EXPECT_TRUE(reading.reference == "earth" || model.lowered.at.count(name)) << found.id << ": " << name;
      }
    }
  }
  // No current flows: from the hot to the loose end of its own neutral there is nothing to read.
  const ConductorFindings& hot = conductor(findings, "L1.hot");
  EXPECT_LT(reading(hot, "Room", "dmm", "L1.neutral/C2"), 0.1);
  EXPECT_GT(reading(hot, "Box", "dmm", "L1.neutral"), 119);
}

// Ohm's law: 120 V behind R into 3 kohm reads 120 * 3 / (3 + R / 1 kohm).
TEST(Judge, HighResistanceLoadsHideAnOpenNeutralFromLowImpedance) {
  const ConductorFindings at_22k =
      conductor(Solved(open_neutral("resistance: 22 kohm")).findings(), "L1.neutral");
  EXPECT_EQ(at_22k.condition, Condition::through_load);
  EXPECT_NEAR(reading(at_22k, "Room", "low_impedance", "ground"), 120 * 3 / 25.0, 0.2);
  const ConductorFindings at_150k =
      conductor(Solved(open_neutral("resistance: 150 kohm")).findings(), "L1.neutral");
  EXPECT_EQ(at_150k.condition, Condition::through_load);
  EXPECT_NEAR(reading(at_150k, "Room", "low_impedance", "ground"), 120 * 3 / 153.0, 0.05);
  EXPECT_EQ(at_150k.misleads, Misleads::false_dead);
}

std::string isolated(const std::string& stray) {
  return "supplies:\n"
         "  T1: {system: 120/240}\n"
         "  IT1: {system: 120 two-wire, grounding: isolated, fed_from: {circuit: L1}, stray: " +
         stray +
         "}\n"
         "panels: {LP: {supply: T1}, IP: {supply: IT1}}\n"
         "runs:\n"
         "  C1: {from: LP, to: Vault, length: 5 m, raceway: EMT 3/4}\n"
         "  C2: {from: IP, to: Room, length: 15 m, raceway: EMT 3/4}\n"
         "circuits:\n"
         "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}, runs: [C1], "
         "loads: []}\n"
         "  I1: {panel: IP, slot: [1, 3], wires: {line1: THHN 12, line2: THHN 12, ground: THHN 12}, runs: "
         "[C2], loads: []}\n";
}

TEST(Judge, IsolatedSupplyReadsHalfNothingAndFull) {
  const Findings findings =
      Solved(isolated("{line_to_ground: [5 nF, 5 nF], primary_to_secondary: 10 pF}")).findings();
  for (const char* leg : {"I1.line1", "I1.line2"}) {
    const ConductorFindings& found = conductor(findings, leg);
    EXPECT_EQ(found.condition, Condition::energised);
    EXPECT_TRUE(found.isolated_supply);
    EXPECT_EQ(found.misleads, Misleads::false_dead);
    EXPECT_NEAR(reading(found, "Room", "dmm", "ground"), 60, 4);
    EXPECT_LT(reading(found, "Room", "low_impedance", "ground"), 3);
    EXPECT_THAT(found.settle.why, HasSubstr("no reading to ground settles it"));
  }
  EXPECT_NEAR(reading(conductor(findings, "I1.line1"), "Room", "dmm", "I1.line2"), 120, 0.2);
  EXPECT_NEAR(reading(conductor(findings, "I1.line1"), "Room", "low_impedance", "I1.line2"), 120, 0.2);
  EXPECT_EQ(findings.conductors[0].misleads, Misleads::false_dead);
  EXPECT_EQ(findings.conductors[0].rank, 1);
}

// Two capacitances to ground in series across the EMF divide it: the leg with the larger one reads less.
TEST(Judge, UnequalStraysShareTheVoltageOfAnIsolatedSupply) {
  const Findings findings =
      Solved(isolated("{line_to_ground: [30 nF, 10 nF], primary_to_secondary: 0 nF}")).findings();
  EXPECT_NEAR(reading(conductor(findings, "I1.line1"), "Room", "dmm", "ground"), 120 * 0.25, 4);
  EXPECT_NEAR(reading(conductor(findings, "I1.line2"), "Room", "dmm", "ground"), 120 * 0.75, 4);
}

std::string spare_in(const std::string& raceway) {
  return "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
         "runs: {C1: {from: LP, to: Box, length: 30 m, raceway: " +
         raceway +
         "}}\n"
         "circuits:\n"
         "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}, runs: [C1], "
         "loads: []}\n"
         "  spare: {wires: {a: THHN 12}, runs: [C1]}\n";
}

TEST(Judge, SpareReadsFarMoreInPlasticThanInMetal) {
  const ConductorFindings metal = conductor(Solved(spare_in("EMT 3/4")).findings(), "spare.a");
  const ConductorFindings plastic = conductor(Solved(spare_in("PVC 40 3/4")).findings(), "spare.a");
  EXPECT_EQ(metal.condition, Condition::floating);
  EXPECT_GT(reading(plastic, "Box", "dmm", "ground"), 1.5 * reading(metal, "Box", "dmm", "ground"));
  EXPECT_LT(reading(metal, "Box", "low_impedance", "ground"), 0.5);
  ASSERT_TRUE(metal.settle.instrument);
  EXPECT_EQ(*metal.settle.instrument, "low_impedance");
  EXPECT_LE(metal.settle.treat_as_live_above, 1.482);  // 120 * 3 / (3 + 240)
}

TEST(Judge, ContributionsAddUpToThePhasor) {
  for (const std::string& text :
       {spare_in("PVC 40 3/4"), isolated("{line_to_ground: [3 nF, 2 nF], primary_to_secondary: 1 nF}")}) {
    const Findings findings = Solved(text).findings();
    int checked = 0;
    for (const ConductorFindings& found : findings.conductors) {
      for (const PlaceFindings& place : found.places) {
        if (place.contributions.empty()) continue;
        engine::Complex sum = 0;
        for (const ContributionEntry& entry : place.contributions) sum += entry.volts;
        EXPECT_LT(std::abs(sum - place.open_circuit), 1e-9 * std::abs(place.open_circuit)) << found.id;
        ++checked;
      }
    }
    EXPECT_GT(checked, 0);
  }
}

TEST(Judge, SpareIsPutThereByTheHotBesideIt) {
  const ConductorFindings spare = conductor(Solved(spare_in("PVC 40 3/4")).findings(), "spare.a");
  ASSERT_FALSE(spare.places[0].contributions.empty());
  EXPECT_EQ(spare.places[0].contributions[0].from, "L1.hot");
  EXPECT_EQ(spare.places[0].contributions[0].path, "electric");
}

// A conductor in a run with a drive's output is not predicted.
TEST(Judge, DriveMarksItsNeighbours) {
  const Findings findings = Solved(
                                "supplies: {T1: {system: 480Y/277}}\npanels: {LP: {supply: T1}}\n"
                                "runs: {C1: {from: LP, to: Pump, length: 30 m, raceway: EMT 1}}\n"
                                "circuits:\n"
                                "  M1: {panel: LP, slot: [1, 3, 5], wires: {a: THHN 12, b: THHN 12, c: THHN "
                                "12, ground: THHN 12}, runs: [C1],\n"
                                "       loads: [{at: Pump, between: [a, b], kind: drive, power: 2 kW}]}\n"
                                "  spare: {wires: {a: THHN 12}, runs: [C1]}\n")
                                .findings();
  EXPECT_TRUE(conductor(findings, "spare.a").not_predicted);
}

// 24 V control beside power: 40 % of 24 V is far under 50 V.
TEST(Judge, BandFollowsTheLowestSystemAtThePlace) {
  const Findings findings =
      Solved(spare_in("PVC 40 3/4") + "limits: {live_like: 10 V, dead_like: 1 V}\n").findings();
  const ConductorFindings& spare = conductor(findings, "spare.a");
  EXPECT_EQ(spare.misleads, Misleads::false_live);
  EXPECT_TRUE(spare.rank);
}

TEST(Judge, PlaceWithoutGroundIsReadToEarthWithAWarning) {
  const Findings findings =
      Solved(
          "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
          "runs: {C1: {from: LP, to: Room, length: 30 m, raceway: PVC 40 3/4}}\n"
          "circuits:\n"
          "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12}, runs: [C1], loads: []}\n"
          "  spare: {wires: {a: THHN 12}, runs: [C1]}\n")
          .findings();
  EXPECT_EQ(conductor(findings, "spare.a").places.back().reference, "earth");
  EXPECT_THAT(findings.warnings, testing::Contains(HasSubstr("'Room' has no ground")));
}

// A line fault current that comes back through the earth alone is outside the model.
TEST(Judge, NetCurrentGetsAWarning) {
  const Findings findings =
      Solved(
          "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
          "runs: {C1: {from: LP, to: Room, length: 30 m, raceway: PVC 40 3/4}}\n"
          "circuits:\n"
          "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12}, runs: [C1], loads: []}\n"
          "leaks: [{at: Room, between: [L1.hot, earth], resistance: 100 ohm}]\n")
          .findings();
  EXPECT_THAT(findings.warnings, testing::Contains(HasSubstr("net current")));
}

}  // namespace
}  // namespace netlists
