#include "io/writers.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <nlohmann/json.hpp>
#include <random>
#include <regex>
#include <sstream>

#include "io/json_text.h"
#include "io/reading_curve.h"
#include "io/text_layout.h"
#include "tests/io/sample_findings.h"

namespace {
using nlohmann::json;
using testing::HasSubstr;
using testing::Not;

std::string without_breaks(const std::string& text) {
  return std::regex_replace(text, std::regex("\\s+"), " ");
}

int widest(const std::string& text) {
  int most = 0;
  std::istringstream lines(text);
  for (std::string line; std::getline(lines, line);) most = std::max(most, io::columns_of(line));
  return most;
}

TEST(JsonText, ReadsBackToTheSameDouble) {
  std::mt19937_64 random(1);
  for (int trial = 0; trial < 2000; ++trial) {
    double value = 0.0;
    const std::uint64_t bits = random();
    std::memcpy(&value, &bits, sizeof value);
    if (!std::isfinite(value)) continue;
    EXPECT_EQ(json::parse(io::json_text(value)).get<double>(), value);
  }
}

// 2^-44 and 9007199254740993 / 2^k style values are where a shortest-digits method shows its quality;
// the expected texts are Python's repr, which is shortest by definition.
TEST(JsonText, WritesTheShortestDigits) {
  EXPECT_EQ(io::json_text(0.1), "0.1\n");
  EXPECT_EQ(io::json_text(60.0), "60.0\n");
  EXPECT_EQ(io::json_text(5e-324), "5e-324\n");
  EXPECT_EQ(io::json_text(1.0 / 3.0), "0.3333333333333333\n");
  EXPECT_EQ(io::json_text(9.5367431640625e-07), "9.5367431640625e-07\n");
  EXPECT_EQ(io::json_text(std::nan("")), "null\n");
}

TEST(JsonText, ReplacesBytesThatAreNoText) {
  const std::string text = "a\xFF" + std::string("b");
  EXPECT_EQ(json::parse(io::json_text(text)), "a\xEF\xBF\xBD" + std::string("b"));  // U+FFFD
}

TEST(FindingsJson, HasTheFieldsOfTheFormat) {
  const json out = json::parse(io::findings_json(tests::sample_findings()));
  EXPECT_EQ(out["format"], "idlewire-findings/1");
  EXPECT_EQ(out["program"]["name"], "idlewire");
  EXPECT_EQ(out["model"]["title"], "Quarry Lane Annex, level 2");
  EXPECT_EQ(out["frequency_Hz"], 60.0);
  EXPECT_EQ(out["stage"], "As found");
  EXPECT_EQ(out["draws"], 0);
  EXPECT_EQ(out["seed"], 1);
  EXPECT_EQ(out["caution"], netlists::caution());
  ASSERT_EQ(out["conductors"].size(), 5u);
  const json spare = out["conductors"][1];
  EXPECT_EQ(spare["id"], "spare-1.a");
  EXPECT_EQ(spare["rank"], 2);
  EXPECT_EQ(spare["condition"], "floating");
  EXPECT_EQ(spare["misleads"]["how"], "false_live");
  EXPECT_TRUE(spare["misleads"].at("probability").is_null());
  EXPECT_EQ(spare["settle"]["instrument"], "low_impedance");
  EXPECT_EQ(spare["settle"]["treat_as_live_above_V"], 1.4829);
  const json place = spare["places"][1];
  EXPECT_EQ(place["place"], "Room 210");
  EXPECT_EQ(place["open_circuit"]["reference"], "ground");
  EXPECT_DOUBLE_EQ(place["open_circuit"]["volts"], std::hypot(64.0, 2.5));
  EXPECT_DOUBLE_EQ(place["open_circuit"]["angle_deg"], std::atan2(-2.5, 64.0) * 180 / M_PI);
  for (const char* key : {"p05", "p50", "p95"}) EXPECT_TRUE(place["open_circuit"].at(key).is_null());
  EXPECT_DOUBLE_EQ(place["source_impedance"]["ohms"], std::hypot(9.0e3, 530e3));
  EXPECT_EQ(place["short_circuit_A"], 1.2084e-4);
  EXPECT_EQ(place["readings"][0]["instrument"], "dmm");
  EXPECT_TRUE(place["readings"][0].at("range_V").is_null());
  EXPECT_EQ(place["readings"][0]["appearance"], "live_like");
  EXPECT_EQ(place["readings"][0]["judged"], true);
  EXPECT_EQ(place["contributions"][0]["from"], "LP2-7.hot");
  EXPECT_EQ(place["contributions"][0]["path"], "electric");
  EXPECT_TRUE(out["conductors"][0]["settle"].at("instrument").is_null());
  EXPECT_TRUE(out["conductors"][3].at("rank").is_null());
}

TEST(FindingsJson, WritesNullAndAWarningWhereThereIsNoNumber) {
  netlists::Findings findings = tests::sample_findings();
  findings.conductors[1].places[0].open_circuit = {std::nan(""), 0.0};
  findings.conductors[1].places[0].readings[0].volts = HUGE_VAL;
  const std::string text = io::findings_json(findings);
  EXPECT_THAT(text, Not(HasSubstr("nan")));
  EXPECT_THAT(text, Not(HasSubstr("inf")));
  const json out = json::parse(text);
  const json place = out["conductors"][1]["places"][0];
  EXPECT_TRUE(place["open_circuit"]["volts"].is_null());
  EXPECT_TRUE(place["open_circuit"]["angle_deg"].is_null());
  ASSERT_EQ(out["warnings"].size(), 3u);
  EXPECT_EQ(out["warnings"][1],
            "spare-1.a at JB-4: open-circuit voltage could not be computed; null stands in its place");
  EXPECT_EQ(out["warnings"][2],
            "spare-1.a at JB-4: reading of dmm to ground could not be computed; null stands in its place");
}

TEST(SectionJson, HasTheFieldsOfTheFormat) {
  engine::FieldMatrices field;
  field.capacitance = (Eigen::Matrix2d() << 2e-10, -1e-10, -1e-10, 3e-10).finished();
  field.loss_capacitance = 0.01 * field.capacitance;
  field.external_inductance = Eigen::Matrix2d::Identity() * 1e-7;
  field.order = 12;
  field.estimated_relative_error = 3e-8;
  const Eigen::MatrixXcd z = Eigen::Matrix2cd::Identity() * std::complex<double>(5e-3, 1e-3);
  const json out = json::parse(io::section_json(field, z, 60.0, {"a", "b"}, "enclosure"));
  EXPECT_EQ(out["format"], "idlewire-section-result/1");
  EXPECT_EQ(out["conductors"], json({"a", "b"}));
  EXPECT_EQ(out["reference"], "enclosure");
  EXPECT_EQ(out["capacitance_F_per_m"][0][1], -1e-10);
  EXPECT_DOUBLE_EQ(out["conductance_S_per_m"][1][1], 2 * M_PI * 60 * 3e-12);
  EXPECT_EQ(out["external_inductance_H_per_m"][0][0], 1e-7);
  EXPECT_EQ(out["impedance_ohm_per_m"]["re"][1][1], 5e-3);
  EXPECT_EQ(out["impedance_ohm_per_m"]["im"][1][0], 0.0);
  EXPECT_EQ(out["convergence"]["order"], 12);
  EXPECT_EQ(out["convergence"]["estimated_relative_error"], 3e-8);
}

TEST(RankedTable, PutsFalseDeadBeforeFalseLiveBeforeWhatIsNotFlagged) {
  const std::string table = io::ranked_table(tests::sample_findings(), 100, false);
  const auto dead = table.find("ISO-1.hot"), live = table.find("spare-1.a"), quiet = table.find("old-14.hot"),
             fed = table.find("energised by T1: LP2-7.hot");
  ASSERT_NE(fed, std::string::npos);
  EXPECT_LT(dead, live);
  EXPECT_LT(live, quiet);
  EXPECT_LT(quiet, fed);
}

TEST(RankedTable, RowHasEveryFact) {
  const std::string table = without_breaks(io::ranked_table(tests::sample_findings(), 100, false));
  EXPECT_THAT(table, HasSubstr("2 spare-1.a Room 210 61 V 0.35 V 530 kohm 0.12 mA"));
  EXPECT_THAT(table, HasSubstr("false_live: floating."));
  EXPECT_THAT(table, HasSubstr("Mainly from LP2-7.hot (electric, 70 V of 64 V)."));
  EXPECT_THAT(table, HasSubstr("Settled by low_impedance: expect 0.35 V, treat as live above 1.48 V."));
}

TEST(RankedTable, SaysThatNoReadingToGroundSettlesAnIsolatedSupply) {
  const std::string table = without_breaks(io::ranked_table(tests::sample_findings(), 100, false));
  EXPECT_THAT(table, HasSubstr("energised by IT1, an isolated supply."));
  EXPECT_THAT(table,
              HasSubstr("No reading to ground settles it. To ISO-1.second: dmm 120 V, low_impedance 120 V."));
}

TEST(RankedTable, ExpectsMoreBehindADrive) {
  const std::string table = without_breaks(io::ranked_table(tests::sample_findings(), 100, false));
  EXPECT_THAT(table, HasSubstr("not flagged: floating. Not predicted: expect more than shown."));
}

TEST(RankedTable, NeverOutgrowsItsWidthAndKeepsEveryFact) {
  netlists::Findings findings = tests::sample_findings();
  findings.conductors[1].id = "a-circuit-of-the-old-annex-with-a-long-name.switched_leg";
  for (const char* name : {"analog_5k", "dmm_old", "bench_dmm", "solenoid_tester"}) {
    findings.instruments.push_back(tests::voltmeter(name, 1e6));
    findings.conductors[1].places[1].readings.push_back(
        tests::reading(name, "ground", 33.0, netlists::Appearance::unclear, true));
  }
  for (const int width : {60, 72, 80, 100, 140}) {
    const std::string table = io::ranked_table(findings, width, false);
    EXPECT_LE(widest(table), width);
    std::string solid = table;
    std::erase_if(solid, [](char c) { return c == ' ' || c == '\n'; });
    for (const char* fact : {"switched_leg", "530kohm", "0.12mA", "treatasliveabove1.48V", "LP2-7.hot"})
      EXPECT_THAT(solid, HasSubstr(fact)) << width;
  }
  EXPECT_THAT(without_breaks(io::ranked_table(findings, 60, false)),
              HasSubstr("Reads dmm 61 V, low_impedance 0.35 V, analog_5k 33 V"));
}

TEST(RankedTable, ColourIsNeverTheOnlyCarrier) {
  const netlists::Findings findings = tests::sample_findings();
  const std::string coloured = io::ranked_table(findings, 100, true);
  EXPECT_THAT(coloured, HasSubstr("\x1b["));
  EXPECT_THAT(coloured, Not(HasSubstr("\x1b[32")));  // green
  EXPECT_EQ(std::regex_replace(coloured, std::regex("\x1b\\[[0-9;]*m"), ""),
            io::ranked_table(findings, 100, false));
}

TEST(RankedTable, HoldsNoControlCharacterOfTheModel) {
  netlists::Findings findings = tests::sample_findings();
  findings.title = findings.conductors[1].id = findings.conductors[1].places[1].place = "x\x1b[2J";
  findings.states = findings.warnings = findings.assumptions = {"y\x1b[2J"};
  findings.conductors[1].places[1].contributions[0].from = "z\x1b[2J";
  EXPECT_THAT(io::ranked_table(findings, 100, false), Not(HasSubstr("\x1b")));
  EXPECT_THAT(io::explanation(findings, "x\x1b[2J", 100), Not(HasSubstr("\x1b")));
}

TEST(RankedTable, IsASheetThatProvesNothing) {
  const std::string table =
      without_breaks(io::ranked_table(tests::sample_findings(), 100, false, "2024-05-17"));
  for (const char* part : {"Stage: As found.", "Model 3f2a9c5e71d0.", "2024-05-17.", "breaker LP2-7 on",
                           "switch LP2-9.S1 open", "A reading that agrees with this sheet proves nothing.",
                           "Void once anything is switched or changed."})
    EXPECT_THAT(table, HasSubstr(part));
}

TEST(RankedTable, StandsWithoutConductors) {
  EXPECT_THAT(io::ranked_table({}, 100, false), HasSubstr("untitled model"));
}

TEST(Explanation, TellsOneConductorInFull) {
  const std::string text = without_breaks(io::explanation(tests::sample_findings(), "spare-1.a", 100));
  for (const char* part :
       {"floating: neither a wire, a closed contact, a winding nor a load leads from it",
        "open circuit 64.05 V at -2.2 deg", "source impedance 530 kohm at -89.0 deg",
        "short-circuit current (computed) 0.121 mA", "LP2-7.hot electric 70.03 V -1.6 deg 70.02 V",
        "others magnetic 0.10 V 90.0 deg 0.00 V", "sum 64.05 V -2.2 deg 64.05 V",
        "dmm LP2-7.hot - 58.9 V live_like shown only", "dmm ground - 61.2 V live_like judged",
        "neon_tester ground 12.0 V silent", "treat as live above 1.48 V",
        "A reading below this limit never proves the conductor dead.", "a: dmm, 10 Mohm, reads 55 V",
        "breaker LP2-7 on", "clearance of C1 taken as 50 mm"})
    EXPECT_THAT(text, HasSubstr(part));
}

TEST(Explanation, KeepsItsWidth) {
  for (const auto& conductor : tests::sample_findings().conductors)
    for (const int width : {80, 100})
      EXPECT_LE(widest(io::explanation(tests::sample_findings(), conductor.id, width)), width)
          << conductor.id;
}

TEST(Explanation, NamesTheNearestConductor) {
  try {
    io::explanation(tests::sample_findings(), "spare-1.b", 100);
    FAIL() << "an unknown conductor was explained";
  } catch (const std::invalid_argument& error) {
    EXPECT_STREQ(error.what(), "the model has no conductor 'spare-1.b'; the nearest is 'spare-1.a'");
  }
}

// 60 V behind a pure 1 Mohm resistance: 1 Mohm reads half, so the curve passes half height at the
// decade mark of 1 M (the voltage divider).
TEST(ReadingCurve, PassesHalfWhereTheInstrumentMatchesTheSource) {
  const std::string drawn = io::reading_curve({60.0, 0.0}, {1e6, 0.0}, {{"mine", 1e6, 30.0}}, 83);
  std::istringstream lines(drawn);
  std::vector<std::string> rows;
  for (std::string line; std::getline(lines, line);) rows.push_back(line);
  ASSERT_GE(rows.size(), 11u);
  const std::size_t column = 10 + 48;  // 4 of 6 decades on 72 steps, after the labels
  ASSERT_GT(rows[4].size(), column);
  EXPECT_EQ(rows[4][column], 'a');
  EXPECT_EQ(rows[9][column], '+');
  EXPECT_THAT(rows[4], HasSubstr("30 V |"));
}

TEST(ReadingCurve, IsLeftOutWhereNothingIsKnown) {
  EXPECT_EQ(io::reading_curve({std::nan(""), 0.0}, {1e6, 0.0}, {}, 80), "");
  EXPECT_EQ(io::reading_curve({0.0, 0.0}, {1e6, 0.0}, {}, 80), "");
}

TEST(SectionText, GivesUnitsAndNames) {
  engine::FieldMatrices field;
  field.capacitance = Eigen::MatrixXd::Identity(12, 12) * 1.25e-10;
  field.loss_capacitance = 0.01 * field.capacitance;
  field.loss_capacitance(0, 1) = -1.2346e-19;
  field.external_inductance = Eigen::MatrixXd::Identity(12, 12) * 1e-7;
  const Eigen::MatrixXcd z = Eigen::MatrixXcd::Identity(12, 12) * std::complex<double>(5e-3, 1e-3);
  const std::vector<std::string> names(12, "spare-1.a");
  const std::string text = io::section_text(field, z, 60.0, names, "enclosure", {"copper: 5.8e7 S/m"});
  EXPECT_LE(widest(text), 100);
  for (const char* part : {"counted from enclosure", "Capacitance, pF/m", "125", "Series resistance, mohm/m",
                           "copper: 5.8e7 S/m", "    12  spare-1.a"})
    EXPECT_THAT(text, HasSubstr(part));
  EXPECT_THAT(text,
              HasSubstr(" -4.6543e-08 "));  // the longest number there is; it once touched its neighbour
}

TEST(SectionSvg, DrawsToScale) {
  engine::CrossSection section;
  section.surroundings = engine::Surroundings::metal_tube;
  section.tube_inner_radius = 9e-3;
  section.tube_outer_radius = 10e-3;
  engine::RoundConductor wire;
  wire.radius = 1e-3;
  wire.layers = {{1.65e-3, {3.6, 0.05}}};
  section.conductors = {wire};
  const std::string svg = io::section_svg(section, {"a<b"});
  // The tube's 20 mm and 4 % of margin on either side fill 160 mm.
  const double scale = 160.0 / 21.6;
  for (const double radius : {10.0, 9.0, 1.65, 1.0}) {
    char text[32];
    std::snprintf(text, sizeof text, "r=\"%.3f\"", radius * scale);
    EXPECT_THAT(svg, HasSubstr(text));
  }
  EXPECT_THAT(svg, HasSubstr("1  a&lt;b"));
  EXPECT_THAT(svg, HasSubstr("A prediction is not a test."));
}

TEST(Caution, StandsOnEveryOutputForPeople) {
  const netlists::Findings findings = tests::sample_findings();
  const Eigen::MatrixXcd z = Eigen::MatrixXcd::Identity(1, 1);
  const engine::FieldMatrices field{Eigen::MatrixXd::Identity(1, 1), Eigen::MatrixXd::Identity(1, 1),
                                    Eigen::MatrixXd::Identity(1, 1), 1, 0.0};
  for (const std::string& text :
       {io::ranked_table(findings, 60, false), io::ranked_table(findings, 100, true),
        io::explanation(findings, "spare-1.a", 80), io::section_text(field, z, 60.0, {"a"}, "plane")})
    EXPECT_THAT(without_breaks(text), HasSubstr(netlists::caution()));
}

TEST(Caution, SaysWhatItMust) {
  for (const char* part :
       {"A prediction is not a test", "Treat every conductor as live until proved dead",
        "proper, proven instrument", "Local codes and a licensed person decide",
        "Isolated systems can read nothing to ground and be live", "at full voltage to ground"})
    EXPECT_THAT(netlists::caution(), HasSubstr(part));
}

}  // namespace
