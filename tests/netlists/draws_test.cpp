#include "netlists/draws.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>
#include <random>
#include <string>
#include <vector>

#include "netlists/predict.h"
#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

using ::testing::HasSubstr;

Findings predicted(const Building& building, int draws, unsigned seed = 1, int threads = 0) {
  PredictOptions options;
  options.draws = draws;
  options.seed = seed;
  options.threads = threads;
  return predict(building, options).findings;
}

/// Bare wires at given places over the plane: nothing is uncertain but what each test leaves so.
std::string bare_wires(const std::string& uncertainty) {
  return "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
         "runs:\n"
         "  C1:\n"
         "    {from: LP, to: Box, length: 20 m, raceway: none, clearance: 50 mm,\n"
         "     layout: {L1.hot: [0 mm, 55 mm], L1.neutral: [9 mm, 55 mm], spare.a: [4 mm, 61 mm]}}\n"
         "circuits:\n"
         "  L1: {panel: LP, slot: 1, wires: {hot: bare copper 12, neutral: bare copper 12}, runs: [C1], "
         "loads: []}\n"
         "  spare: {wires: {a: bare copper 12}, runs: [C1]}\n" +
         uncertainty;
}

const PlaceFindings& at(const Findings& findings, const std::string& id, const std::string& place) {
  for (const PlaceFindings& found : conductor(findings, id).places)
    if (found.place == place) return found;
  ADD_FAILURE() << id << " at " << place;
  static const PlaceFindings none;
  return none;
}

/// P(x <= value), x a spread whose ln is normal on either side of its median.
double below(const Spread& x, double value) {
  const double ratio = value < x.mid ? x.mid / x.low : x.high / x.mid;
  return 0.5 *
         std::erfc(-std::log(value / x.mid) * 1.6448536269514722 / std::log(ratio) / std::numbers::sqrt2);
}

/// A percentile of the product of two such quantities, by quadrature over the first and bisection.
double product_percentile(const Spread& x, const Spread& y, double p) {
  const auto distribution = [&](double value) {
    double sum = 0.0;
    constexpr int k_steps = 4000;
    for (int k = 0; k < k_steps; ++k) {
      const double z = -6 + 12 * (k + 0.5) / k_steps;
      const double ratio = z < 0 ? x.mid / x.low : x.high / x.mid;
      sum += std::exp(-z * z / 2) * below(y, value / (x.mid * std::pow(ratio, z / 1.6448536269514722)));
    }
    return sum * 12.0 / k_steps / std::sqrt(2 * std::numbers::pi);
  };
  double low = 0.1;
  double high = 10.0;
  for (int k = 0; k < 60; ++k) ((distribution((low + high) / 2) < p) ? low : high) = (low + high) / 2;
  return low;
}

void expect_band(const Band& band, double p05, double p50, double p95) {
  EXPECT_NEAR(band.p05, p05, 3 * band.p05_error);
  EXPECT_NEAR(band.p50, p50, 3 * band.p50_error);
  EXPECT_NEAR(band.p95, p95, 3 * band.p95_error);
  EXPECT_LT(band.p50_error, 0.02 * p50);
  EXPECT_LT(band.p95_error, 0.04 * p95);
}

// The percentiles of normal numbers are known, and how far those of a sample of 400 scatter about them:
// sqrt(p (1 - p) / n) over the density there (a textbook's asymptotic result).
TEST(BandOf, KnowsItsOwnError) {
  std::mt19937 random(5);
  std::normal_distribution<double> normal(10.0, 1.0);
  double errors[3] = {0, 0, 0};
  double squares[3] = {0, 0, 0};
  constexpr int k_samples = 400;
  const double exact[3] = {10 - 1.6448536, 10, 10 + 1.6448536};
  for (int sample = 0; sample < k_samples; ++sample) {
    std::vector<double> values(400);
    for (double& value : values) value = normal(random);
    const Band band = band_of(values);
    const double off[3] = {band.p05 - exact[0], band.p50 - exact[1], band.p95 - exact[2]};
    const double said[3] = {band.p05_error, band.p50_error, band.p95_error};
    for (int k = 0; k < 3; ++k) {
      errors[k] += said[k] / k_samples;
      squares[k] += off[k] * off[k] / k_samples;
    }
  }
  const double densities[3] = {0.10313564, 0.39894228, 0.10313564};
  const double weights[3] = {0.05 * 0.95, 0.25, 0.05 * 0.95};
  for (int k = 0; k < 3; ++k) {
    const double textbook = std::sqrt(weights[k] / 400) / densities[k];
    EXPECT_NEAR(std::sqrt(squares[k]), textbook, 0.12 * textbook) << k;  // 400 samples know it to 3.5 %
    EXPECT_NEAR(errors[k], textbook, 0.15 * textbook) << k;
  }
}

