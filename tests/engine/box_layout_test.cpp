#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <random>
#include <vector>

#include "engine/capacitance.h"
#include "engine/layout.h"
#include "tests/engine/sample_sections.h"

namespace engine {
namespace {

using Eigen::MatrixXd;
using Eigen::Vector2d;

const Vector2d k_box(50e-3, 50e-3);  // m, half of a 4 in wireway's inside or so

std::vector<double> mixed(int count) {
  std::vector<double> radii;
  for (int i = 0; i < count; ++i) radii.push_back(i % 3 == 0 ? 4.5e-3 : 1.65e-3 + 0.1e-3 * (i % 5));
  return radii;
}

// Two contacts carry a thing if straight up lies between the directions in which they push it.
bool rests(const std::vector<double>& radii, const std::vector<Vector2d>& centres, size_t i) {
  constexpr double k_near = 1e-6 + 1e-9;  // m
  if (centres[i].y() - radii[i] + k_box.y() < k_near) return true;
  std::vector<Vector2d> from_left, from_right;
  if (centres[i].x() - radii[i] + k_box.x() < k_near) from_left.emplace_back(1, 0);
  if (k_box.x() - centres[i].x() - radii[i] < k_near) from_right.emplace_back(-1, 0);
  for (size_t j = 0; j < radii.size(); ++j) {
    const Vector2d push = centres[i] - centres[j];
    if (j == i || push.norm() - radii[i] - radii[j] > k_near) continue;
    (push.x() > 0.0 ? from_left : from_right).push_back(push);
  }
  for (const Vector2d& l : from_left)
    for (const Vector2d& r : from_right)
      if (l.x() * r.y() - l.y() * r.x() > 0.0) return true;
  return false;
}

TEST(RestingLayout, InAWirewayNothingOverlapsAndEverythingRests) {
  std::mt19937_64 random(3);
  // A fifth of the area is the most that NEC 376.22 allows in a wireway; twice that fits too.
  for (const int count : {1, 5, 30, 150}) {
    const std::vector<double> radii = mixed(count);
    const auto centres = resting_layout(radii, k_box, random);
    for (size_t i = 0; i < radii.size(); ++i) {
      EXPECT_LE(std::abs(centres[i].x()) + radii[i], k_box.x() - 0.99e-6);
      EXPECT_LE(std::abs(centres[i].y()) + radii[i], k_box.y() - 0.99e-6);
      for (size_t j = 0; j < i; ++j)
        EXPECT_GE((centres[i] - centres[j]).norm() - radii[i] - radii[j], 0.99e-6) << i << " and " << j;
      EXPECT_TRUE(rests(radii, centres, i)) << i << " of " << count;
    }
  }
}

TEST(RestingLayout, InAWirewayTheSeedDecides) {
  const std::vector<double> radii = mixed(20);
  std::mt19937_64 a(5), b(5), c(6);
  EXPECT_EQ(resting_layout(radii, k_box, a), resting_layout(radii, k_box, b));
  EXPECT_NE(resting_layout(radii, k_box, a), resting_layout(radii, k_box, c));
}

TEST(RestingLayout, AWirewayTooFullIsRefused) {
  std::mt19937_64 random(1);
  EXPECT_THROW(resting_layout(std::vector<double>(1, 51e-3), k_box, random), std::invalid_argument);
  EXPECT_THROW(resting_layout(std::vector<double>(500, 4e-3), k_box, random), std::invalid_argument);
}

// Alone on the floor any place is as likely as another: the mean of x is 0 and that of x^2 a third of the
// square of the farthest place, each within four standard errors.
TEST(RestingLayout, OneWireLiesAnywhereOnTheFloor) {
  std::mt19937_64 random(8);
  const double radius = 2e-3, most = k_box.x() - radius, n = 20000;
  double sum = 0.0, squares = 0.0;
  for (int i = 0; i < n; ++i) {
    const double x = resting_layout(std::vector<double>{radius}, k_box, random)[0].x() / most;
    sum += x;
    squares += x * x;
  }
  EXPECT_NEAR(sum / n, 0.0, 4 * std::sqrt(1.0 / 3 / n));
  EXPECT_NEAR(squares / n, 1.0 / 3, 4 * std::sqrt(4.0 / 45 / n));
}

struct Means {
  MatrixXd mean, error;  // F/m, of the mean
};

Means mean_capacitance(std::mt19937_64& random, int draws) {
  const std::vector<double> radii = {1.65e-3, 1.65e-3, 2.2e-3};
  std::vector<MatrixXd> all;
  MatrixXd mean = MatrixXd::Zero(3, 3), square = mean;
  for (int i = 0; i < draws; ++i) {
    CrossSection section;
    section.surroundings = Surroundings::metal_tube;
    section.tube_core.half_size = {25e-3, 25e-3};
    section.tube_outer_radius = 1.5e-3;
    section.tolerance = 1e-2;
    const auto centres = resting_layout(radii, section.tube_core.half_size, random);
    for (size_t k = 0; k < radii.size(); ++k)
      section.conductors.push_back(
          wire(centres[k].x(), centres[k].y(), radii[k] - 0.6e-3, {{radii[k], {4.0, 0.0}}}));
    const MatrixXd c = field_matrices(section, Inductance::without).capacitance;
    mean += c / draws;
    square += c.cwiseProduct(c) / draws;
  }
  return {mean, ((square - mean.cwiseProduct(mean)) / (draws - 1)).cwiseMax(0.0).cwiseSqrt()};
}

// Two halves of the draws have the same mean, as their own scatter says; the matrices vary.
TEST(RestingLayout, TwoHalvesOfTheDrawsAgreeInAWireway) {
  std::mt19937_64 random(11);
  const Means a = mean_capacitance(random, 60), b = mean_capacitance(random, 60);
  for (int i = 0; i < 3; ++i)
    for (int j = 0; j < 3; ++j) {
      const double error = std::hypot(a.error(i, j), b.error(i, j));
      EXPECT_GT(error, 0.001 * std::abs(a.mean(i, j)));
      EXPECT_LT(std::abs(a.mean(i, j) - b.mean(i, j)), 3.5 * error);
    }
}

}  // namespace
}  // namespace engine
