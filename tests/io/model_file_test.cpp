#include "io/model_file.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <sys/wait.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <iterator>
#include <numbers>

#include "io/catalogue_file.h"
#include "io/check_report.h"
#include "netlists/findings.h"

namespace io {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;
using testing::IsEmpty;
namespace fs = std::filesystem;

std::vector<std::string> words(const std::vector<netlists::Fault>& faults) {
  std::vector<std::string> out;
  for (const auto& fault : faults) out.push_back(to_string(fault));
  return out;
}

std::vector<std::string> texts(const std::vector<netlists::Name>& names) {
  std::vector<std::string> out;
  for (const auto& name : names) out.push_back(name.text);
  return out;
}

/// Everything the format knows, once.
const std::string k_everything = R"(format: idlewire/1
title: Quarry Lane Annex, level 2
frequency: 50 Hz
temperature: 77 degF
earth_resistivity: 300 ohm m
supplies:
  T1: {system: 208Y/120, grounding: solid, impedance: {resistance: 10 mohm, reactance: 20 mohm}, rating: 45 kVA}
  IT1:
    system: 277 two-wire
    grounding: isolated
    fed_from: {circuit: LP2-11, at: Room 210, between: [hot, neutral]}
    stray: {line_to_ground: [2.1 nF, 2.3 nF], primary_to_secondary: 0.1 nF}
    vector_group: Dyn11
  G1: {system: 208Y/120, grounding: resistance, grounding_resistance: 5 ohm, angle: -30 deg, asynchronous: yes}
panels:
  LP2: {supply: T1}
  RP2: {feeder: {from: LP2, wires: {line1: THHN 2, line2: THHN 2, line3: THHN 2, neutral: THHN 2}, runs: [F1], breaker: "off"}}
places:
  JB-4: {box: plastic}
runs:
  F1: {from: LP2, to: RP2, length: 12 ft 6 in, raceway: EMT 1 1/2}
  C1: {from: LP2, to: JB-4, length: 42 m, raceway: EMT 3/4, bonded: from, condition: damp}
  C2: {from: JB-4, to: Room 210, length: 18 m, raceway: EMT 1, bonded: none}
  C3: {from: JB-4, to: Room 212, length: 22 m, raceway: none, clearance: 80 mm,
       layout: {old-14: [-7 mm, 9 mm]}}
alongside:
  - {runs: [C2, C3], spacing: 40 mm, over: 10 m}
circuits:
  LP2-7:
    panel: LP2
    slot: 7
    breaker: on
    wires: {hot: THHN 12, neutral: THHN 12, ground: {type: THHN 12, isolated_ground: true}}
    runs: [C1, C2]
    loads:
      - {name: heater, at: Room 210, between: [hot, neutral], kind: resistive, power: 900 W, state: standby}
      - {at: Room 210, between: [hot, neutral], kind: motor, current: 3 A, power_factor: 80 %}
      - {at: Room 210, between: [hot, ground], kind: resistive, resistance: 1 Mohm, capacitance: 4.7 nF, state: no}
  LP2-9:
    panel: LP2
    slot: [9, 11]
    line: [B, C]
    breaker: {B: on, 11: off}
    wires:
      hot: THHN 12
      hot2: THHN 12
      neutral: LP2-7.neutral
      switched: {type: THHN 12, runs: [C2]}
      t1: {type: THHN 12, runs: [C2]}
    runs: [C1, C2]
    switches:
      - {name: S1, at: JB-4, joins: [hot, switched], state: closed}
      - {name: S2, at: Room 210, kind: three_way, common: switched, throws: [t1, neutral], position: 2}
      - {at: Room 210, kind: four_way, sides: [[hot, hot2], [switched, t1]], position: 2}
  LP2-11:
    panel: LP2
    line: A
    wires: {hot: THHN 12, neutral: THHN 12, loose: THHN 12}
    lands: {loose: none}
    ring: no
    runs: [C1, C2]
    loads: []
  old-14:
    cable: NM-B 14-2
    rename: {neutral: switched}
    wires: {extra: THHN 14}
    runs: [C3]
bonds:
  - {name: B1, at: JB-4, joins: [old-14.switched, ground, C1.raceway], resistance: 50 mohm}
cuts:
  - {at: JB-4, wire: old-14.hot, side: C3}
leaks:
  - {at: JB-4, between: [LP2-7.hot, old-14.hot], resistance: 300 kohm}
instruments: [dmm, {name: mine, resistance: 1 Mohm, capacitance: 100 pF}]
uncertainty:
  length: {spread: 10 %}
  permittivity: {PVC: [3.6, 6.0]}
  clearance: [20 mm, 1 m]
  wander_length: [1 m, 4 m]
  unlisted_load: 0.5
  may_vary: [LP2-9.breaker]
limits: {live_like: 40 V, dead_like: 2 V, body_current: 1 mA}
stages:
  - {name: As found}
  - {name: Later, set: {LP2-9.breaker: off, LP2-9.S1.state: open}, remove: [old-14],
     bonds: [{at: LP2, joins: [LP2-7.hot, ground]}], cuts: [{at: JB-4, wire: LP2-7.hot, side: C2}]}
)";

