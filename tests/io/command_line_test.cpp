// The built program as a user meets it: exit statuses, streams, what it leaves on disk.
#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <sys/wait.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>
#include <regex>
#include <sstream>

#include "netlists/findings.h"

namespace {
namespace fs = std::filesystem;
using testing::HasSubstr;
using testing::IsEmpty;
using testing::Not;
using testing::StartsWith;

std::string content_of(const fs::path& path) {
  std::ostringstream out;
  out << std::ifstream(path, std::ios::binary).rdbuf();
  return out.str();
}

std::string without_breaks(const std::string& text) {
  return std::regex_replace(text, std::regex("\\s+"), " ");
}

struct Outcome {
  int status = -1;
  std::string out;
  std::string err;
};

class CommandLine : public testing::Test {
 protected:
  void SetUp() override {
    const auto* test = testing::UnitTest::GetInstance()->current_test_info();
    folder_ = fs::path(testing::TempDir()) / ("idlewire-command-" + std::string(test->name()));
    fs::remove_all(folder_);
    fs::create_directories(folder_ / "out");
    std::ofstream(folder_ / "model.yaml") << k_model;
    std::ofstream(folder_ / "section.yaml") << k_section;
  }
  void TearDown() override { fs::remove_all(folder_); }

  /// Runs the program with arguments as a shell takes them, in the test's own folder.
  Outcome run(const std::string& arguments, const std::string& before = "", const std::string& after = "") {
    const std::string command = "cd '" + folder_.string() + "' && " + before + " '" IDLEWIRE_PROGRAM "' " +
                                arguments + " >stdout 2>stderr " + after;
    const int status = std::system(command.c_str());
    return {WIFEXITED(status) ? WEXITSTATUS(status) : -1, content_of(folder_ / "stdout"),
            content_of(folder_ / "stderr")};
  }
  std::size_t files_out() const {
    return static_cast<std::size_t>(
        std::distance(fs::directory_iterator(folder_ / "out"), fs::directory_iterator()));
  }

  static constexpr const char* k_model = R"(format: idlewire/1
title: Quarry Lane Annex, one room
frequency: 60 Hz
supplies:
  T1: {system: 208Y/120, grounding: solid}
panels:
  LP2: {supply: T1}
runs:
  C1: {from: LP2, to: JB-4, length: 42 m, raceway: PVC 40 3/4}
circuits:
  LP2-7:
    panel: LP2
    slot: 7
    wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}
    runs: [C1]
    loads: []
  spare-1:
    wires: {a: THHN 12}
    runs: [C1]
limits: {live_like: 30 V}
stages:
  - {name: As found}
  - {name: LP2-7 locked off, set: {LP2-7.breaker: off}}
)";
  static constexpr const char* k_section = R"(format: idlewire-section/1
frequency: 60 Hz
enclosure: {kind: metal_tube, inner_diameter: 20.93 mm, outer_diameter: 23.42 mm, material: steel}
reference: enclosure
conductors:
  - {name: a, x: -1.7 mm, y: -7.9 mm, diameter: 2.05 mm, material: copper, strands: 1}
  - {name: b, x: 2.7 mm, y: -7.5 mm, diameter: 2.05 mm, material: copper, strands: 1}
)";
  fs::path folder_;
};

TEST_F(CommandLine, PredictPutsTheTableOnStandardOutput) {
  const Outcome run = this->run("predict model.yaml");
  EXPECT_EQ(run.status, 0) << run.err;
  EXPECT_THAT(run.out, HasSubstr("spare-1.a"));
  EXPECT_THAT(without_breaks(run.out), HasSubstr(netlists::caution()));
  EXPECT_THAT(run.out, Not(HasSubstr("\x1b"))) << "colour without a terminal";
}

TEST_F(CommandLine, TableHasTheDayOfTheSheet) {
  EXPECT_THAT(run("predict model.yaml", "SOURCE_DATE_EPOCH=1715904000").out, HasSubstr("2024-05-17"));
}

