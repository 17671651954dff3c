// What holds for any section: form, losses, an honest estimate of the error, and refusals.
#include <gtest/gtest.h>

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <numbers>
#include <random>
#include <stdexcept>
#include <string>
#include <vector>

#include "engine/capacitance.h"
#include "engine/constants.h"
#include "tests/engine/sample_sections.h"

namespace engine {
namespace {

using std::numbers::pi;

// The largest difference of two matrices, as the program counts it: |dC_ij| / sqrt(C_ii C_jj).
double off(const Eigen::MatrixXd& a, const Eigen::MatrixXd& b) {
  const Eigen::VectorXd size = b.diagonal().cwiseSqrt().cwiseInverse();
  return (size.asDiagonal() * (a - b) * size.asDiagonal()).cwiseAbs().maxCoeff();
}

// Small losses are first order in the loss tangents, so they are the derivative of the capacitance by each
// permittivity, which lossless sections tell. Once the potentials inside a lossy wall were taken for
// Hermitian, and the loss between the cores of a cable came out 4 % wrong.
TEST(FieldMatrices, LossIsTheDerivativeByPermittivity) {
  CrossSection section = over_plane(1e-9);
  section.bodies = {{{0, 13e-3}, 8e-3, 9.5e-3, {3.3, 0}, {}},
                    {{14.2e-3, 9e-3}, 3.5e-3, 4.3e-3, {4.5, 0}, {5.5, 0}}};
  section.conductors = {wire(5e-3, 10.5e-3, 1.02e-3, {{1.65e-3, {4.5, 0}}}), wire(-1e-3, 8.3e-3, 1.02e-3),
                        wire(12.6e-3, 9e-3, 0.8e-3, {{1.4e-3, {2.4, 0}}}), wire(15.8e-3, 9.4e-3, 0.8e-3)};
  const auto materials = [](CrossSection& s) {
    return std::vector<Dielectric*>{&s.bodies[0].wall, &s.bodies[1].wall, &s.bodies[1].filler,
                                    &s.conductors[0].layers[0].dielectric,
                                    &s.conductors[2].layers[0].dielectric};
  };
  CrossSection lossy = section;
  Eigen::MatrixXd expected = Eigen::MatrixXd::Zero(4, 4);
  for (size_t k = 0; k < 5; ++k) {
    const double tangent = 1e-4 * static_cast<double>(k + 1), step = 1e-3;
    materials(lossy)[k]->loss_tangent = tangent;
    CrossSection more = section, less = section;
    materials(more)[k]->permittivity *= 1 + step;
    materials(less)[k]->permittivity *= 1 - step;
    expected += tangent * (field_matrices(more).capacitance - field_matrices(less).capacitance) / (2 * step);
  }
  const FieldMatrices result = field_matrices(lossy);
  const double size = expected.diagonal().maxCoeff();
  EXPECT_LT((result.loss_capacitance - expected).cwiseAbs().maxCoeff(), 1e-5 * size);  // step^2 and more
}

// Wires thrown at random into a circle, none overlapping, some with insulation; a fixed seed.
std::vector<RoundConductor> random_wires(std::mt19937& random, double room, int count) {
  std::uniform_real_distribution<double> unit(0, 1);
  std::vector<RoundConductor> wires;
  while (static_cast<int>(wires.size()) < count) {
    const double radius = (0.4 + unit(random)) * 1e-3,
                 coat = unit(random) < 0.3 ? 0 : 0.7e-3 * unit(random) + 0.1e-3;
    const double away = (room - radius - coat) * std::sqrt(unit(random)), angle = 2 * pi * unit(random);
    RoundConductor next = wire(away * std::cos(angle), away * std::sin(angle), radius);
    if (coat > 0) next.layers = {{radius + coat, {1 + 7 * unit(random), 0.1 * unit(random)}}};
    const bool fits = std::all_of(wires.begin(), wires.end(), [&](const RoundConductor& other) {
      return (other.centre - next.centre).norm() > other.outer_radius() + next.outer_radius() + 0.02e-3;
    });
    if (fits && away + next.outer_radius() < room - 0.02e-3) wires.push_back(next);
  }
  return wires;
}

// In turn: a metal tube, a plastic tube over a plane, a cable in the open, a shell over a plane, all with
// wires beside them where there is room.
CrossSection random_section(std::mt19937& random, int trial) {
  constexpr double room = 9e-3;
  CrossSection section;
  section.conductors = random_wires(random, room, 3 + trial % 4);
  const Eigen::Vector2d up(0, 15e-3);
  if (trial % 4 == 0) {
    section.surroundings = Surroundings::metal_tube;
    section.tube_inner_radius = room;
    section.tube_outer_radius = room + 1e-3;
    return section;
  }
  for (RoundConductor& conductor : section.conductors) conductor.centre += up;
  section.conductors.push_back(wire(18e-3, 15e-3, 1e-3, {{1.6e-3, {4, 0.1}}}));
  section.conductors.push_back(wire(-18e-3, 9e-3, 1e-3));
  section.surroundings = trial % 4 == 2 ? Surroundings::open : Surroundings::plane;
  section.reference = static_cast<int>(section.conductors.size()) - 1;
  if (trial % 4 == 1) section.bodies = {{up, room, room + 2e-3, {3.3, 0.02}, {}}};
  if (trial % 4 == 2) section.bodies = {{up, room, room + 1e-3, {4.5, 0.08}, {3, 0.05}}};
  if (trial % 4 == 3) {
    Shell shell;
    shell.centre = up;
    shell.inner_radius = room;
    shell.outer_radius = room + 1e-3;
    shell.layers = {{room + 2e-3, {4, 0.05}}};
    section.shells = {shell};
  }
  return section;
}

// The header's promises, on any section: exact in symmetry and sign, whatever rounding did.
TEST(FieldMatrices, KeepsItsFormOnRandomSections) {
  std::mt19937 random(1);
  for (int trial = 0; trial < 40; ++trial) {
    SCOPED_TRACE(trial);
    const CrossSection section = random_section(random, trial);
    const FieldMatrices result = field_matrices(section);
    const Eigen::MatrixXd& c = result.capacitance;
    ASSERT_EQ(c.rows(), section.row_count());
    EXPECT_EQ(c, c.transpose());
    EXPECT_GT(c.diagonal().minCoeff(), 0.0);
    EXPECT_LE((c - Eigen::MatrixXd(c.diagonal().asDiagonal())).maxCoeff(), 0.0);
    EXPECT_GE(c.rowwise().sum().minCoeff(), 0.0);
    EXPECT_GT(c.selfadjointView<Eigen::Lower>().eigenvalues().minCoeff(), 0.0);
    EXPECT_EQ(result.loss_capacitance, result.loss_capacitance.transpose());
    EXPECT_GT(result.loss_capacitance.selfadjointView<Eigen::Lower>().eigenvalues().minCoeff(),
              -1e-15 * c.trace());
    EXPECT_EQ(result.external_inductance, result.external_inductance.transpose());
    EXPECT_GT(result.external_inductance.selfadjointView<Eigen::Lower>().eigenvalues().minCoeff(), 0.0);
    EXPECT_LE(result.estimated_relative_error, section.tolerance);
  }
}

// Dielectrics only raise a section's energy at given voltages: C is never less than without them, as
// forms. L is of the bare metal, so C L >= mu0 e0, with equality where nothing is insulated.
TEST(FieldMatrices, InsulationRaisesCapacitance) {
  std::mt19937 random(2);
  for (int trial = 0; trial < 12; ++trial) {
    CrossSection section = random_section(random, trial);
    section.tolerance = 1e-7;
    const FieldMatrices coated = field_matrices(section);
    for (RoundConductor& conductor : section.conductors) conductor.layers.clear();
    for (Shell& shell : section.shells) shell.layers.clear();
    section.bodies.clear();
    const FieldMatrices naked = field_matrices(section);
    const Eigen::MatrixXd more = coated.capacitance - naked.capacitance;
    EXPECT_GT(more.selfadjointView<Eigen::Lower>().eigenvalues().minCoeff(),
              -1e-7 * naked.capacitance.trace());
    const Eigen::MatrixXd product = naked.capacitance * coated.external_inductance / (k_mu_0 * k_epsilon_0);
    EXPECT_LT((product - Eigen::MatrixXd::Identity(product.rows(), product.cols())).cwiseAbs().maxCoeff(),
              1e-6);
  }
}

// Hard sections at the default tolerance against a thousand times tighter: the estimate is no less than
// what they differ by, and within the tolerance.
TEST(FieldMatrices, EstimateIsHonestOnHardSections) {
  const double r = 1.0e-3, b = 1.6e-3;
  const auto coat = [&](double permittivity) { return std::vector<Layer>{{b, {permittivity, 0.05}}}; };
  std::vector<CrossSection> hard;
  CrossSection section =
      in_tube(10e-3, 1e-4);  // exact contact of permittivity 8, with each other and the wall
  const double y = -std::sqrt((10e-3 - b) * (10e-3 - b) - b * b);
  section.conductors = {wire(-b, y, r, coat(8)), wire(b, y, r, coat(8)),
                        wire(0, y + std::sqrt(3.0) * b, r, coat(8))};
  hard.push_back(section);
  for (RoundConductor& conductor : section.conductors) conductor.layers = coat(2.3);
  hard.push_back(section);
  section.conductors = {wire(0, 0, r, coat(8)), wire(r + b, 0, r),
                        wire(0, -b - 0.9e-3, 0.5e-3, {{0.9e-3, {3.6, 0}}})};
  hard.push_back(section);  // bare metal in contact with insulation, and unequal sizes
  section.conductors = {wire(0, 0, r), wire(2.002e-3, 0, r)};
  hard.push_back(section);     // bare metal 2 um apart
  section = over_plane(1e-4);  // everything in contact: wires in a plastic tube that lies on the plane
  section.bodies = {{{0, 10e-3}, 8e-3, 10e-3, {3.3, 0.02}, {}}};
  section.conductors = {wire(0, 2e-3 + b, r, coat(4.5)), wire(11.5e-3, b, r, coat(8))};
  hard.push_back(section);
  section.bodies = {{{0, 4e-3}, 3.2e-3, 4e-3, {4.5, 0.08}, {5, 0.1}},
                    {{8e-3, 4e-3}, 3.2e-3, 4e-3, {4.5, 0.08}, {5, 0.1}}};
  section.conductors = {wire(b, 4e-3, r, coat(2.4)), wire(-b, 4e-3, r, coat(2.4)),
                        wire(8e-3 - b, 4e-3, r, coat(2.4))};
  hard.push_back(section);  // two filled cables that touch each other and the plane
  for (size_t i = 0; i < hard.size(); ++i) {
    SCOPED_TRACE(i);
    const FieldMatrices coarse = field_matrices(hard[i]);
    hard[i].tolerance = 1e-7;
    const FieldMatrices fine = field_matrices(hard[i]);
    EXPECT_LE(off(coarse.capacitance, fine.capacitance), coarse.estimated_relative_error);
    EXPECT_LE(coarse.estimated_relative_error, 1e-4);
    EXPECT_LE(fine.estimated_relative_error, 1e-7);
  }
}

// Metal 10 nm from metal is beyond the bounded work: the result comes all the same, and the estimate
// admits at least the error that the closed form shows.
TEST(FieldMatrices, EstimateAdmitsWhatIsOutOfReach) {
  CrossSection section = in_open(0, 1e-4);
  section.conductors = {wire(0, 0, 1e-3), wire(2.00001e-3, 0, 1e-3)};
  const FieldMatrices result = field_matrices(section);
  const double expected = pi * k_epsilon_0 / std::acosh(1.000005);
  EXPECT_GT(result.estimated_relative_error, 1e-4);
  EXPECT_LE(std::abs(result.capacitance(0, 0) / expected - 1), result.estimated_relative_error);
}

// Nothing inside, nothing to say: matrices without rows.
TEST(FieldMatrices, EmptySectionsHaveNoRows) {
  EXPECT_EQ(field_matrices(in_tube(5e-3, 1e-4)).capacitance.size(), 0);
  CrossSection section = in_open(0, 1e-4);
  section.conductors = {wire(0, 0, 1e-3)};
  EXPECT_EQ(field_matrices(section).external_inductance.size(), 0);
}

std::string refusal(const CrossSection& section) {
  try {
    field_matrices(section);
  } catch (const std::invalid_argument& error) {
    return error.what();
  }
  return "accepted";
}

TEST(FieldMatrices, RefusesByMessage) {
  CrossSection section = over_plane(1e-4);
  const std::vector<Layer> coat = {{1.6e-3, {4, 0}}};
  section.conductors = {wire(0, 5e-3, 1e-3, coat), wire(3e-3, 5e-3, 1e-3, coat)};
  EXPECT_EQ(refusal(section), "conductors 0 and 1 overlap by 0.2 mm");
  section.conductors[1].centre.x() = 3.2e-3 - 0.9e-9;  // contact to the last digit but one
  EXPECT_EQ(refusal(section), "accepted");
  section.conductors = {wire(0, 5e-3, 1e-3), wire(2e-3, 5e-3, 1e-3)};
  EXPECT_EQ(refusal(section), "the metal of conductors 0 and 1 touches");
  section.conductors = {wire(0, 1e-3, 1e-3)};
  EXPECT_EQ(refusal(section), "the metal of conductor 0 touches the plane");
  section.conductors = {wire(0, 0.5e-3, 1e-3)};
  EXPECT_EQ(refusal(section), "conductor 0 reaches under the plane by 0.5 mm");
  section.conductors = {wire(0, 5e-3, 1e-3, {{0.9e-3, {4, 0}}})};
  EXPECT_EQ(refusal(section), "layer 0 of conductor 0 does not grow: outer radius 0.9 mm, it begins at 1 mm");
  section.conductors = {wire(0, 5e-3, 1e-3, {{1.6e-3, {0.5, 0}}})};
  EXPECT_EQ(refusal(section), "the permittivity of layer 0 of conductor 0 is 0.5; it must be 1 or more");
  section.conductors = {wire(0, 5e-3, -1e-3)};
  EXPECT_EQ(refusal(section), "the radius of conductor 0 is -1 mm; it must be positive and finite");
  section.conductors = {wire(std::nan(""), 5e-3, 1e-3)};
  EXPECT_EQ(refusal(section), "the centre of conductor 0 is not finite");
  section.conductors = {wire(3.5e-3, 10e-3, 1e-3)};
  section.bodies = {{{0, 10e-3}, 4e-3, 5e-3, {3, 0}, {}}};
  EXPECT_EQ(refusal(section), "conductor 0 crosses the inner wall of body 0 by 0.5 mm");
  section.bodies = {{{0, 10e-3}, 5e-3, 4e-3, {3, 0}, {}}};
  EXPECT_EQ(refusal(section), "the wall of body 0 is inside out: inner radius 5 mm, outer radius 4 mm");
  section.bodies.clear();
  Shell shell;
  shell.centre = {0, 10e-3};
  shell.inner_radius = 4.5e-3;
  shell.outer_radius = 5e-3;
  section.shells = {shell};
  EXPECT_EQ(refusal(section), "the metal of conductor 0 touches the inside of shell 0");
  section = in_tube(5e-3, 1e-4);
  section.conductors = {wire(4.5e-3, 0, 1e-3)};
  EXPECT_EQ(refusal(section), "conductor 0 sticks out of the tube by 0.5 mm");
  section = in_open(1, 1e-4);
  section.conductors = {wire(0, 0, 1e-3)};
  EXPECT_EQ(refusal(section),
            "an open section needs one of its conductors as the reference; found number 1 of 1");
  section = in_open(0, 0.0);
  section.conductors = {wire(0, 0, 1e-3)};
  EXPECT_EQ(refusal(section), "the tolerance is 0; it must be positive and finite");
}

}  // namespace
}  // namespace engine