class Everything : public testing::Test {
 protected:
  Everything() : model_(check_model_text(k_everything, "annex.yaml")), b_(model_.building) {}
  ModelFile model_;
  const netlists::Building& b_;
};

// The wire beside the cable has no position in the run's layout: the one thing wrong on purpose.
TEST_F(Everything, HasOneFault) {
  EXPECT_THAT(words(model_.faults),
              ElementsAre("annex.yaml:24:3: error: run 'C3': layout has no position for 'old-14.extra'"));
}

TEST_F(Everything, ReadsTheWhole) {
  EXPECT_EQ(b_.title, "Quarry Lane Annex, level 2");
  EXPECT_EQ(b_.file, "annex.yaml");
  EXPECT_DOUBLE_EQ(b_.frequency, 50.0);
  EXPECT_NEAR(b_.temperature, 25.0, 1e-12);  // 77 degF
  EXPECT_DOUBLE_EQ(b_.earth_resistivity, 300.0);
  EXPECT_DOUBLE_EQ(*b_.limits.live_like, 40.0);
  EXPECT_DOUBLE_EQ(*b_.limits.dead_like, 2.0);
  EXPECT_DOUBLE_EQ(b_.limits.body_current, 1e-3);
  EXPECT_DOUBLE_EQ(b_.uncertainty.length_spread, 0.1);
  EXPECT_EQ(b_.uncertainty.permittivity.at("PVC"), std::pair(3.6, 6.0));
  EXPECT_EQ(*b_.uncertainty.clearance, std::pair(0.02, 1.0));
  EXPECT_EQ(b_.uncertainty.wander_length, std::pair(1.0, 4.0));
  EXPECT_DOUBLE_EQ(*b_.uncertainty.unlisted_load, 0.5);
  EXPECT_THAT(texts(b_.uncertainty.may_vary), ElementsAre("LP2-9.breaker"));
  ASSERT_EQ(b_.instruments.size(), 2u);
  EXPECT_EQ(b_.instruments[0].name, "dmm");
  EXPECT_DOUBLE_EQ(b_.instruments[0].resistance, 10e6);
  EXPECT_DOUBLE_EQ(b_.instruments[1].capacitance, 100e-12);
}

TEST_F(Everything, ReadsSuppliesAndPanels) {
  ASSERT_EQ(b_.supplies.size(), 3u);
  EXPECT_EQ(*b_.supplies[0].impedance, std::complex<double>(0.01, 0.02));
  EXPECT_DOUBLE_EQ(b_.supplies[0].rating, 45e3);
  const auto& isolated = b_.supplies[1];
  EXPECT_EQ(*isolated.grounding, "isolated");
  EXPECT_EQ(isolated.fed_from->circuit.text, "LP2-11");
  EXPECT_EQ(isolated.fed_from->at->text, "Room 210");
  EXPECT_EQ(isolated.fed_from->between->second.text, "neutral");
  EXPECT_THAT(isolated.stray_line_to_ground, ElementsAre(2.1e-9, 2.3e-9));
  EXPECT_DOUBLE_EQ(*isolated.stray_primary_to_secondary, 0.1e-9);
  EXPECT_EQ(isolated.vector_group, "Dyn11");
  EXPECT_DOUBLE_EQ(b_.supplies[2].grounding_resistance, 5.0);
  EXPECT_DOUBLE_EQ(*b_.supplies[2].angle, -std::numbers::pi / 6);
  EXPECT_TRUE(b_.supplies[2].asynchronous);
  ASSERT_EQ(b_.panels.size(), 2u);
  EXPECT_EQ(b_.panels[0].supply->text, "T1");
  EXPECT_EQ(b_.panels[1].feeder->from.text, "LP2");
  EXPECT_EQ(b_.panels[1].feeder->wires.size(), 4u);
  EXPECT_FALSE(b_.panels[1].feeder->breaker_on);
}

