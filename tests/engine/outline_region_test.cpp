#include "engine/outline_region.h"

#include <gtest/gtest.h>

#include <Eigen/LU>
#include <cmath>
#include <numbers>
#include <vector>

#include "engine/capacitance.h"
#include "engine/constants.h"
#include "engine/flat_region.h"
#include "engine/harmonics.h"
#include "tests/engine/sample_sections.h"

namespace engine {
namespace {

using Eigen::MatrixXcd;
using Eigen::MatrixXd;

/// max |dC_ij| / sqrt(C_ii C_jj)
double off(const MatrixXd& c, const MatrixXd& truth) {
  const Eigen::VectorXd size = truth.diagonal().cwiseSqrt().cwiseInverse();
  return (size.asDiagonal() * (c - truth) * size.asDiagonal()).cwiseAbs().maxCoeff();
}

MatrixXcd capacitance_of(const OutlineRegion& region) {
  return potential_coefficients(region, 1.0).potentials.inverse() * (2 * std::numbers::pi * k_epsilon_0);
}

// A round section with no harmonics at all: each metal and each layer a chain of panels.
OutlineRegion by_panels_alone(const CrossSection& section) {
  const SectionTree tree(section);
  OutlineRegion region = flat_region(tree, k_surroundings).region;
  for (const CoveredCircle& c : region.circles) {
    std::vector<std::complex<double>> media;
    for (const Layer& layer : c.layers) media.push_back(complex_permittivity(layer.dielectric));
    media.push_back(c.medium);
    region.surfaces.push_back({Surface::Kind::conductor, {c.centre, {}, c.metal_radius}, 1.0, media[0]});
    for (size_t k = 0; k < c.layers.size(); ++k)
      region.surfaces.push_back(
          {Surface::Kind::dielectric, {c.centre, {}, c.layers[k].outer_radius}, media[k], media[k + 1]});
  }
  region.circles.clear();
  return region;
}

void expect_alike_by_both_methods(CrossSection section) {
  section.tolerance = 1e-10;
  const FieldMatrices harmonics = field_matrices(section, Inductance::without);
  section.tolerance = 1e-8;
  const MatrixXcd panels = capacitance_of(by_panels_alone(section));
  EXPECT_LT(off(panels.real(), harmonics.capacitance), 1e-8);
  EXPECT_LT(off(harmonics.capacitance - panels.imag() - harmonics.loss_capacitance, harmonics.capacitance),
            1e-8);
}

TEST(OutlineRegion, PanelsAgreeWithHarmonicsInATube) {
  CrossSection section = in_tube(10e-3, 1e-8);
  section.conductors = {wire(-3e-3, -2e-3, 1e-3, {{1.6e-3, {4, 0.05}}, {1.8e-3, {3, 0.01}}}),
                        wire(2e-3, 1e-3, 1.2e-3)};
  section.bodies = {{{2e-3, 1e-3}, 2e-3, 3e-3, {3, 0.02}, {2, 0}}};
  expect_alike_by_both_methods(section);
}

// Insulation touches insulation, both touch the jacket around them, which touches another one; both lie on
// the plane. Panels have no harmonics to run short of there, and no order to lose.
TEST(OutlineRegion, PanelsAgreeWithHarmonicsWhereAllTouches) {
  CrossSection section = over_plane(1e-8);
  section.conductors = {wire(-2e-3, 4.8e-3, 1e-3, {{2e-3, {4, 0}}}),
                        wire(2e-3, 4.8e-3, 1.2e-3, {{2e-3, {4, 0}}}), wire(9.6e-3, 4.8e-3, 1.2e-3)};
  section.bodies = {{{0, 4.8e-3}, 4e-3, 4.8e-3, {4.5, 0}, {1, 0}},
                    {{9.6e-3, 4.8e-3}, 4e-3, 4.8e-3, {4.5, 0}, {1, 0}}};
  expect_alike_by_both_methods(section);
}

// The potential of a charge in a rectangle, by separation of variables (W. R. Smythe, Static and Dynamic
// Electricity, 1950, chapter IV), in units of 1 / (2 pi epsilon_0); corner at the origin.
double in_rectangle(double width, double height, Eigen::Vector2d x, Eigen::Vector2d y) {
  if (x.y() > y.y()) std::swap(x, y);
  double sum = 0.0;
  for (int n = 1; n < 60000; ++n) {
    const double k = n * std::numbers::pi / width;
    // sinh(k x) sinh(k (h - y)) / sinh(k h) without overflow
    const double decay = std::exp(-k * (y.y() - x.y())) * -std::expm1(-2 * k * x.y()) *
                         -std::expm1(-2 * k * (height - y.y())) / -std::expm1(-2 * k * height) / 2;
    sum += std::sin(k * x.x()) * std::sin(k * y.x()) * decay / k;
  }
  return 2 * std::numbers::pi * 2 / width * sum;
}

// A thin wire is a line charge; that its own potential is the mean over its rim holds to the fourth power of
// the radius with four points.
TEST(FieldMatrices, WiresInAWirewayMatchSeparationOfVariables) {
  const double w = 100e-3, h = 60e-3, r = 0.02e-3;
  const std::vector<Eigen::Vector2d> places = {{30e-3, 20e-3}, {70e-3, 45e-3}};  // from the corner
  CrossSection section;
  section.surroundings = Surroundings::metal_tube;
  section.tube_core.half_size = {w / 2, h / 2};
  section.tube_outer_radius = 1.5e-3;
  section.tolerance = 1e-8;
  MatrixXd p(2, 2);
  for (int i = 0; i < 2; ++i) {
    const Eigen::Vector2d z = places[static_cast<size_t>(i)];
    section.conductors.push_back(wire(z.x() - w / 2, z.y() - h / 2, r));
    p(i, i) = (in_rectangle(w, h, z + Eigen::Vector2d(0, r), z) +
               in_rectangle(w, h, z - Eigen::Vector2d(0, r), z)) /
              2;
  }
  // The field's curvature at the wire adds what two points, above and below, leave; two lie beside.
  for (int i = 0; i < 2; ++i) {
    const Eigen::Vector2d z = places[static_cast<size_t>(i)];
    const double beside = (in_rectangle(h, w, {z.y(), z.x() + r}, {z.y(), z.x()}) +
                           in_rectangle(h, w, {z.y(), z.x() - r}, {z.y(), z.x()})) /
                          2;
    p(i, i) = (p(i, i) + beside) / 2;
  }
  p(0, 1) = p(1, 0) = in_rectangle(w, h, places[0], places[1]);
  const MatrixXd truth = p.inverse() * (2 * std::numbers::pi * k_epsilon_0);
  EXPECT_LT(off(field_matrices(section).capacitance, truth),
            1e-6);  // (r / distance)^2 is left out
}

// The logarithmic capacity of a square is Gamma(1/4)^2 / (4 pi^(3/2)) = 0.590170 of its side (G. Polya and
// G. Szego, Isoperimetric Inequalities in Mathematical Physics, 1951).
TEST(OutlineRegion, ASquareConductorHasTheCapacityOfASquare) {
  OutlineRegion region;
  region.radius = 1.0;  // where the logarithm is zero
  region.tolerance = 1e-6;
  const double side = 0.1, rounding = 1e-6;
  region.surfaces = {{Surface::Kind::conductor,
                      {{0.3, -0.2}, {{side / 2 - rounding, side / 2 - rounding}, 0.4}, rounding},
                      1.0,
                      1.0}};
  const double capacity = std::pow(std::tgamma(0.25), 2) / (4 * std::pow(std::numbers::pi, 1.5)) * side;
  EXPECT_NEAR(potential_coefficients(region, 1.0).potentials(0, 0).real(), -std::log(capacity), 1e-6);
}

// A flat two-core cable with a bare wire in the middle, solid or with a filler.
CrossSection flat_cable(CrossSection section, double height, const Dielectric& filler, double turn = 0.0) {
  const Eigen::Vector2d along(std::cos(turn), std::sin(turn));
  const std::vector<Layer> pvc = {{1.65e-3, {4.5, 0.08}}};
  for (const double x : {-2.8e-3, 2.8e-3})
    section.conductors.push_back(wire(x * along.x(), height + x * along.y(), 1.02e-3, pvc));
  section.conductors.push_back(wire(0.0, height, 0.8e-3));
  Body jacket{{0.0, height}, 1.7e-3, 2.4e-3, {4.5, 0.08}, filler};
  jacket.core = {{2.8e-3, 0.0}, turn};
  section.bodies.push_back(jacket);
  return section;
}

TEST(FieldMatrices, AFlatCableTurnsWithoutChange) {
  const FieldMatrices lying = field_matrices(flat_cable(in_open(2, 1e-6), 0.0, {2.0, 0.01}));
  const FieldMatrices turned = field_matrices(flat_cable(in_open(2, 1e-6), 0.0, {2.0, 0.01}, 0.7));
  EXPECT_LT(off(turned.capacitance, lying.capacitance), 1e-10);
}

// The estimate is never under a third of the error, told from a solution far beyond.
TEST(FieldMatrices, ItsErrorEstimateIsHonestWithOutlines) {
  CrossSection in_wireway;
  in_wireway.surroundings = Surroundings::metal_tube;
  in_wireway.tube_core.half_size = {25e-3, 40e-3};
  in_wireway.tube_outer_radius = 1.5e-3;
  in_wireway = flat_cable(in_wireway, -40e-3 + 2.4e-3, {1.0, 0.0});  // on the floor
  in_wireway.conductors.push_back(wire(25e-3 - 1.65e-3, -30e-3, 1.02e-3, {{1.65e-3, {4.5, 0.08}}}));
  for (CrossSection section :
       {flat_cable(in_open(2, 1.0), 0.0, {2.0, 0.01}), flat_cable(over_plane(1.0), 2.4e-3, {2.0, 0.01}),
        flat_cable(over_plane(1.0), 6e-3, {4.5, 0.08}, 1.2),
        flat_cable(in_tube(8e-3, 1.0), 0.0, {1.0, 0.0}, 0.3), in_wireway}) {
    section.tolerance = 1e-6;
    const MatrixXd truth = field_matrices(section, Inductance::without).capacitance;
    for (const double tolerance : {1e-3, 1e-4}) {
      section.tolerance = tolerance;
      const FieldMatrices matrices = field_matrices(section, Inductance::without);
      const double error = off(matrices.capacitance, truth);
      EXPECT_LE(matrices.estimated_relative_error, tolerance);
      EXPECT_GT(3 * matrices.estimated_relative_error, error);
    }
  }
}

// What lies in a wireway that is a conductor itself couples to nothing outside, and the wireway's outside is
// that of the same bar of metal.
TEST(FieldMatrices, AWirewayAsAConductorShieldsAndStands) {
  CrossSection section = over_plane(1e-6);
  Shell wireway;
  wireway.centre = {0.0, 100e-3};
  wireway.core.half_size = {30e-3, 30e-3};
  wireway.outer_radius = 1.5e-3;
  section.conductors = {wire(5e-3, 90e-3, 1e-3), wire(80e-3, 100e-3, 1e-3)};
  section.shells = {wireway};
  const FieldMatrices matrices = field_matrices(section);
  EXPECT_EQ(matrices.capacitance(0, 1), 0.0);
  EXPECT_NEAR(matrices.capacitance.row(0).sum(), 0.0, 1e-9 * matrices.capacitance(0, 0));
  section.conductors.erase(section.conductors.begin());
  const FieldMatrices empty = field_matrices(section);
  EXPECT_NEAR(matrices.capacitance(1, 2), empty.capacitance(0, 1), 1e-6 * empty.capacitance(0, 0));
}

TEST(FieldMatrices, ASectionTooLargeForItsOutlinesIsRefused) {
  CrossSection section = over_plane(1e-8);
  for (int k = 0; k < 300; ++k) {
    CrossSection one = flat_cable(over_plane(1e-8), 0.1, {2.0, 0.0});
    for (RoundConductor& c : one.conductors) c.centre.x() += 20e-3 * k;
    one.bodies[0].centre.x() += 20e-3 * k;
    section.conductors.insert(section.conductors.end(), one.conductors.begin(), one.conductors.end());
    section.bodies.push_back(one.bodies[0]);
  }
  EXPECT_THROW(field_matrices(section), std::length_error);
}

}  // namespace
}  // namespace engine
