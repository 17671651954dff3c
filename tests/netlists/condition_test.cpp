#include "netlists/condition.h"

#include <gtest/gtest.h>

namespace netlists {
namespace {

using engine::Complex;

// Nodes and what joins them, without any field: conditions never look at capacitance.
class Wires {
 public:
  explicit Wires(int nodes) { lowered_.network.node_count = nodes; }

  Wires& conductor(const std::string& id, int from, int to) {
    engine::Line line;
    line.length = 1;
    line.from = {from};
    line.to = {to};
    ConductorPath path;
    path.id = id;
    path.wire = id;
    path.segments = {{static_cast<int>(lowered_.network.lines.size()), 0}};
    lowered_.network.lines.push_back(line);
    lowered_.conductors.push_back(path);
    return *this;
  }
  Wires& pole(int node, Complex volts, const std::string& supply, const std::string& name,
              bool grounded = false) {
    lowered_.poles.push_back({node, volts, supply, name, grounded});
    return *this;
  }
  Wires& load(int a, int b, Complex impedance) {
    lowered_.connections.push_back({a, b, Join::load, impedance, "load"});
    return *this;
  }
  Wires& bond(int a, int b) {
    lowered_.connections.push_back({a, b, Join::wire, 0.05, "bond"});
    return *this;
  }
  Wires& floating_supply(const std::string& name) {
    lowered_.floating_supplies.insert(name);
    return *this;
  }
  Condition of(const std::string& id) const {
    const Conditions result = conditions(lowered_);
    for (std::size_t i = 0; i < lowered_.conductors.size(); ++i) {
      if (lowered_.conductors[i].id == id) return result.of_conductor[i];
    }
    ADD_FAILURE() << id;
    return Condition::floating;
  }

 private:
  Lowered lowered_;
};

// Node 0 earth, 1 the hot's bar, 2 its far end, 3 and 4 the ends of another wire.
Wires branch() {
  return Wires(8)
      .pole(0, 0, "T1", "neutral", true)
      .pole(1, 120, "T1", "A")
      .conductor("hot", 1, 2)
      .conductor("other", 3, 4);
}

TEST(Conditions, AreGroundedEnergisedAndFloating) {
  Wires wires = branch();
  wires.conductor("neutral", 0, 5);
  EXPECT_EQ(wires.of("neutral"), Condition::grounded);
  EXPECT_EQ(wires.of("hot"), Condition::energised);
  EXPECT_EQ(wires.of("other"), Condition::floating);
}

TEST(Conditions, ABondIsAWire) { EXPECT_EQ(branch().bond(4, 0).of("other"), Condition::grounded); }

// The open neutral behind a load: 120 V behind R drives 120 / (R + 2000) into a person of 2 kohm. The
// limit of 0.5 mA lies at R = 238 kohm (Ohm's law).
TEST(Conditions, OpenNeutralIsThroughLoadUpToTheFeltCurrent) {
  EXPECT_EQ(branch().load(2, 3, 16).of("other"), Condition::through_load);
  EXPECT_EQ(branch().load(2, 3, 22e3).of("other"), Condition::through_load);
  EXPECT_EQ(branch().load(2, 3, 150e3).of("other"), Condition::through_load);
  EXPECT_EQ(branch().load(2, 3, 237e3).of("other"), Condition::through_load);
  EXPECT_EQ(branch().load(2, 3, 239e3).of("other"), Condition::floating);
}

// A hot whose breaker is off, tied to the neutral through its load.
TEST(Conditions, OffHotIsGroundedThroughItsLoad) {
  EXPECT_EQ(branch().load(4, 0, 16).of("other"), Condition::grounded_through_load);
}

// A wire between two loads from a hot to the neutral: live unless the ground side shorts it.
TEST(Conditions, MidPointOfTwoLoadsIsThroughLoad) {
  EXPECT_EQ(branch().load(2, 3, 1000).load(4, 0, 1000).of("other"), Condition::through_load);
}

// The shared neutral of a multiwire circuit, open: equal loads hold it at 0 V, but it is live the
// moment one of them is switched off.
TEST(Conditions, BalancedOpenSharedNeutralIsThroughLoad) {
  Wires wires = branch();
  wires.pole(6, -120, "T1", "B").load(2, 3, 16).load(6, 3, 16);
  EXPECT_EQ(wires.of("other"), Condition::through_load);
}

TEST(Conditions, LegsOfAnIsolatedSupplyAreEnergised) {
  Wires wires = branch();
  wires.floating_supply("IT1").pole(3, 60, "IT1", "L1").pole(5, -60, "IT1", "L2");
  EXPECT_EQ(wires.of("other"), Condition::energised);
}

// Behind a load of an isolated leg: nothing to ground, but current to the other pole.
TEST(Conditions, WireBehindALoadOfAnIsolatedLegIsThroughLoad) {
  Wires wires = branch();
  wires.floating_supply("IT1").pole(5, 60, "IT1", "L1").pole(6, -60, "IT1", "L2").load(5, 3, 1000);
  EXPECT_EQ(wires.of("other"), Condition::through_load);
}

TEST(Conditions, LivePoleOnGroundIsWarnedOf) {
  Lowered lowered;
  lowered.network.node_count = 2;
  lowered.poles = {{0, 0, "T1", "neutral", true}, {1, 120, "T1", "A", false}};
  lowered.connections = {{0, 1, Join::wire, 0.05, "bond"}};
  EXPECT_EQ(conditions(lowered).warnings.size(), 1u);
}

}  // namespace
}  // namespace netlists