TEST_F(Everything, ReadsRuns) {
  ASSERT_EQ(b_.runs.size(), 4u);
  EXPECT_DOUBLE_EQ(b_.runs[0].length, 12.5 * 0.3048);
  EXPECT_EQ(b_.runs[1].bonded, netlists::Bonded::from);
  EXPECT_EQ(b_.runs[1].condition, netlists::Moisture::damp);
  EXPECT_EQ(b_.runs[2].bonded, netlists::Bonded::none);
  EXPECT_DOUBLE_EQ(*b_.runs[3].clearance, 0.08);
  EXPECT_DOUBLE_EQ(b_.runs[3].layout.at("old-14").x(), -7e-3);
  EXPECT_DOUBLE_EQ(b_.runs[3].layout.at("old-14").y(), 9e-3);
  EXPECT_EQ(b_.places[0].box, netlists::Box::plastic);
  EXPECT_THAT(texts(b_.alongside[0].runs), ElementsAre("C2", "C3"));
  EXPECT_DOUBLE_EQ(b_.alongside[0].spacing, 0.04);
  EXPECT_DOUBLE_EQ(*b_.alongside[0].over, 10.0);
}

TEST_F(Everything, ReadsCircuits) {
  ASSERT_EQ(b_.circuits.size(), 4u);
  const auto& seven = b_.circuits[0];
  EXPECT_EQ(seven.poles[0].slot, 7);
  EXPECT_TRUE(seven.wires[2].isolated_ground);
  const auto& nine = b_.circuits[1];
  EXPECT_EQ(nine.poles[1].line, "C");
  EXPECT_EQ(nine.breaker, (std::vector<bool>{true, false}));
  EXPECT_EQ(nine.wires[2].alias, "LP2-7.neutral");
  EXPECT_THAT(texts(nine.wires[3].runs), ElementsAre("C2"));
  EXPECT_FALSE(nine.loads.has_value());        // omitted: unknown
  EXPECT_TRUE(b_.circuits[2].loads->empty());  // []: none
  EXPECT_EQ(b_.circuits[2].lands.at("loose").text, "none");
}

TEST_F(Everything, ReadsLoadsAndSwitches) {
  const auto& loads = *b_.circuits[0].loads;
  EXPECT_EQ(loads[0].name, "heater");
  EXPECT_DOUBLE_EQ(*loads[0].power, 900.0);
  EXPECT_EQ(loads[0].state, netlists::LoadState::standby);
  EXPECT_DOUBLE_EQ(*loads[1].current, 3.0);
  EXPECT_DOUBLE_EQ(*loads[1].power_factor, 0.8);
  EXPECT_DOUBLE_EQ(*loads[2].capacitance, 4.7e-9);
  EXPECT_EQ(loads[2].state, netlists::LoadState::off);
  const auto& switches = b_.circuits[1].switches;
  EXPECT_TRUE(switches[0].closed);
  EXPECT_EQ(switches[1].kind, netlists::SwitchKind::three_way);
  EXPECT_THAT(texts(switches[1].wires), ElementsAre("switched", "t1", "neutral"));
  EXPECT_EQ(switches[1].position, 2);
  EXPECT_THAT(texts(switches[2].wires), ElementsAre("hot", "hot2", "switched", "t1"));
}

// The cores of a factory cable are wires like any other, renamed, before those that are added to it.
TEST_F(Everything, ListsTheCoresOfACable) {
  const auto& wires = b_.circuits[3].wires;
  ASSERT_EQ(wires.size(), 4u);
  EXPECT_EQ(wires[0].name.text, "hot");
  EXPECT_EQ(wires[1].name.text, "switched");
  EXPECT_EQ(wires[2].name.text, "ground");
  EXPECT_EQ(wires[3].name.text, "extra");
  EXPECT_EQ(wires[0].type, builtin_catalogue().cables.at("NM-B 14-2").cores[0].wire.name);
}

TEST_F(Everything, ReadsWorksAndStages) {
  EXPECT_EQ(b_.bonds[0].name, "B1");
  EXPECT_THAT(texts(b_.bonds[0].joins), ElementsAre("old-14.switched", "ground", "C1.raceway"));
  EXPECT_DOUBLE_EQ(b_.bonds[0].resistance, 0.05);
  EXPECT_EQ(b_.cuts[0].side.text, "C3");
  EXPECT_DOUBLE_EQ(b_.leaks[0].resistance, 300e3);
  ASSERT_EQ(b_.stages.size(), 2u);
  ASSERT_EQ(b_.stages[1].set.size(), 2u);
  EXPECT_EQ(b_.stages[1].set[0].first.text, "LP2-9.breaker");
  EXPECT_EQ(b_.stages[1].set[0].second.text, "off");
  EXPECT_EQ(b_.stages[1].bonds.size(), 1u);
  EXPECT_EQ(b_.stages[1].cuts.size(), 1u);
  EXPECT_THAT(texts(b_.stages[1].remove), ElementsAre("old-14"));
}