TEST(BandOf, LeavesOutWhatIsNoNumber) {
  const Band band = band_of({1.0, std::nan(""), 1.0, 1.0});
  EXPECT_EQ(band.p05, 1.0);
  EXPECT_EQ(band.p95, 1.0);
  EXPECT_EQ(band.p95_error, 0.0);
  EXPECT_EQ(band_of({}).p50, 0.0);
}

// A floating wire beside a live one: its voltage follows that of the supply alone, whatever the length.
TEST(Draws, OfAVoltageFollowTheSupplys) {
  const Building building = building_of(bare_wires("uncertainty: {length: {spread: 30 %}}\n"));
  const Findings findings = predicted(building, 400);
  const PlaceFindings& spare = at(findings, "spare.a", "Box");
  const double volts = std::abs(spare.open_circuit);
  ASSERT_GT(volts, 5.0);
  ASSERT_TRUE(spare.open_circuit_band);
  expect_band(*spare.open_circuit_band, 0.95 * volts, volts, 1.05 * volts);
}

// The current that it drives is U j omega C l: the product of two known distributions. So is the reading of
// a stiff conductor: the supply's voltage times the instrument's calibration.
TEST(Draws, OfProductsHaveTheirDistribution) {
  const Building building = building_of(bare_wires("uncertainty: {length: {spread: 30 %}}\n"));
  const Findings findings = predicted(building, 800);
  const Spread supply = supply_spread(60.0);
  const Spread length{Spread::Shape::lognormal, 0.7, 1.0, 1.3};
  const PlaceFindings& spare = at(findings, "spare.a", "Box");
  ASSERT_TRUE(spare.short_circuit_band);
  expect_band(*spare.short_circuit_band, spare.short_circuit * product_percentile(supply, length, 0.05),
              spare.short_circuit * product_percentile(supply, length, 0.50),
              spare.short_circuit * product_percentile(supply, length, 0.95));
  const Reading& hot = at(findings, "L1.hot", "Box").readings.front();
  ASSERT_TRUE(hot.band);
  const Spread shown = instrument_reading_spread();
  expect_band(*hot.band, hot.volts * product_percentile(supply, shown, 0.05),
              hot.volts * product_percentile(supply, shown, 0.50),
              hot.volts * product_percentile(supply, shown, 0.95));
}

// Nothing else in the model is uncertain, so the source impedance goes as one over the length.
TEST(Draws, OfTheSourceImpedanceGoAsOneOverTheLength) {
  const Building building = building_of(bare_wires("uncertainty: {length: {spread: 30 %}}\n"));
  const Findings findings = predicted(building, 400);
  const PlaceFindings& spare = at(findings, "spare.a", "Box");
  const double ohms = std::abs(spare.source_impedance);
  ASSERT_TRUE(spare.source_impedance_band);
  expect_band(*spare.source_impedance_band, ohms / 1.3, ohms, ohms / 0.7);
}

void expect_equal(const Findings& a, const Findings& b) {
  ASSERT_EQ(a.conductors.size(), b.conductors.size());
  for (std::size_t c = 0; c < a.conductors.size(); ++c) {
    EXPECT_EQ(a.conductors[c].id, b.conductors[c].id);
    EXPECT_EQ(a.conductors[c].probability, b.conductors[c].probability);
    for (std::size_t p = 0; p < a.conductors[c].places.size(); ++p) {
      const PlaceFindings& one = a.conductors[c].places[p];
      const PlaceFindings& other = b.conductors[c].places[p];
      EXPECT_EQ(one.open_circuit_band->p95, other.open_circuit_band->p95);
      for (std::size_t r = 0; r < one.readings.size(); ++r)
        EXPECT_EQ(one.readings[r].band->p05, other.readings[r].band->p05);
    }
  }
}

const char* const k_all_uncertain =
    "  spare: {wires: {a: THHN 12, b: THHN 12}, runs: [C1]}\n"
    "uncertainty: {may_vary: [L1.breaker]}\n";

TEST(Draws, DoNotDependOnTheNumberOfThreads) {
  const Building building = building_of(one_circuit("20 m", "EMT 3/4") + k_all_uncertain);
  const Findings one = predicted(building, 60, 3, 1);
  expect_equal(one, predicted(building, 60, 3, 2));
  expect_equal(one, predicted(building, 60, 3, 5));
}

