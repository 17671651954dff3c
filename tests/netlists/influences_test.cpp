#include "netlists/influences.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <string>

#include "netlists/predict.h"
#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

/// Bare wires over the plane; lengths within 30 %.
const char* const k_bare_wires =
    "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
    "runs:\n"
    "  C1:\n"
    "    {from: LP, to: Box, length: 20 m, raceway: none, clearance: 50 mm,\n"
    "     layout: {L1.hot: [0 mm, 55 mm], L1.neutral: [9 mm, 55 mm], spare.a: [4 mm, 61 mm]}}\n"
    "circuits:\n"
    "  L1: {panel: LP, slot: 1, wires: {hot: bare copper 12, neutral: bare copper 12}, runs: [C1], loads: "
    "[]}\n"
    "  spare: {wires: {a: bare copper 12}, runs: [C1]}\n"
    "uncertainty: {length: {spread: 30 %}}\n"
    "limits: {live_like: 10 V}\n";

double moved_by(const ConductorFindings& found, const std::string& quantity) {
  for (const Influence& one : found.influences)
    if (one.quantity == quantity) return one.derivative;
  ADD_FAILURE() << "nothing of " << quantity;
  return 0.0;
}

Findings nominal(const Building& building) {
  const Lowered lowered = lower(building, "", 1);
  return judge(building, lowered, engine::SolvedNetwork(lowered.network));
}

double highest_reading(const Findings& findings) {
  const RankedReading ranked = ranked_reading(conductor(findings, "spare.a"));
  return ranked.reading == nullptr ? 0.0 : ranked.reading->volts;
}

TEST(Influences, AgreeWithModelsThatDifferInOneQuantity) {
  const Building building = building_of(k_bare_wires);
  PredictOptions options;
  options.draws = 20;
  const Findings findings = predict(building, options).findings;
  const ConductorFindings& spare = conductor(findings, "spare.a");
  const double volts = highest_reading(findings);
  ASSERT_GT(volts, 10.0);
  // The reading is proportional to the supply's voltage and to the instrument's calibration.
  EXPECT_NEAR(moved_by(spare, "voltage of T1"), volts * supply_spread(60).sigma(), 1e-6 * volts);
  EXPECT_NEAR(moved_by(spare, "calibration of dmm"), volts * instrument_reading_spread().sigma(),
              1e-6 * volts);
  // The length by central differences of the whole prediction; h^2 of its third derivative is below 1e-6.
  const double h = 1e-3;
  const auto at_length = [&](double factor) {
    Building changed = building;
    changed.runs[0].length *= factor;
    return highest_reading(nominal(changed));
  };
  const double slope = (at_length(1 + h) - at_length(1 - h)) / (2 * h);
  const double sigma = (Spread{Spread::Shape::lognormal, 0.7, 1.0, 1.3}.sigma());
  EXPECT_NEAR(moved_by(spare, "length of C1"), slope * sigma, 1e-5 * volts);
  // An instrument of more ohms, likewise.
  const auto at_resistance = [&](double factor) {
    Building changed = building;
    for (InstrumentType& one : changed.instruments)
      if (one.name == "dmm") one.resistance *= factor;
    return highest_reading(nominal(changed));
  };
  const double by_resistance = (at_resistance(1 + h) - at_resistance(1 - h)) / (2 * h);
  EXPECT_NEAR(moved_by(spare, "resistance of dmm"), by_resistance * instrument_resistance_spread().sigma(),
              1e-5 * volts);
}

TEST(Influences, AreSharesOfOneVariance) {
  PredictOptions options;
  options.draws = 50;
  options.explain = "spare.a";
  const Findings findings =
      predict(building_of(one_circuit("20 m", "EMT 3/4") + "  spare: {wires: {a: THHN 12}, runs: [C1]}\n"),
              options)
          .findings;
  const std::vector<Influence>& all = conductor(findings, "spare.a").influences;
  ASSERT_FALSE(all.empty());
  double sum = 0.0;
  for (const Influence& one : all) sum += one.share;
  EXPECT_LE(sum, 1 + 1e-12);
  EXPECT_GT(sum, 0.98);  // those under a thousandth are left out
  EXPECT_TRUE(std::is_sorted(all.begin(), all.end(),
                             [](const Influence& a, const Influence& b) { return a.share > b.share; }));
  EXPECT_TRUE(std::any_of(all.begin(), all.end(),
                          [](const Influence& one) { return one.quantity == "layouts in C1"; }));
}

}  // namespace
}  // namespace netlists