TEST_F(CommandLine, PredictWritesJsonToAFileBesideTheTable) {
  const Outcome run = this->run("predict model.yaml --json out/findings.json");
  EXPECT_EQ(run.status, 0) << run.err;
  EXPECT_THAT(run.out, HasSubstr("spare-1.a"));
  EXPECT_EQ(files_out(), 1u);
  const auto json = nlohmann::json::parse(content_of(folder_ / "out" / "findings.json"));
  EXPECT_EQ(json["format"], "idlewire-findings/1");
  EXPECT_EQ(json["model"]["sha256"].get<std::string>().size(), 64u);
  EXPECT_EQ(json["stage"], "As found");
  EXPECT_EQ(json["draws"], 200);
  EXPECT_THAT(json["assumptions"].dump(), HasSubstr("JCGM 101"));
}

TEST_F(CommandLine, DashIsStandardOutputWithNothingElseOnIt) {
  const Outcome run = this->run("predict model.yaml --json -");
  EXPECT_EQ(run.status, 0) << run.err;
  EXPECT_EQ(nlohmann::json::parse(run.out)["format"], "idlewire-findings/1");
}

TEST_F(CommandLine, SameSeedSameBytes) {
  EXPECT_EQ(run("predict model.yaml --json - --seed 7").out, run("predict model.yaml --json - --seed 7").out);
  EXPECT_NE(run("predict model.yaml --json - --seed 7").out, run("predict model.yaml --json - --seed 8").out);
}

TEST_F(CommandLine, StageIsTheOneAskedFor) {
  const auto json = nlohmann::json::parse(run("predict model.yaml --json - --stage 'LP2-7 locked off'").out);
  EXPECT_EQ(json["stage"], "LP2-7 locked off");
  const Outcome wrong = run("predict model.yaml --stage 'LP2-7 locked of'");
  EXPECT_EQ(wrong.status, 2);
  EXPECT_THAT(wrong.err, HasSubstr("no stage 'LP2-7 locked of'; the nearest is 'LP2-7 locked off'"));
}

TEST_F(CommandLine, GateBreaksOnWhatIsRanked) {
  // The spare stands at some 47 V on the multimeter, over the model's own limit of 30 V.
  const Outcome broken = run("predict model.yaml --gate misleading");
  EXPECT_EQ(broken.status, 1);
  EXPECT_THAT(broken.err, HasSubstr("gate misleading is broken by spare-1.a"));
  EXPECT_EQ(run("predict model.yaml --gate false_dead").status, 0);
  EXPECT_EQ(run("predict model.yaml --gate perhaps").status, 2);
}

TEST_F(CommandLine, ExplainShowsOneConductor) {
  const Outcome run = this->run("explain model.yaml spare-1.a");
  EXPECT_EQ(run.status, 0) << run.err;
  EXPECT_THAT(without_breaks(run.out), HasSubstr(netlists::caution()));
  EXPECT_THAT(run.out, HasSubstr("LP2-7.hot"));
  EXPECT_THAT(run.out, HasSubstr("Who puts it there"));
  const Outcome wrong = this->run("explain model.yaml spare-1.b");
  EXPECT_EQ(wrong.status, 2);
  EXPECT_THAT(wrong.out, IsEmpty());
  EXPECT_THAT(wrong.err, HasSubstr("the nearest is 'spare-1.a'"));
}

