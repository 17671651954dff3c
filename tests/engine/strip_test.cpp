#include "engine/strip.h"

#include <gtest/gtest.h>

#include <Eigen/LU>
#include <cmath>
#include <numbers>
#include <stdexcept>

#include "engine/constants.h"

namespace engine {
namespace {

using std::numbers::pi;

// An independent solution: the strip cut into line charges that crowd at its edges, their images in
// the plane, potentials averaged by the exact integral over each piece (method of moments, Harrington).
double strip_by_moments(double width, double height, int pieces) {
  Eigen::VectorXd edge(pieces + 1);
  for (int i = 0; i <= pieces; ++i) edge(i) = -width / 2 * std::cos(pi * i / pieces);
  Eigen::MatrixXd potential(pieces, pieces);  // of a unit of charge on piece j, at the middle of piece i
  for (int i = 0; i < pieces; ++i) {
    const double x = (edge(i) + edge(i + 1)) / 2;
    for (int j = 0; j < pieces; ++j) {
      const double w = edge(j + 1) - edge(j);
      const double offset = x - (edge(j) + edge(j + 1)) / 2;
      potential(i, j) =
          (mean_log_distance_to_strip(w, offset, 2 * height) - mean_log_distance_to_strip(w, offset, 0)) /
          (2 * pi * k_epsilon_0);
    }
  }
  return potential.partialPivLu().solve(Eigen::VectorXd::Ones(pieces)).sum();
}

TEST(StripCapacitance, AgreesWithTheMethodOfMoments) {
  for (const double ratio : {0.2, 1.0, 3.0, 6.0, 20.0}) {
    const double expected = strip_by_moments(ratio * 50e-3, 50e-3, 200);
    EXPECT_NEAR(strip_capacitance(ratio * 50e-3, 50e-3), expected, 1e-3 * expected) << ratio;
  }
}

// A strip far narrower than its height is a wire of a quarter of its width (textbook equivalence).
TEST(StripCapacitance, ApproachesTheThinWire) {
  const double expected = 2 * pi * k_epsilon_0 / std::acosh(1.0 / (1e-3 / 4));
  EXPECT_NEAR(strip_capacitance(1e-3, 1.0), expected, 1e-3 * expected);
}

TEST(StripCapacitance, RefusesNoWidth) { EXPECT_THROW(strip_capacitance(0, 1), std::invalid_argument); }

// The mean of ln over many points of the strip: the integral done numerically.
TEST(MeanLogDistance, IsTheMeanOverTheStrip) {
  const double width = 0.3, x = 0.07, y = 0.004;
  const int points = 300000;
  double sum = 0;
  for (int i = 0; i < points; ++i) {
    const double s = width * ((i + 0.5) / points - 0.5);
    sum += std::log(std::hypot(x - s, y));
  }
  EXPECT_NEAR(mean_log_distance_to_strip(width, x, y), sum / points, 1e-6);
}

// Grover: the geometric mean distance of a line of length w from itself is w exp(-3/2), which is the
// strip's 0.2235 (w + t) without thickness.
TEST(MeanLogDistance, GivesGroversSelfDistance) {
  const double width = 0.3;
  const int points = 20000;
  double sum = 0;
  for (int i = 0; i < points; ++i)
    sum += mean_log_distance_to_strip(width, width * ((i + 0.5) / points - 0.5), 0);
  EXPECT_NEAR(sum / points, std::log(width) - 1.5, 1e-4);
}

TEST(AddStripRow, CountsFromEarthAndKeepsMaxwellForm) {
  CrossSection section;
  section.surroundings = Surroundings::plane;
  RoundConductor wire;
  wire.centre = {0.02, 0.01};
  wire.radius = 1e-3;
  section.conductors.push_back(wire);
  const Strip strip{0.3, 1.5e-3, 50e-3, 2 * 0.05 * 1.5e-3, Metal{6e6, 1, 0.004}};
  Eigen::MatrixXcd z(1, 1);
  z(0, 0) = {5e-3, 1e-3};
  Eigen::MatrixXd c(1, 1), g(1, 1);
  c(0, 0) = 40e-12;
  g(0, 0) = 1e-12;
  add_strip_row(section, strip, {60, 20, 100}, z, c, g);
  ASSERT_EQ(c.rows(), 2);
  EXPECT_DOUBLE_EQ(c(0, 1), -40e-12);
  EXPECT_DOUBLE_EQ(c(1, 0), c(0, 1));
  EXPECT_NEAR(c.row(0).sum(), 0.0, 1e-25);  // the wire sees the strip only
  EXPECT_NEAR(c.row(1).sum(), strip_capacitance(0.3, 50e-3), 1e-25);
  EXPECT_NEAR(g.sum(), 0.0, 1e-25);
  EXPECT_NEAR(z(1, 1).real() - z(0, 1).real(), 1 / (6e6 * strip.metal_area),
              1e-9);  // the earth's share is common
  EXPECT_GT(z(1, 1).imag(), z(0, 1).imag() * 0.9);
}

}  // namespace
}  // namespace engine