TEST(Draws, GoOnWhereTheyStopped) {
  const Building building = building_of(one_circuit("20 m", "EMT 3/4") + k_all_uncertain);
  const Lowered lowered = lower(building, "", 1);
  const Findings nominal = judge(building, lowered, engine::SolvedNetwork(lowered.network));
  Draws at_once(building, lowered, nominal, 1, 2, nullptr);
  Draws in_parts(building, lowered, nominal, 1, 2, nullptr);
  at_once.make(50);
  for (const int count : {7, 20, 50}) in_parts.make(count);
  Findings one = nominal;
  Findings other = nominal;
  at_once.fill(one);
  in_parts.fill(other);
  expect_equal(one, other);
}

/// A true building: every quantity that is uncertain drawn from its stated spread by other means than the
/// draws' own, its layouts anew from `seed`, as many as its wander length asks for.
Findings true_building(Building building, unsigned seed) {
  std::mt19937 random(seed);
  std::normal_distribution<double> normal;
  std::uniform_real_distribution<double> uniform;
  const auto factor = [&](double low, double high) {
    const double z = normal(random) / 1.6448536269514722;
    return z < 0 ? std::pow(low, -z) : std::pow(high, z);
  };
  const auto log_uniform = [&](double low, double high) {
    return low * std::pow(high / low, (uniform(random) - 0.05) / 0.9);
  };
  building.runs[0].length *= factor(0.9, 1.1);
  building.runs[0].clearance = log_uniform(5e-3, 1.0);
  const double wander = log_uniform(0.5, 5.0);
  building.uncertainty.wander_length = {wander, wander};
  for (const char* name : {"PVC", "nylon", "rigid PVC"}) {
    const auto found = building.catalogue.materials.find(name);
    if (found == building.catalogue.materials.end()) continue;
    Material& material = found->second;
    material.permittivity *= factor(material.permittivity_low / material.permittivity,
                                    material.permittivity_high / material.permittivity);
  }
  const double thickness = factor(0.9, 1.1);
  for (auto& [name, wire] : building.catalogue.wires)
    for (auto& layer : wire.layers) layer.thickness *= thickness;
  for (InstrumentType& instrument : building.instruments) instrument.resistance *= factor(0.95, 1.05);
  const double supply = factor(0.95, 1.05);
  const Lowered lowered = lower(building, "", 10000 + seed);
  Findings findings = judge(building, lowered, engine::SolvedNetwork(lowered.network));
  for (ConductorFindings& found : findings.conductors)
    for (PlaceFindings& place : found.places)
      for (Reading& reading : place.readings) reading.volts *= supply * factor(0.98, 1.02);
  return findings;
}

// 90 % bands hold nine in ten of 200 true buildings. 20 predictions judge ten of them each; what one
// prediction gets wrong, its own layouts above all, its ten share, which by a simulation of normal numbers
// with as many layouts widens the binomial's sqrt(200 * 0.9 * 0.1) = 4.2 to some 7.
TEST(Draws, CoverBuildingsDrawnAnew) {
  constexpr int k_predictions = 20;
  constexpr int k_each = 10;
  const Building building =
      building_of(one_circuit("24 m", "PVC 40 3/4") +
                  "    loads: []\n  spare: {wires: {a: THHN 12, b: THHN 12}, runs: [C1]}\n"
                  "instruments: [dmm, low_impedance]\n");
  std::map<std::string, int> held;  // by conductor and instrument
  for (int prediction = 0; prediction < k_predictions; ++prediction) {
    const Findings bands = predicted(building, 200, 1000 + prediction);
    for (int k = 0; k < k_each; ++k) {
      const Findings truth = true_building(building, 1 + prediction * k_each + k);
      for (const char* id : {"spare.a", "spare.b"})
        for (const Reading& reading : at(bands, id, "Room").readings) {
          if (reading.reference != "ground") continue;
          const double value = netlists::reading(conductor(truth, id), "Room", reading.instrument, "ground");
          held[std::string(id) + " on " + reading.instrument] +=
              value >= reading.band->p05 && value <= reading.band->p95 ? 1 : 0;
        }
    }
  }
  ASSERT_EQ(held.size(), 4u);
  for (const auto& [what, count] : held) EXPECT_NEAR(count, 0.9 * k_predictions * k_each, 20) << what;
}