TEST_F(CommandLine, SectionTakesAFileOrARunOfAModel) {
  const Outcome file = run("section section.yaml --json out/section.json --svg out/section.svg");
  EXPECT_EQ(file.status, 0) << file.err;
  EXPECT_THAT(without_breaks(file.out), HasSubstr(netlists::caution()));
  EXPECT_THAT(file.out, HasSubstr("Capacitance, pF/m"));
  EXPECT_EQ(files_out(), 2u);
  EXPECT_THAT(content_of(folder_ / "out" / "section.svg"), StartsWith("<svg "));
  const Outcome model = run("section model.yaml --run C1 --json -");
  EXPECT_EQ(model.status, 0) << model.err;
  EXPECT_THAT(nlohmann::json::parse(model.out)["conductors"].dump(), HasSubstr("spare-1.a"));
  EXPECT_THAT(run("section model.yaml").err, HasSubstr("name one of its runs with --run"));
  EXPECT_THAT(run("section model.yaml --run C2").err, HasSubstr("the nearest is 'C1'"));
  EXPECT_EQ(run("section section.yaml --json - --svg -").status, 2);
}

TEST_F(CommandLine, NetworkIsEnoughToSolveItAnew) {
  const Outcome run = this->run("network model.yaml");
  EXPECT_EQ(run.status, 0) << run.err;
  const auto json = nlohmann::json::parse(run.out);
  EXPECT_EQ(json["format"], "idlewire-network/1");
  EXPECT_EQ(json["nodes"][0], "earth");
  EXPECT_EQ(json["nodes"].size(), json["solution_V"].size());
  EXPECT_TRUE(json["at"].contains("spare-1.a@JB-4"));
  const auto line = json["lines"][0];
  EXPECT_EQ(line["run"], "C1");
  EXPECT_EQ(line["length_m"], 42.0);
  const std::size_t n = line["conductors"].size();
  for (const char* end : {"from", "to"}) EXPECT_EQ(line[end].size(), n);
  for (const char* m : {"capacitance_F_per_m", "conductance_S_per_m"}) EXPECT_EQ(line[m][n - 1].size(), n);
  EXPECT_EQ(line["impedance_ohm_per_m"]["im"][n - 1].size(), n);
}

TEST_F(CommandLine, CheckAndCatalogueCarryTheCaution) {
  for (const char* command : {"check model.yaml", "catalogue", "catalogue dmm"}) {
    const Outcome run = this->run(command);
    EXPECT_EQ(run.status, 0) << run.err;
    EXPECT_THAT(without_breaks(run.out), HasSubstr(netlists::caution())) << command;
  }
  EXPECT_EQ(run("catalogue dnm").status, 2);
}

TEST_F(CommandLine, EveryFaultOfAModelIsSaidAndNothingComputed) {
  std::string model = k_model;
  model.replace(model.find("length: 42 m"), 12, "length: 42");
  model.replace(model.find("panel: LP2"), 10, "panel: LP9");
  std::ofstream(folder_ / "model.yaml") << model;
  for (const char* command : {"check", "predict", "network", "section --run C1"}) {
    const Outcome run = this->run(std::string(command) + " model.yaml");
    EXPECT_EQ(run.status, 2) << command;
    EXPECT_THAT(run.out, IsEmpty());
    EXPECT_THAT(run.err, HasSubstr("model.yaml:9:"));
    EXPECT_THAT(run.err, HasSubstr("model.yaml:12:"));
    EXPECT_THAT(run.err, HasSubstr("nothing computed"));
  }
}

TEST_F(CommandLine, WrongUseIsOneClearMessage) {
  const std::pair<const char*, const char*> uses[] = {
      {"", "idlewire: a command is needed: check, predict"},
      {"predit model.yaml", "there is no command 'predit'; the nearest is 'predict'"},
      {"predict", "MODEL is required"},
      {"predict model.yaml --jsn x", "there is no option '--jsn'; the nearest is '--json'"},
      {"predict model.yaml --jsn=x", "there is no option '--jsn'; the nearest is '--json'"},
      {"predict model.yaml --seed -3", "--seed"},
      {"predict model.yaml extra", "'extra' is one argument too many"},
      {"predict model.yaml --json", "--json"},
      {"--quiet predict model.yaml", "options follow the command"},
      {"predict nosuch.yaml", "nosuch.yaml"},
      {"predict out", "out"},
  };
  for (const auto& [use, message] : uses) {
    const Outcome run = this->run(use);
    EXPECT_EQ(run.status, 2) << use;
    EXPECT_THAT(run.out, IsEmpty()) << use;
    EXPECT_THAT(run.err, HasSubstr(message)) << use;
    EXPECT_LE(std::count(run.err.begin(), run.err.end(), '\n'), 2) << run.err;
  }
}

