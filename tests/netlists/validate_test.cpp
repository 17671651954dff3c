#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "io/catalogue_file.h"
#include "netlists/lower.h"

namespace netlists {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;
using testing::IsEmpty;

/// A building made by hand: panel P on a 208Y/120 supply and runs as the test wants.
class Checked : public testing::Test {
 protected:
  Checked() {
    b_.catalogue = io::builtin_catalogue();
    Supply supply;
    supply.name.text = "T";
    supply.system.text = "208Y/120";
    b_.supplies.push_back(supply);
    Panel panel;
    panel.name.text = "P";
    panel.supply = Name{"T", {}};
    b_.panels.push_back(panel);
  }

  void run(const std::string& name, const std::string& from, const std::string& to,
           const std::string& raceway = "EMT 2") {
    netlists::Run it;
    it.name.text = name;
    it.from.text = from;
    it.to.text = to;
    it.length = 10.0;
    it.raceway.text = raceway;
    b_.runs.push_back(it);
  }

  Circuit& circuit(const std::string& name, const std::vector<int>& slots,
                   const std::vector<std::string>& wires, const std::vector<std::string>& runs,
                   const std::string& type = "THHN 12") {
    Circuit it;
    it.name.text = name;
    if (!slots.empty()) it.panel = Name{"P", {}};
    for (const int slot : slots) it.poles.push_back({slot, "", {}});
    for (const auto& wire : wires) it.wires.push_back({{wire, {}}, type, "", {}, false, {}});
    for (const auto& name_of_run : runs) it.runs.push_back({name_of_run, {}});
    it.loads.emplace();
    b_.circuits.push_back(it);
    return b_.circuits.back();
  }

  std::vector<std::string> faults() const {
    std::vector<std::string> out;
    for (const auto& fault : validate(b_)) out.push_back(to_string(fault));
    return out;
  }