// A two-wire system of another voltage is made after the catalogue's: 277 V between its legs.
TEST_F(Everything, ScalesATwoWireSystem) {
  const auto& system = b_.catalogue.systems.at("277 two-wire");
  ASSERT_FALSE(system.lines.empty());
  const auto leg = [](const netlists::Pole& pole) { return std::polar(pole.volts, pole.angle); };
  const auto second =
      system.lines.size() > 1 ? leg(system.lines[1]) : std::complex<double>(system.neutral_volts);
  EXPECT_NEAR(std::abs(leg(system.lines[0]) - second), 277.0, 1e-9);
}

// A mark is where an editor puts the cursor.
TEST_F(Everything, KnowsWhereThingsAre) {
  EXPECT_EQ(b_.runs[1].name.mark.line, 22);
  EXPECT_EQ(b_.runs[1].name.mark.column, 3);
  EXPECT_EQ(b_.cuts[0].wire.mark.line, 71);
}

const std::string k_small = R"(format: idlewire/1
supplies:
  T1: {system: 208Y/120}
panels:
  LP2: {supply: T1}
runs:
  C1: {from: LP2, to: JB-4, length: 42 m, raceway: none}
circuits:
  LP2-7:
    panel: LP2
    slot: 7
    wires: {hot: THHN 12, neutral: THHN 12}
    runs: [C1]
)";

TEST(ReadModel, TellsEveryDefault) {
  const ModelFile model = read_model_text(k_small, "small.yaml");
  EXPECT_THAT(model.faults, IsEmpty());
  EXPECT_THAT(model.building.defaults,
              ElementsAre("frequency 60 Hz", "temperature 20 degC", "earth resistivity 100 ohm m",
                          "instruments dmm, low_impedance and analog_5k"));
  ASSERT_EQ(model.building.instruments.size(), 3u);
  EXPECT_EQ(model.building.circuits[0].breaker, std::vector<bool>{true});
}