TEST_F(CommandLine, HelpAndVersionGoToStandardOutput) {
  for (const char* use : {"--help", "predict --help"}) {
    const Outcome run = this->run(use);
    EXPECT_EQ(run.status, 0);
    EXPECT_THAT(run.out, HasSubstr("Exit status"));
    EXPECT_THAT(run.err, IsEmpty());
    for (const char* unbuilt : {"remedy", "weigh", "convert", "serve"})
      EXPECT_THAT(run.out, Not(HasSubstr(unbuilt)));
  }
  EXPECT_THAT(run("--version").out, StartsWith("idlewire "));
}

TEST_F(CommandLine, WhatCannotBeWrittenIsSaidBeforeAnythingIsComputed) {
  for (const char* target : {"out", "nowhere/x.json"}) {
    const Outcome run = this->run("predict model.yaml --json " + std::string(target));
    EXPECT_EQ(run.status, 2);
    EXPECT_THAT(run.out, IsEmpty());
    EXPECT_THAT(run.err, HasSubstr("cannot write '" + std::string(target) + "'"));
  }
  EXPECT_EQ(files_out(), 0u);
}

TEST_F(CommandLine, AFailedWriteEndsWith3AndKeepsTheOldFile) {
  Outcome full = run("predict model.yaml --json /dev/full");
  EXPECT_EQ(full.status, 3);
  EXPECT_THAT(full.err, HasSubstr("cannot write '/dev/full': No space left on device"));
  // A limit on the size of files stands for a disk that is full: the write stops half way.
  std::ofstream(folder_ / "out" / "findings.json") << "old";
  full = run("predict model.yaml --json out/findings.json", "ulimit -f 1; trap '' XFSZ;");
  EXPECT_EQ(full.status, 3);
  EXPECT_THAT(full.err, HasSubstr("cannot write 'out/findings.json': File too large"));
  EXPECT_EQ(content_of(folder_ / "out" / "findings.json"), "old");
  EXPECT_EQ(files_out(), 1u);
}

TEST_F(CommandLine, AReaderThatGoesAwayIsAFailedWrite) {
  const std::string command = "cd '" + folder_.string() +
                              "' && { '" IDLEWIRE_PROGRAM
                              "' predict model.yaml 2>stderr; echo $? >status; } | true";
  ASSERT_EQ(std::system(command.c_str()), 0);
  EXPECT_EQ(content_of(folder_ / "status"), "3\n");
  EXPECT_THAT(content_of(folder_ / "stderr"), HasSubstr("cannot write standard output: Broken pipe"));
}

// script(1) of util-linux gives the program a terminal.
TEST_F(CommandLine, ColourIsForTerminalsAndNoColorIsHonoured) {
  const auto on_terminal = [this](const std::string& before) {
    const std::string command = "cd '" + folder_.string() + "' && env -u NO_COLOR TERM=xterm " + before +
                                " script -qec \"'" IDLEWIRE_PROGRAM
                                "' predict model.yaml\" /dev/null >stdout 2>stderr </dev/null";
    EXPECT_EQ(std::system(command.c_str()), 0);
    return content_of(folder_ / "stdout");
  };
  EXPECT_THAT(on_terminal(""), HasSubstr("\x1b["));
  EXPECT_THAT(on_terminal("NO_COLOR=1"), Not(HasSubstr("\x1b[")));
  EXPECT_THAT(on_terminal("NO_COLOR="), HasSubstr("\x1b["));
  EXPECT_THAT(on_terminal("TERM=dumb"), Not(HasSubstr("\x1b[")));
}

}  // namespace