  Building b_;
};

TEST_F(Checked, PassesASoundBuilding) {
  run("R1", "P", "A");
  run("R2", "A", "B");
  circuit("P-1", {1}, {"hot", "neutral", "ground"}, {"R1", "R2"});
  circuit("P-3", {3, 5}, {"line1", "line2", "ground"}, {"R1"});
  circuit("spare", {}, {"a"}, {"R2"});
  EXPECT_THAT(faults(), IsEmpty());
}

// Slots go in pairs through the lines, left and right column on one: 1 and 2 on A, 3 and 4 on B, 5 and 6
// on C, 7 and 8 on A again (common practice). On two lines they alternate in pairs.
TEST_F(Checked, KnowsThePhaseOfASlot) {
  run("R1", "P", "A");
  const std::string lines = "AABBCCAABBCC";
  for (int slot = 1; slot <= 12; ++slot) {
    circuit("P-" + std::to_string(slot), {slot}, {"hot"}, {"R1"}).poles[0].line =
        std::string(1, lines[static_cast<std::size_t>(slot - 1)]);
  }
  EXPECT_THAT(faults(), IsEmpty());
  b_.circuits[7].poles[0].line = "B";
  EXPECT_THAT(faults(), ElementsAre("error: circuit 'P-8': slot 8 is on line A, not on B"));
  b_.supplies[0].system.text = "120/240";
  b_.circuits.erase(b_.circuits.begin() + 4, b_.circuits.end());  // 1 to 4: A A B B on two lines too
  EXPECT_THAT(faults(), IsEmpty());
}

TEST_F(Checked, AllowsOneCircuitASlot) {
  run("R1", "P", "A");
  circuit("P-1", {1, 3, 5}, {"line1", "line2", "line3"}, {"R1"});
  circuit("P-4", {4}, {"hot"}, {"R1"});
  EXPECT_THAT(faults(), IsEmpty());
  circuit("P-5", {5}, {"hot"}, {"R1"});
  EXPECT_THAT(faults(), ElementsAre("error: circuit 'P-5': slot 5 of panel 'P' is taken already, by 'P-1'"));
}

TEST_F(Checked, FindsALoopUnlessARingIsMeant) {
  run("R1", "P", "A");
  run("R2", "A", "B");
  run("R3", "B", "P");
  Circuit& ring = circuit("P-1", {1}, {"hot", "neutral"}, {"R1", "R2", "R3"});
  EXPECT_THAT(faults(), ElementsAre(HasSubstr("circuit 'P-1': run 'R3' closes a loop")));
  ring.ring = true;
  EXPECT_THAT(faults(), IsEmpty());
}

// Each wire of the circuit lies in a tree of its own though all the runs together close a loop.
TEST_F(Checked, JudgesALoopByTheWires) {
  run("R1", "P", "A");
  run("R2", "A", "B");
  run("R3", "B", "P");
  Circuit& it = circuit("P-1", {1}, {"hot", "neutral"}, {"R1", "R2", "R3"});
  it.wires[0].runs = {{"R1", {}}, {"R2", {}}};
  it.wires[1].runs = {{"R3", {}}};
  EXPECT_THAT(faults(), IsEmpty());
}

// A neutral shared with another circuit lies in the runs of both; together they must be one piece.
TEST_F(Checked, FindsASharedWireInTwoPieces) {
  run("R1", "P", "A");
  run("R2", "B", "C");
  circuit("P-1", {1}, {"hot", "neutral"}, {"R1"});
  Circuit& other = circuit("other", {}, {"x", "neutral"}, {"R2"});
  other.wires[1].type = "";
  other.wires[1].alias = "P-1.neutral";
  EXPECT_THAT(faults(),
              ElementsAre(HasSubstr("circuit 'P-1': wire 'neutral': run 'R2', from 'B' to 'C', meets none")));
}

TEST_F(Checked, WantsEveryWireAtThePanelToLand) {
  run("R1", "P", "A");
  Circuit& it = circuit("P-1", {1}, {"hot", "second", "neutral"}, {"R1"});
  EXPECT_THAT(faults(),
              ElementsAre(HasSubstr("circuit 'P-1': wire 'second' reaches panel 'P' and lands on nothing")));
  it.lands["second"] = {"none", {}};
  EXPECT_THAT(faults(), IsEmpty());
  it.lands["second"] = {"D", {}};
  EXPECT_THAT(faults(), ElementsAre(HasSubstr("lands: 'D' is not one of none, neutral, ground, A, B, C")));
}

TEST_F(Checked, WarnsOfAPoleWithoutAWire) {
  run("R1", "P", "A");
  circuit("P-1", {1, 3}, {"hot", "neutral"}, {"R1"});
  EXPECT_THAT(faults(), ElementsAre("warning: circuit 'P-1': 1 of the 2 poles of its breaker takes no wire"));
}

// How many equal conductors a conduit takes: NEC Annex C, Table C.1 (EMT, THHN), from memory: 12 AWG
// 9 in 1/2, 16 in 3/4, 26 in 1; 10 AWG 5 in 1/2, 10 in 3/4; 14 AWG 12 in 1/2, 22 in 3/4. Two conductors
// come under the 31 % of Chapter 9, Table 1. One more must warn.
TEST_F(Checked, FillsConduitAsTheTablesDo) {
  struct Case {
    const char* raceway;
    const char* wire;
    int most;
  };
  for (const Case& c :
       {Case{"EMT 1/2", "THHN 12", 9}, Case{"EMT 3/4", "THHN 12", 16}, Case{"EMT 1", "THHN 12", 26},
        Case{"EMT 1/2", "THHN 10", 5}, Case{"EMT 3/4", "THHN 10", 10}, Case{"EMT 1/2", "THHN 14", 12},
        Case{"EMT 3/4", "THHN 14", 22}}) {
    for (const int more : {0, 1}) {
      b_.runs.clear();
      b_.circuits.clear();
      run("R1", "X", "Y", c.raceway);
      std::vector<std::string> wires;
      for (int i = 0; i < c.most + more; ++i) wires.push_back("w" + std::to_string(i));
      circuit("spare", {}, wires, {"R1"}, c.wire);
      SCOPED_TRACE(std::string(c.raceway) + ", " + c.wire + ", " + std::to_string(c.most + more));
      if (more == 0)
        EXPECT_THAT(faults(), IsEmpty());
      else
        EXPECT_THAT(faults(), ElementsAre(HasSubstr("at most 40 % is usual")));
    }
  }
}

// A cable counts as a round thing of its largest width: NM-B 12-2 in EMT 1/2 takes
// (10.7 mm / 15.8 mm)^2 = 46 % of it, where one thing may take 53 %; a second one does not go in at all.
TEST_F(Checked, CountsACableByItsWidth) {
  run("R1", "X", "Y", "EMT 1/2");
  const auto add_cable = [&](const std::string& name) {
    Circuit& it = circuit(name, {}, {}, {"R1"});
    it.cable = Name{"NM-B 12-2", {}};
    for (const auto& core : b_.catalogue.cables.at("NM-B 12-2").cores)
      it.wires.push_back({{core.role, {}}, core.wire.name, "", {}, false, {}});
  };
  add_cable("one");
  EXPECT_THAT(faults(), IsEmpty());
  add_cable("two");
  EXPECT_THAT(
      faults(),
      ElementsAre(HasSubstr("2 conductors and cables fill 92 % of its 'EMT 1/2': they do not go in")));
}

TEST_F(Checked, ChecksAGivenLayout) {
  run("R1", "X", "Y", "EMT 1/2");  // inner radius 7.90 mm; THHN 12 is 3.30 mm thick
  circuit("s", {}, {"a", "b"}, {"R1"});
  b_.runs[0].layout = {{"s.a", {-1.651e-3, -5e-3}}, {"s.b", {1.651e-3, -5e-3}}};
  EXPECT_THAT(faults(), IsEmpty());  // they touch
  b_.runs[0].layout["s.b"] = {1.6e-3, -5e-3};
  EXPECT_THAT(faults(), ElementsAre(HasSubstr("'s.a' and 's.b' overlap")));
  b_.runs[0].layout["s.b"] = {1.7e-3, -7e-3};
  EXPECT_THAT(faults(), ElementsAre(HasSubstr("'s.b' sticks out of the raceway")));
}

TEST_F(Checked, FollowsFeedersAndPrimariesInCircles) {
  run("R1", "P", "Q");
  for (const auto& [name, from] : {std::pair("P", "Q"), std::pair("Q", "P")}) {
    Panel panel;
    panel.name.text = name;
    panel.feeder.emplace();
    panel.feeder->from.text = from;
    panel.feeder->runs = {{"R1", {}}};
    panel.feeder->wires.push_back({{"line1", {}}, "THHN 2", "", {}, false, {}});
    if (std::string(name) == "P")
      b_.panels[0] = panel;
    else
      b_.panels.push_back(panel);
  }
  EXPECT_THAT(faults(), ElementsAre("error: panel 'P' is fed in a circle: P from Q from P"));
}

TEST_F(Checked, FindsSuppliesThatFeedEachOther) {
  run("R1", "P", "A");
  run("R2", "Q", "A");
  Supply second = b_.supplies[0];
  second.name.text = "S";
  b_.supplies.push_back(second);
  Panel panel;
  panel.name.text = "Q";
  panel.supply = Name{"S", {}};
  b_.panels.push_back(panel);
  circuit("P-1", {1}, {"hot", "neutral"}, {"R1"});
  circuit("Q-1", {1}, {"hot", "neutral"}, {"R2"}).panel->text = "Q";
  b_.supplies[1].fed_from.emplace();
  b_.supplies[1].fed_from->circuit.text = "P-1";
  EXPECT_THAT(faults(), IsEmpty());
  b_.supplies[0].fed_from.emplace();
  b_.supplies[0].fed_from->circuit.text = "Q-1";
  EXPECT_THAT(faults(), ElementsAre("error: supply 'T' is fed in a circle: T from S from T"));
}

// What the reader has reported already is not reported again by what follows from it.
TEST_F(Checked, SaysNothingOfWhatFollowsFromAFault) {
  run("R1", "P", "A");
  run("R2", "A", "B");
  Circuit& it = circuit("P-1", {1}, {"hot", "neutral"}, {"R1", "R3"});
  Load load;
  load.at.text = "B";
  load.between = {{"hot", {}}, {"neutral", {}}};
  load.kind = "resistive";
  it.loads->push_back(load);
  EXPECT_THAT(faults(), ElementsAre("error: circuit 'P-1': there is no run 'R3'; the nearest is 'R1'"));
}

TEST_F(Checked, WantsAConductor) {
  EXPECT_THAT(faults(), ElementsAre("error: the model has no conductors: it names no circuits"));
}

}  // namespace
}  // namespace netlists
