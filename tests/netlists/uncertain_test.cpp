#include "netlists/uncertain.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <random>
#include <set>
#include <vector>

#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

// What [a, b] means in a model: a twentieth of all draws below a, a twentieth above b.
TEST(Spread, HasTheGivenPercentiles) {
  const Spread skewed{Spread::Shape::lognormal, 3.6, 4.0, 6.0};
  const Spread wide{Spread::Shape::log_uniform, 5e-3, std::sqrt(5e-3), 1.0};
  for (const Spread& spread : {skewed, wide}) {
    EXPECT_NEAR(spread.quantile(0.05), spread.low, 1e-9 * spread.low);
    EXPECT_NEAR(spread.quantile(0.50), spread.mid, 1e-9 * spread.mid);
    EXPECT_NEAR(spread.quantile(0.95), spread.high, 1e-9 * spread.high);
  }
  EXPECT_EQ((Spread{Spread::Shape::chance, 0, 0.7, 1}.quantile(0.699)), 1.0);
  EXPECT_EQ((Spread{Spread::Shape::chance, 0, 0.7, 1}.quantile(0.701)), 0.0);
}

// sigma() is the slope at the median by the normal score: of a symmetric lognormal, mid times its sigma.
TEST(Spread, SigmaIsTheSlopeAtTheMedian) {
  const double s = 0.2;  // of ln x
  const Spread spread{Spread::Shape::lognormal, std::exp(-1.6448536 * s), 1.0, std::exp(1.6448536 * s)};
  EXPECT_NEAR(spread.sigma(), s, 1e-7);
  const Spread uniform{Spread::Shape::uniform, 0.0, 1.0, 2.0};
  const double h = 1e-4;  // of the score z; u = 1/2 + z phi(0)
  const double density = 0.39894228040143267;
  EXPECT_NEAR(uniform.sigma(),
              (uniform.quantile(0.5 + h * density) - uniform.quantile(0.5 - h * density)) / (2 * h), 1e-9);
}

TEST(SamplePoints, DoNotDependOnHowManyThereAre) {
  const Eigen::MatrixXd few = sample_points(50, 20, 7);
  const Eigen::MatrixXd many = sample_points(300, 20, 7);
  EXPECT_EQ(few, many.topRows(50));
  EXPECT_NE(few, sample_points(50, 20, 8));
  EXPECT_GT(many.minCoeff(), 0.0);
  EXPECT_LT(many.maxCoeff(), 1.0);
}

// A Sobol sequence, shifted or not, puts 2^k points into 2^k equal intervals of each coordinate almost one
// by one: the empirical distribution departs by at most 2/n; pseudorandom numbers depart by 0.5/sqrt(n).
TEST(SamplePoints, FillEachCoordinateEvenly) {
  constexpr int k_count = 256;
  const Eigen::MatrixXd points = sample_points(k_count, 60, 3);
  for (Eigen::Index d = 0; d < points.cols(); ++d) {
    Eigen::VectorXd column = points.col(d);
    std::sort(column.begin(), column.end());
    for (int k = 0; k < k_count; ++k)
      EXPECT_NEAR(column(k), (k + 0.5) / k_count, 2.0 / k_count) << d << ' ' << k;
  }
}

// More quantities than the tables of the sequence have dimensions, as in a large building.
TEST(SamplePoints, GoOnBeyondTheSequence) {
  const Eigen::MatrixXd points = sample_points(16, 3700, 1);
  EXPECT_EQ(points, sample_points(32, 3700, 1).topRows(16));
  EXPECT_NEAR(points.col(3690).mean(), 0.5, 0.3);  // four standard deviations of a mean of 16
}

TEST(Mixed, GivesEveryDrawItsOwnNumber) {
  std::set<std::uint64_t> seen;
  for (std::uint64_t seed = 0; seed < 10; ++seed)
    for (std::uint64_t draw = 0; draw < 100; ++draw)
      for (std::uint64_t stream = 0; stream < 10; ++stream) seen.insert(mixed(seed, draw, stream));
  EXPECT_EQ(seen.size(), 10000u);
}

TEST(Uncertain, NamesWhatTheModelLeavesOpen) {
  const Building building = building_of(one_circuit("20 m", "none") +
                                        "  spare: {wires: {a: THHN 12}, runs: [C1]}\n"
                                        "uncertainty: {may_vary: [L1.breaker]}\n");
  const Lowered lowered = lower_staged(building, {1, nullptr, true});
  const Uncertain all = uncertain(building, lowered, {{"THHN 12", "PVC"}});
  std::set<std::string> names;
  for (const Quantity& quantity : all.quantities) names.insert(quantity.name);
  for (const char* expected :
       {"voltage of T1", "length of C1", "clearance of C1", "wander length in C1",
        "permittivity of PVC of THHN 12", "insulation thickness of THHN 12", "resistance of dmm",
        "calibration of dmm", "a load on L1 that the model does not list", "state of L1.breaker"})
    EXPECT_EQ(names.count(expected), 1u) << expected;
}

// What the model says for certain is not drawn.
TEST(Uncertain, LeavesAloneWhatIsGiven) {
  const Building building = building_of(
      "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
      "runs: {C1: {from: LP, to: Room, length: 20 m, raceway: none, clearance: 80 mm}}\n"
      "circuits: {L1: {panel: LP, slot: 1, wires: {hot: THHN 12, neutral: THHN 12}, runs: [C1], loads: []}}\n"
      "uncertainty: {length: {spread: 0 %}}\n");
  const Lowered lowered = lower_staged(building, {1, nullptr, true});
  EXPECT_TRUE(lowered.unlisted_loads.empty());
  for (const Quantity& quantity : uncertain(building, lowered, {}).quantities) {
    EXPECT_NE(quantity.kind, Quantity::Kind::clearance);
    EXPECT_NE(quantity.kind, Quantity::Kind::length);
    EXPECT_NE(quantity.kind, Quantity::Kind::unlisted_load);
  }
}

}  // namespace
}  // namespace netlists