// With the chance that its breaker is on a half, half of the draws find no live conductor beside the spare.
TEST(Draws, VaryWhatMayVary) {
  const Building building = building_of(one_circuit("20 m", "EMT 3/4") +
                                        "    loads: []\n  spare: {wires: {a: THHN 12}, runs: [C1]}\n"
                                        "uncertainty: {may_vary: [L1.breaker]}\n");
  const Findings findings = predicted(building, 256);
  const PlaceFindings& spare = at(findings, "spare.a", "Room");
  EXPECT_LT(spare.open_circuit_band->p05, 0.02 * std::abs(spare.open_circuit));
  EXPECT_GT(spare.open_circuit_band->p95, 0.8 * std::abs(spare.open_circuit));
}

// The hot of a breaker that is off: behind a load to the neutral it reads nothing, without one it floats
// beside its live neighbour. Where the model lists no loads a load is there with probability 0.7.
TEST(Draws, PutLoadsWhereTheModelListsNone) {
  const std::string head =
      "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
      "runs: {C1: {from: LP, to: Room, length: 40 m, raceway: PVC 40 3/4}}\n"
      "circuits:\n"
      "  L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12}, runs: [C1], loads: []}\n"
      "  L2: {panel: LP, slot: 5, breaker: off, wires: {hot: THHN 12, neutral: THHN 12}, runs: [C1]";
  const Findings unknown = predicted(building_of(head + "}\n"), 400);
  const Findings none = predicted(building_of(head + ", loads: []}\n"), 400);
  const Band with_chance = *at(unknown, "L2.hot", "Room").readings.front().band;
  const Band without = *at(none, "L2.hot", "Room").readings.front().band;
  EXPECT_LT(with_chance.p50, 0.1);  // 70 % of the draws have the load
  EXPECT_GT(with_chance.p95, 0.8 * without.p50);
  EXPECT_GT(without.p05, 1.0);
}

// The chance of misleading is the share of the draws that mislead; the other row of a zero chance has no
// rank.
TEST(Draws, GiveTheChanceOfMisleading) {
  const Building building = building_of(bare_wires("limits: {live_like: 10 V}\n"));
  const Findings findings = predicted(building, 200);
  const ConductorFindings& spare = conductor(findings, "spare.a");
  const double shown = spare.places.front().readings.front().volts;
  ASSERT_GT(shown, 0.0);
  // The limit at what the middle draw of its strongest voltmeter shows: an even chance.
  Building even = building;
  double most = 0.0;
  for (const PlaceFindings& place : spare.places)
    for (const Reading& reading : place.readings)
      if (reading.judged) most = std::max(most, reading.band->p50);
  even.limits.live_like = most;
  const Findings at_even = predicted(even, 400);
  const ConductorFindings& found = conductor(at_even, "spare.a");
  EXPECT_EQ(found.misleads, Misleads::false_live);
  ASSERT_TRUE(found.probability);
  EXPECT_GT(*found.probability, 0.45);  // at each place and reference there is a chance of its own
  EXPECT_NEAR(found.probability_error, std::sqrt(*found.probability * (1 - *found.probability) / 400), 1e-12);
  Building never = building;
  never.limits.live_like = 10 * most;
  const Findings at_never = predicted(never, 400);
  const ConductorFindings& quiet = conductor(at_never, "spare.a");
  EXPECT_EQ(quiet.probability, 0.0);
  EXPECT_FALSE(quiet.rank);
}

TEST(Draws, UntilTheRankingStands) {
  const Building building = building_of(one_circuit("20 m", "EMT 3/4") + k_all_uncertain);
  PredictOptions options;
  options.until_stable = true;
  const Findings findings = predict(building, options).findings;
  EXPECT_GE(findings.draws, 200);
  EXPECT_LE(findings.draws, k_most_draws);
}

TEST(Draws, NoneAtAllIsTheNominalCase) {
  const Building building = building_of(one_circuit("20 m", "EMT 3/4") + k_all_uncertain);
  const Findings findings = predicted(building, 0);
  EXPECT_EQ(findings.draws, 0);
  EXPECT_FALSE(conductor(findings, "spare.a").probability);
  EXPECT_FALSE(at(findings, "spare.a", "Room").open_circuit_band);
}

TEST(Draws, RefuseWhatCannotVary) {
  const Building building =
      building_of(one_circuit("20 m", "EMT 3/4") + "uncertainty: {may_vary: [L1.breaker]}\n");
  Building wrong = building;
  wrong.uncertainty.may_vary[0].text = "L1.braker";
  try {
    (void)predicted(wrong, 10);
    FAIL() << "accepted";
  } catch (const std::invalid_argument& error) {
    EXPECT_THAT(error.what(), HasSubstr("may_vary"));
  }
}

}  // namespace
}  // namespace netlists
