#include "io/page.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <regex>

#include "io/check_report.h"
#include "io/embedded_page.h"
#include "io/page_figures.h"
#include "io/page_html.h"
#include "io/reading_curve.h"
#include "netlists/judge.h"
#include "tests/io/sample_findings.h"

namespace {
using testing::HasSubstr;
using testing::Not;

/// A page of findings made by hand, its building empty.
std::string page_of(const netlists::Findings& findings, const netlists::Building& building = {},
                    const netlists::Lowered& lowered = {}) {
  return io::report_page({findings, building, lowered, "2024-05-17"});
}

std::size_t count(const std::string& text, const std::string& what) {
  std::size_t n = 0;
  for (std::size_t at = text.find(what); at != std::string::npos; at = text.find(what, at + 1)) ++n;
  return n;
}

TEST(Html, EscapesWhatCouldBecomeMarkup) {
  EXPECT_EQ(io::html("<b onclick=\"x\">&'"), "&lt;b onclick=&quot;x&quot;&gt;&amp;&#39;");
  EXPECT_EQ(io::html("a\nb\x1b[2J"), "a?b?[2J");
}

// The digest of "abc" is that of FIPS 180-4's example, ba7816bf ... f20015ad, in base64.
TEST(Html, PolicyHashIsTheStandardDigest) {
  EXPECT_EQ(io::policy_hash("abc"), "ungWv48Bz+pBQUDeXa4iI7ADYaOWF3qctBD/YfIAFa0=");
}

TEST(ReportPage, StandsAloneUnderAStrictPolicy) {
  const std::string page = page_of(tests::sample_findings());
  EXPECT_THAT(page, HasSubstr("default-src 'none'; style-src 'sha256-" + io::policy_hash(io::page_style())));
  EXPECT_THAT(page, HasSubstr("script-src 'sha256-" + io::policy_hash(io::page_script())));
  EXPECT_THAT(page, Not(HasSubstr("unsafe")));
  EXPECT_FALSE(std::regex_search(page, std::regex("https?:|src=|@import|style=\"|url\\([^#]")));
}

TEST(ReportPage, CarriesTheCautionAndWhatASheetMustSay) {
  const std::string page = page_of(tests::sample_findings());
  // At the top, at the foot and on the test sheet of each of the four places.
  EXPECT_EQ(count(page, io::html(netlists::caution())), 6u);
  EXPECT_EQ(
      count(page, "A reading that agrees with this sheet proves nothing. Void once anything is switched"),
      5u);
  EXPECT_EQ(count(page, "Stage: As found. 60 Hz. Model 3f2a9c5e71d0. 2024-05-17. idlewire 0.1.0."), 4u);
  EXPECT_GE(count(page, "breaker LP2-7 on; switch LP2-9.S1 open"), 5u);
}

TEST(ReportPage, TestSheetSaysThatNothingToGroundSettlesAnIsolatedLeg) {
  const std::string page = page_of(tests::sample_findings());
  const std::size_t from = page.find("Test sheet: Room 4");
  const std::string sheet = page.substr(from, page.find("</article>", from) - from);
  EXPECT_THAT(sheet, HasSubstr("isolated supply: no reading to ground settles it; treat as live"));
  EXPECT_THAT(sheet, HasSubstr("ISO-1.second"));  // leg to leg has a row
  EXPECT_THAT(sheet, Not(HasSubstr("above 1.4")));
}

TEST(ReportPage, LimitStandsWhereAnInstrumentSettles) {
  const std::string page = page_of(tests::sample_findings());
  EXPECT_THAT(page, HasSubstr("above 1.48 V on low_impedance"));
}

TEST(ReportPage, EveryLinkLeadsSomewhere) {
  netlists::Findings bare;  // a page without conductors has fewer parts to lead to
  for (const netlists::Findings& findings : {tests::sample_findings(), bare}) {
    const std::string page = page_of(findings);
    const std::regex link("href=#([a-z0-9-]+)");
    int links = 0;
    for (auto at = std::sregex_iterator(page.begin(), page.end(), link); at != std::sregex_iterator();
         ++at, ++links)
      EXPECT_TRUE(std::regex_search(page, std::regex("id=" + (*at)[1].str() + "[ >]"))) << (*at)[1];
    EXPECT_GT(links, 5);
  }
}

TEST(ReportPage, NothingOfTheModelBecomesMarkup) {
  const std::string evil = "\"'><script>alert(1)</script><img src=x onerror=alert(2)>&";
  netlists::Findings findings = tests::sample_findings();
  findings.title = findings.stage = findings.program_version = findings.model_sha256 = evil;
  findings.states = findings.assumptions = findings.warnings = {evil};
  findings.effects = {{"lamp_glows", evil, evil, 1.0, 2.0, "V", evil, true, {}}};
  findings.patterns = {{evil, evil, evil, 1, 2, 3, evil, evil}};
  for (auto& instrument : findings.instruments) instrument.name += evil;
  for (auto& conductor : findings.conductors) {
    conductor.id += evil;
    conductor.supply = evil;
    conductor.settle.why = evil;
    if (conductor.settle.instrument) conductor.settle.instrument = evil;
    for (auto& place : conductor.places) {
      place.place += evil;
      for (auto& reading : place.readings) {
        reading.instrument += evil;
        if (reading.reference != "ground") reading.reference += evil;
      }
      for (auto& entry : place.contributions) entry.from += evil;
    }
  }
  netlists::Building building;
  building.file = evil;
  building.panels.push_back({{"P" + evil, {}}, {}, {}});
  netlists::Run run;
  run.name = {"R" + evil, {}};
  run.from = {"P" + evil, {}};
  run.to = {"Room 210" + evil, {}};
  run.raceway = {evil, {}};
  run.length = 3.0;
  building.runs.push_back(run);
  const std::string page = page_of(findings, building);
  EXPECT_EQ(count(page, "<script"), 1u);
  EXPECT_EQ(count(page, "<img"), 0u);
  EXPECT_EQ(count(page, "<style"), 1u);
  EXPECT_GT(count(page, "&lt;script&gt;alert(1)"), 20u);
}

/// Ten thousand conductors, each reached at three places; `floating` of a thousand are not fed.
netlists::Findings many(int floating) {
  netlists::Findings findings = tests::sample_findings();
  const netlists::ConductorFindings spare = findings.conductors[1];
  const netlists::ConductorFindings fed = findings.conductors[3];
  findings.conductors.clear();
  for (int k = 0; k < 10000; ++k) {
    netlists::ConductorFindings one = k % 1000 < floating ? spare : fed;
    one.id = "LP" + std::to_string(k / 40) + "-" + std::to_string(k % 40) + ".switched";
    if (one.rank) one.rank = k + 1;
    while (one.places.size() < 3) one.places.push_back(one.places.front());
    for (std::size_t p = 0; p < 3; ++p)
      one.places[p].place = "Room " + std::to_string(k / 40 * 3 + static_cast<int>(p));
    findings.states.push_back("breaker LP" + std::to_string(k / 40) + "-" + std::to_string(k % 40) + " on");
    findings.conductors.push_back(one);
  }
  return findings;
}

/// A building for them: a panel for each forty, with a run to each of its three rooms.
struct Many {
  netlists::Findings findings;
  netlists::Building building;
  netlists::Lowered lowered;