// SHA-256 of "abc", FIPS 180-4's own example.
TEST(ReadModel, HashesTheBytes) {
  EXPECT_EQ(read_model_text("abc", "f").building.sha256,
            "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
}

TEST(ReadModel, TakesEveryWayToSayOnAndOff) {
  for (const std::string off : {"off", "Off", "no", "false", "'off'", "\"No\"", "FALSE"}) {
    std::string text = k_small;
    text.replace(text.find("    wires"), 0, "    breaker: " + off + "\n");
    const ModelFile model = read_model_text(text, "f");
    EXPECT_THAT(model.faults, IsEmpty()) << off;
    EXPECT_EQ(model.building.circuits[0].breaker, std::vector<bool>{false}) << off;
  }
}

TEST(ReadModel, TakesAnotherCatalogue) {
  netlists::Catalogue catalogue;
  catalogue.wires["THHN 12"].name = "THHN 12";
  const ModelFile model = read_model_text(k_small, "f", catalogue);
  EXPECT_THAT(words(model.faults),
              ElementsAre("f:3:16: error: supply 'T1': system '208Y/120' is not in the catalogue; 'idlewire "
                          "catalogue' lists what is"));
}

// What the README shows a user is a model that works, every key of it.
TEST(ReadModel, TakesTheModelOfTheReadme) {
  std::ifstream stream(fs::path(IDLEWIRE_TESTS).parent_path() / "io" / "README.md");
  const std::string readme{std::istreambuf_iterator<char>(stream), {}};
  const auto begin = readme.find("format: idlewire/1\n");
  ASSERT_NE(begin, std::string::npos);
  const ModelFile model = check_model_text(readme.substr(begin, readme.find("```", begin) - begin), "readme");
  EXPECT_THAT(words(model.faults), IsEmpty());
  EXPECT_EQ(model.building.circuits.size(), 7u);
  EXPECT_EQ(model.building.stages.size(), 3u);
}

class Files : public testing::Test {
 public:
  Files() : folder_(fs::path(testing::TempDir()) / ("idlewire_model_" + std::to_string(getpid()))) {
    fs::create_directory(folder_);
  }
  ~Files() override { fs::remove_all(folder_); }

 protected:
  std::string put(const std::string& name, const std::string& text) const {
    std::ofstream(folder_ / name, std::ios::binary) << text;
    return (folder_ / name).string();
  }
  fs::path folder_;
};

// A model's own catalogue lies beside it, wherever the program runs.
TEST_F(Files, ReadsACatalogueBesideTheModel) {
  put("mine.yaml", R"(format: idlewire-catalogue/1
instruments:
  bench: {kind: voltmeter, resistance: 1 Mohm, capacitance: 90 pF, source: its data sheet}
)");
  const ModelFile model =
      read_model(put("model.yaml", k_small + "catalogue: [mine.yaml]\ninstruments: [bench]\n"));
  EXPECT_THAT(words(model.faults), IsEmpty());
  ASSERT_EQ(model.building.instruments.size(), 1u);
  EXPECT_DOUBLE_EQ(model.building.instruments[0].capacitance, 90e-12);
}

TEST_F(Files, ReportsFaultsOfACatalogueInItsOwnName) {
  put("mine.yaml", "format: idlewire-catalogue/1\ninstrumets: {}\n");
  const ModelFile model = read_model(put("model.yaml", k_small + "catalogue: [mine.yaml]\n"));
  EXPECT_THAT(words(model.faults),
              ElementsAre((folder_ / "mine.yaml").string() +
                          ":2:1: error: unknown key 'instrumets'; the nearest is 'instruments'"));
}

TEST_F(Files, RefusesADirectory) {
  EXPECT_THAT(words(read_model(folder_.string()).faults),
              ElementsAre(folder_.string() + ": error: is a directory, not a file"));
}

TEST_F(Files, RefusesAFileThatIsNotThere) {
  EXPECT_THAT(words(read_model((folder_ / "none.yaml").string()).faults),
              ElementsAre(HasSubstr("none.yaml: error: there is no such file")));
}

TEST_F(Files, RefusesAHugeFile) {
  const std::string path = put("huge.yaml", "format: idlewire/1\n");
  fs::resize_file(path, 100u << 20);  // sparse: takes no room on disk
  EXPECT_THAT(words(read_model(path).faults),
              ElementsAre(path + ": error: is 100 MB large; at most 64 MB are read"));
}

// Root may read everything, so as root a child gives its rights away first.
TEST_F(Files, RefusesAFileWithoutPermission) {
  const std::string path = put("secret.yaml", k_small);
  fs::permissions(path, fs::perms::none);
  const pid_t child = fork();
  ASSERT_GE(child, 0);
  if (child == 0) {
    const bool plain_user = geteuid() != 0 || setuid(65534) == 0;
    const auto found = words(read_model(path).faults);
    const bool right = found.size() == 1 && found[0] == path + ": error: cannot be read: Permission denied";
    _exit(plain_user && right ? 0 : 1);
  }
  int status = 1;
  ASSERT_EQ(waitpid(child, &status, 0), child);
  EXPECT_TRUE(WIFEXITED(status) && WEXITSTATUS(status) == 0);
}

TEST(CheckReport, TellsEachAssumptionOnceAndTheCaution) {
  netlists::Building building;
  building.title = "Harrowmere Works";
  building.defaults = {"frequency 60 Hz"};
  EXPECT_EQ(check_report(building, {"frequency 60 Hz", "a tray is a plane"}),
            "Harrowmere Works\n0 supplies, 0 panels, 0 runs, 0 circuits, 0 stages\n"
            "Defaults and assumptions in force:\n  frequency 60 Hz\n  a tray is a plane\n" +
                netlists::caution() + "\n");
}

TEST(FaultReport, CountsErrorsAndWarnings) {
  using netlists::Severity;
  const netlists::Fault error{Severity::error, {"a.yaml", 17, 42}, "x"};
  const netlists::Fault warning{Severity::warning, {"a.yaml", 18, 1}, "y"};
  EXPECT_EQ(fault_report({}), "");
  EXPECT_EQ(fault_report({error}), "a.yaml:17:42: error: x\n1 error, nothing computed\n");
  EXPECT_EQ(fault_report({error, error, warning}),
            "a.yaml:17:42: error: x\na.yaml:17:42: error: x\na.yaml:18:1: warning: y\n"
            "2 errors, 1 warning, nothing computed\n");
  EXPECT_EQ(fault_report({warning}), "a.yaml:18:1: warning: y\n1 warning\n");
}

TEST(FaultReport, StopsPrintingAfterTwoHundred) {
  const std::vector<netlists::Fault> many(1234, {netlists::Severity::error, {"a.yaml", 1, 1}, "x"});
  EXPECT_THAT(fault_report(many), HasSubstr("... and 1034 more\n1234 errors, nothing computed\n"));
}

}  // namespace
}  // namespace io