  explicit Many(int floating) : findings(many(floating)) {
    for (int panel = 0; panel < 250; ++panel) {
      const std::string name = "LP" + std::to_string(panel);
      building.panels.push_back({{name, {}}, {}, {}});
      for (int room = 0; room < 3; ++room) {
        netlists::Run run;
        run.name = {"R" + std::to_string(3 * panel + room), {}};
        run.from = {room == 0 ? name : "Room " + std::to_string(3 * panel + room - 1), {}};
        run.to = {"Room " + std::to_string(3 * panel + room), {}};
        run.raceway = {"EMT 3/4", {}};
        run.length = 12.0;
        building.runs.push_back(run);
        lowered.line_runs.push_back(run.name.text);
      }
    }
    for (std::size_t k = 0; k < findings.conductors.size(); ++k) {
      netlists::ConductorPath path;
      path.id = findings.conductors[k].id;
      for (int room = 0; room < 3; ++room) path.segments.emplace_back(static_cast<int>(k / 40) * 3 + room, 0);
      lowered.conductors.push_back(path);
    }
  }
};

TEST(ReportPage, StaysBelowThreeMegabytesAndSaysWhatIsLeftOut) {
  for (const int floating : {50, 200, 1000}) {
    SCOPED_TRACE(floating);
    const Many model(floating);
    const std::string page = page_of(model.findings, model.building, model.lowered);
    EXPECT_LT(page.size(), 3'000'000u);
    EXPECT_GT(page.size(), 1'500'000u);
    EXPECT_THAT(page, HasSubstr("To keep the page small"));
    EXPECT_THAT(page, HasSubstr("LP249-39.switched"));  // none is lost
    EXPECT_THAT(page, HasSubstr(" of 750 runs are drawn"));
  }
}

// A purely capacitive source of reactance X shows V / sqrt 2 to a resistance of X: |R / (R - jX)|.
TEST(CurvePoints, FollowTheDivider) {
  const auto points = io::curve_points({0.0, 80.0}, {0.0, -1e5}, 7);
  ASSERT_EQ(points.size(), 7u);
  EXPECT_NEAR(points[3].resistance, 1e5, 1e-6);
  EXPECT_NEAR(points[3].volts, 80.0 / std::sqrt(2.0), 1e-9);
  EXPECT_NEAR(points[0].volts, 80.0 * 1e2 / std::hypot(1e2, 1e5), 1e-9);
  EXPECT_TRUE(io::curve_points(0.0, 1.0, 7).empty());
}

netlists::Band band(double p05, double p50, double p95) { return {p05, p50, p95, 0.0, 0.0, 0.0}; }

/// The sample with what draws add to it.
netlists::Findings drawn_findings() {
  netlists::Findings findings = tests::sample_findings();
  findings.draws = 200;
  netlists::ConductorFindings& spare = findings.conductors[1];
  spare.probability = 0.27;
  spare.influences = {{"clearance of <C3>", -3.1, 0.62}, {"permittivity of PVC", 1.0, 0.004}};
  for (auto& place : spare.places) {
    place.open_circuit_band = band(43.0, 64.0, 71.0);
    place.source_impedance_band = band(849e3, 1e6, 1.23e6);
    for (auto& reading : place.readings)
      if (!reading.indicator) reading.band = band(reading.volts / 2, reading.volts, reading.volts * 1.5);
  }
  return findings;
}

TEST(ReportPage, ShowsSpreadsChancesAndInfluencesWhereThereWereDraws) {
  const std::string page = page_of(drawn_findings());
  EXPECT_THAT(page, HasSubstr("43 to 71 V in nine of ten draws"));
  EXPECT_THAT(page, HasSubstr("849 kohm to 1.2 Mohm in nine of ten draws"));
  EXPECT_THAT(page, HasSubstr("chance 27 % if the drawing is right"));
  EXPECT_THAT(page, HasSubstr("clearance of &lt;C3&gt;: 62 % of the variance, -3.1 V a standard deviation"));
  EXPECT_THAT(page, HasSubstr("permittivity of PVC: under 1 % of the variance, 1.0 V a standard deviation"));
  EXPECT_EQ(count(page, "<path class=band"), 1u);
  const std::string without = page_of(tests::sample_findings());
  for (const char* word : {"nine of ten", "chance", "variance", "<path class=band"})
    EXPECT_THAT(without, Not(HasSubstr(word)));
}

// At an instrument the band is exactly its percentiles: 0.5 and 1.5 of a reading that lies on the curve.
TEST(CurveFigure, BandPassesThroughThePercentiles) {
  netlists::Findings findings = tests::sample_findings();
  findings.instruments = {tests::voltmeter("dmm", 1e6)};
  netlists::PlaceFindings place = tests::reached("JB-1", {80.0, 0.0}, {1e6, 0.0}, 8e-5);
  place.readings = {tests::reading("dmm", "ground", 40.0, netlists::Appearance::unclear, true)};
  place.readings[0].band = band(20.0, 40.0, 60.0);
  const std::string figure = io::curve_figure(findings, place, nullptr);
  // 1 Mohm is two thirds of the axis from 42 to 262; 20 and 60 V of 80 V are a quarter and three of 102 up
  // from 112.
  EXPECT_THAT(figure, HasSubstr("L189 86.5"));
  EXPECT_THAT(figure, HasSubstr("L189 35.5"));
}

// What is drawn tip to tail has to end where the sum ends.
TEST(PhasorFigure, ContributionsComeToTheSum) {
  netlists::PlaceFindings place = tests::reached("JB-1", {30.0, 40.0}, {1e5, 0.0}, 5e-4);
  place.contributions = {
      {"a", "electric", {40.0, 0.0}}, {"b", "magnetic", {0.0, 60.0}}, {"c", "electric", {-10.0, -20.0}}};
  const std::string figure = io::phasor_figure(place);
  const std::regex arrow("class=\"v ([a-z]+)\" d=\"M[^L]*L([^\"]*)\"");
  std::vector<std::pair<std::string, std::string>> ends;
  for (auto at = std::sregex_iterator(figure.begin(), figure.end(), arrow); at != std::sregex_iterator();
       ++at)
    ends.emplace_back((*at)[1], (*at)[2]);
  ASSERT_EQ(ends.size(), 4u);
  EXPECT_EQ(ends.front().first, "vs");
  EXPECT_EQ(ends.front().second, ends.back().second);
  EXPECT_THAT(figure, HasSubstr("50.0 V at 53.1 deg"));  // 3, 4, 5
}

TEST(PhasorFigure, IsLeftOutWithoutContributions) {
  EXPECT_EQ(io::phasor_figure(tests::reached("JB-1", {1.0, 0.0}, {1.0, 0.0}, 1.0)), "");
}

}  // namespace
