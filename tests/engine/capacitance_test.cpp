// Capacitance and external inductance of sections against closed forms, a textbook's tables and laws.
#include "engine/capacitance.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>
#include <vector>

#include "engine/constants.h"
#include "tests/engine/sample_sections.h"

namespace engine {
namespace {

using std::numbers::pi;

constexpr double k_2_pi_e0 = 2 * pi * k_epsilon_0;

// Two bare wires: C = 2 pi e / arcosh((D^2 - a^2 - b^2) / (2 a b)), from memory (any field textbook).
TEST(FieldMatrices, BarePairMatchesClosedForm) {
  for (const double b : {1e-3, 0.4e-3}) {
    CrossSection section = in_open(1, 1e-9);
    section.conductors = {wire(0, 0, 1e-3), wire(3e-3, 1e-3, b)};
    const FieldMatrices result = field_matrices(section);
    const double u = std::acosh((10e-6 - 1e-6 - b * b) / (2 * 1e-3 * b));
    ASSERT_EQ(result.capacitance.rows(), 1);
    EXPECT_NEAR(result.capacitance(0, 0), k_2_pi_e0 / u, 1e-9 * k_2_pi_e0 / u);
    EXPECT_NEAR(result.external_inductance(0, 0), k_mu_0 / (2 * pi) * u, 1e-9 * k_mu_0 / (2 * pi) * u);
  }
}

// Wire over plane: C = 2 pi e / arcosh(h / a), from memory; also with only a hundredth of a radius of air.
TEST(FieldMatrices, WireOverPlaneMatchesClosedForm) {
  for (const double height : {50e-3, 1.5e-3, 1.01e-3}) {
    CrossSection section = over_plane(1e-6);
    section.conductors = {wire(7e-3, height, 1e-3)};
    const FieldMatrices result = field_matrices(section);
    const double expected = k_2_pi_e0 / std::acosh(height / 1e-3);
    EXPECT_NEAR(result.capacitance(0, 0), expected, 1e-6 * expected) << height;
    EXPECT_NEAR(result.external_inductance(0, 0), k_mu_0 * k_epsilon_0 / expected,
                1e-6 * k_mu_0 * k_epsilon_0 / expected);
  }
}

// Coaxial layers in series, from memory: C = 2 pi e0 / sum ln(r_out / r_in) / e.
TEST(FieldMatrices, LayeredCoaxMatchesClosedForm) {
  CrossSection section = in_tube(5e-3, 1e-9);
  section.conductors = {wire(0, 0, 1e-3, {{1.5e-3, {3.6, 0}}, {1.9e-3, {5.0, 0}}})};
  const double expected = k_2_pi_e0 / (std::log(1.5) / 3.6 + std::log(1.9 / 1.5) / 5.0 + std::log(5 / 1.9));
  EXPECT_NEAR(field_matrices(section).capacitance(0, 0), expected, 1e-9 * expected);
}

// The same with losses: each layer's permittivity is e (1 - j tan d), and -Im C is the loss.
TEST(FieldMatrices, LossyCoaxMatchesClosedForm) {
  using Complex = std::complex<double>;
  const Complex e1 = 3.6 * Complex(1, -0.05), e2 = 5.0 * Complex(1, -0.2);
  CrossSection section = in_tube(5e-3, 1e-9);
  section.conductors = {wire(0, 0, 1e-3, {{1.5e-3, {3.6, 0.05}}, {1.9e-3, {5.0, 0.2}}})};
  const Complex expected = k_2_pi_e0 / (std::log(1.5) / e1 + std::log(1.9 / 1.5) / e2 + std::log(5 / 1.9));
  const FieldMatrices result = field_matrices(section);
  EXPECT_NEAR(result.capacitance(0, 0), expected.real(), 1e-9 * expected.real());
  EXPECT_NEAR(result.loss_capacitance(0, 0), -expected.imag(), 1e-9 * -expected.imag());
}

// Eccentric wire in a tube: C = 2 pi e / arcosh((a^2 + b^2 - d^2) / (2 a b)), from memory.
TEST(FieldMatrices, EccentricWireInTubeMatchesClosedForm) {
  for (const double offset : {0.0, 1e-3, 3.9e-3, 3.99e-3}) {
    CrossSection section = in_tube(5e-3, 1e-6);
    section.conductors = {wire(-0.6 * offset, 0.8 * offset, 1e-3)};
    const double expected = k_2_pi_e0 / std::acosh((1e-6 + 25e-6 - offset * offset) / (2 * 1e-3 * 5e-3));
    EXPECT_NEAR(field_matrices(section).capacitance(0, 0), expected, 1e-6 * expected) << offset;
  }
}

// Thin wires in a tube by images (Paul, Analysis of Multiconductor Transmission Lines, p. 175):
// l_ii = ln((R^2 - d^2) / (R a)), l_ij as in the body, in units of mu0 / 2 pi.
TEST(FieldMatrices, WidelySpacedPairInTubeMatchesImages) {
  const double R = 50, d = 25, a = 0.05;
  for (const double angle : {pi, 2.0}) {
    CrossSection section = in_tube(R * 1e-3, 1e-8);
    section.conductors = {wire(d * 1e-3, 0, a * 1e-3),
                          wire(d * 1e-3 * std::cos(angle), d * 1e-3 * std::sin(angle), a * 1e-3)};
    const Eigen::MatrixXd l = field_matrices(section).external_inductance / (k_mu_0 / (2 * pi));
    const double cosine = 2 * d * d * std::cos(angle);
    const double mutual =
        std::log(std::sqrt((d * d * d * d + R * R * R * R - cosine * R * R) / (2 * d * d - cosine)) / R);
    EXPECT_NEAR(l(0, 0), std::log((R * R - d * d) / (R * a)), 2e-5);  // the images neglect (a / d)^2 = 4e-6
    EXPECT_NEAR(l(0, 1), mutual, 2e-5);
  }
}

// Two cores in a common screen and three in one, by images for thin cores, from memory; in units of
// 1 / (2 pi e): all tied, per core; and the differential or positive-sequence mode.
TEST(FieldMatrices, CoresInCommonScreenMatchClosedForms) {
  const double R = 10, d = 4, a = 0.02;
  CrossSection section = in_tube(R * 1e-3, 1e-8);
  section.conductors = {wire(d * 1e-3, 0, a * 1e-3), wire(-d * 1e-3, 0, a * 1e-3)};
  Eigen::MatrixXd c = field_matrices(section).capacitance / k_2_pi_e0;
  const double tied2 = 1 / std::log((std::pow(R, 4) - std::pow(d, 4)) / (2 * a * d * R * R));
  const double differential = 1 / std::log(2 * d * (R * R - d * d) / (a * (R * R + d * d)));
  EXPECT_NEAR(c(0, 0) + c(0, 1), tied2, 2e-5 * tied2);
  EXPECT_NEAR(c(0, 0) - c(0, 1), differential, 2e-5 * differential);

  section.conductors.clear();
  for (int k = 0; k < 3; ++k)
    section.conductors.push_back(
        wire(d * 1e-3 * std::cos(2 * pi * k / 3), d * 1e-3 * std::sin(2 * pi * k / 3), a * 1e-3));
  c = field_matrices(section).capacitance / k_2_pi_e0;
  const double d2 = d * d, r2 = R * R;
  const double tied3 = 1 / std::log((std::pow(R, 6) - std::pow(d, 6)) / (3 * d2 * a * R * r2));
  const double positive =
      2 / std::log(3 * d2 * std::pow(r2 - d2, 3) / (a * a * (std::pow(R, 6) - std::pow(d, 6))));
  EXPECT_NEAR(c(0, 0) + 2 * c(0, 1), tied3, 4e-5 * tied3);
  EXPECT_NEAR(c(0, 0) - c(0, 1), positive, 4e-5 * positive);
}

// Three-wire ribbon cable: Paul, Analysis of Multiconductor Transmission Lines, 2nd ed. 2007, section 9.3:
// 28 AWG (7.5 mil), 10 mil of permittivity 3.5, 50 mil apart; reference an outer wire. Every printed digit.
TEST(FieldMatrices, RibbonCableMatchesTextbook) {
  constexpr double k_mil = 25.4e-6;  // m
  const std::vector<Layer> coat = {{17.5 * k_mil, {3.5, 0}}};
  CrossSection section = in_open(0, 1e-7);
  section.conductors = {wire(0, 0, 7.5 * k_mil, coat), wire(50 * k_mil, 0, 7.5 * k_mil, coat),
                        wire(100 * k_mil, 0, 7.5 * k_mil, coat)};
  const FieldMatrices coated = field_matrices(section);
  EXPECT_NEAR(coated.capacitance(0, 0) * 1e12, 37.432, 0.0005);
  EXPECT_NEAR(coated.capacitance(0, 1) * 1e12, -18.716, 0.0005);
  EXPECT_NEAR(coated.capacitance(1, 1) * 1e12, 24.982, 0.0005);
  EXPECT_NEAR(coated.external_inductance(0, 0) * 1e6, 0.7485, 0.00005);
  EXPECT_NEAR(coated.external_inductance(0, 1) * 1e6, 0.5077, 0.00005);
  EXPECT_NEAR(coated.external_inductance(1, 1) * 1e6, 1.0154, 0.00005);
  for (RoundConductor& conductor : section.conductors) conductor.layers.clear();
  const FieldMatrices naked = field_matrices(section);
  EXPECT_NEAR(naked.capacitance(0, 0) * 1e12, 22.494, 0.0005);
  EXPECT_NEAR(naked.capacitance(0, 1) * 1e12, -11.247, 0.0005);
  EXPECT_NEAR(naked.capacitance(1, 1) * 1e12, 16.581, 0.0005);
}

// Coated pairs in air, 14 AWG with 19 mil of insulation: collocation after Clements, Paul and Adams (1975)
// with 60 harmonics, another formulation than the engine's, in tests/reference/coated_pair.py.
TEST(FieldMatrices, CoatedPairsMatchCollocation) {
  constexpr double k_inch = 25.4e-3;  // m
  const auto pair = [&](double spacing, double permittivity) {
    CrossSection section = in_open(0, 1e-7);
    const std::vector<Layer> coat = {{0.051 * k_inch, {permittivity, 0}}};
    section.conductors = {wire(0, 0, 0.032 * k_inch, coat), wire(0, spacing * k_inch, 0.032 * k_inch, coat)};
    return field_matrices(section).capacitance(0, 0) * 1e12;
  };
  EXPECT_NEAR(pair(0.105, 3.5), 49.0577, 1e-4);
  EXPECT_NEAR(pair(0.105, 4.5), 54.7849, 1e-4);
  EXPECT_NEAR(pair(0.105, 5.5), 59.5136, 1e-4);
  EXPECT_NEAR(pair(0.105, 7.0), 65.2868, 1e-4);
  EXPECT_NEAR(pair(0.13, 3.5), 30.3219, 1e-4);
  EXPECT_NEAR(pair(0.13, 4.5), 31.7341, 1e-4);
  EXPECT_NEAR(pair(0.13, 5.5), 32.7224, 1e-4);
  EXPECT_NEAR(pair(0.13, 7.0), 33.7523, 1e-4);
}

// A plastic tube around one concentric wire within a metal tube: three dielectrics in series.
TEST(FieldMatrices, PlasticTubeInMetalTubeMatchesClosedForm) {
  CrossSection section = in_tube(9e-3, 1e-9);
  section.conductors = {wire(0, 0, 1e-3, {{1.6e-3, {3.6, 0.05}}})};
  section.bodies = {{{0, 0}, 4e-3, 5e-3, {3.3, 0.02}, {}}};
  using Complex = std::complex<double>;
  const Complex expected = k_2_pi_e0 / (std::log(1.6) / (3.6 * Complex(1, -0.05)) + std::log(4 / 1.6) +
                                        std::log(1.25) / (3.3 * Complex(1, -0.02)) + std::log(9.0 / 5.0));
  const FieldMatrices result = field_matrices(section);
  EXPECT_NEAR(result.capacitance(0, 0), expected.real(), 1e-9 * expected.real());
  EXPECT_NEAR(result.loss_capacitance(0, 0), -expected.imag(), 1e-8 * -expected.imag());
}

// A body of no contrast is no body: a hard check of the two-port, the images in its wall and the
// re-expansions, because everything must cancel.
TEST(FieldMatrices, BodyOfAirChangesNothing) {
  CrossSection section = over_plane(1e-7);
  section.conductors = {wire(1e-3, 13e-3, 1e-3, {{1.6e-3, {3.6, 0}}}), wire(-2e-3, 9e-3, 0.8e-3),
                        wire(12e-3, 9e-3, 1e-3)};
  const FieldMatrices without = field_matrices(section);
  section.bodies = {{{0, 10e-3}, 5e-3, 7e-3, {}, {}}};
  const FieldMatrices with = field_matrices(section);
  const Eigen::VectorXd size = without.capacitance.diagonal().cwiseSqrt().cwiseInverse();
  const Eigen::MatrixXd off =
      size.asDiagonal() * (with.capacitance - without.capacitance) * size.asDiagonal();
  EXPECT_LT(off.cwiseAbs().maxCoeff(), 2e-7);
}

// A body all of one material with what fills it, and a conductor whose insulation is the same: the
// insulation is then no boundary, wherever it ends.
TEST(FieldMatrices, InsulationLikeItsFillerIsNoBoundary) {
  CrossSection section = over_plane(1e-7);
  const Dielectric pvc{4.5, 0.03};
  section.bodies = {{{0, 10e-3}, 4e-3, 5e-3, pvc, pvc}};
  section.conductors = {wire(2e-3, 10e-3, 1e-3), wire(-1.5e-3, 9e-3, 0.8e-3)};
  const FieldMatrices without = field_matrices(section);
  section.conductors[0].layers = {{1.8e-3, pvc}};
  section.conductors[1].layers = {{1.3e-3, pvc}};
  section.bodies[0].inner_radius = 4.5e-3;
  const FieldMatrices with = field_matrices(section);
  for (int i = 0; i < 2; ++i)
    for (int j = 0; j < 2; ++j) {
      EXPECT_NEAR(with.capacitance(i, j), without.capacitance(i, j), 2e-7 * without.capacitance(0, 0));
      EXPECT_NEAR(with.loss_capacitance(i, j), without.loss_capacitance(i, j),
                  2e-7 * without.capacitance(0, 0));
    }
}

// Conductor on the axis of a shell over a plane: a coax inside, a wire over a plane outside.
TEST(FieldMatrices, ShellComposesInsideAndOutside) {
  CrossSection section = over_plane(1e-9);
  section.conductors = {wire(0, 20e-3, 1e-3)};
  Shell shell;
  shell.centre = {0, 20e-3};
  shell.inner_radius = 5e-3;
  shell.outer_radius = 6e-3;
  shell.filler = {2.3, 0.01};
  section.shells = {shell};
  const FieldMatrices result = field_matrices(section);
  const double inner = k_2_pi_e0 * 2.3 / std::log(5.0), outer = k_2_pi_e0 / std::acosh(20.0 / 6.0);
  ASSERT_EQ(result.capacitance.rows(), 2);
  EXPECT_NEAR(result.capacitance(0, 0), inner, 1e-9 * inner);
  EXPECT_NEAR(result.capacitance(0, 1), -inner, 1e-9 * inner);
  EXPECT_NEAR(result.capacitance(1, 1), inner + outer, 1e-9 * inner);
  EXPECT_NEAR(result.loss_capacitance(0, 0), 0.01 * inner, 1e-9 * inner);
  EXPECT_NEAR(result.loss_capacitance(1, 1), 0.01 * inner, 1e-9 * inner);
  // Fluxes: the loop wire-plane is the loops wire-shell and shell-plane in series.
  const double l_inner = k_mu_0 / (2 * pi) * std::log(5.0),
               l_outer = k_mu_0 / (2 * pi) * std::acosh(20.0 / 6.0);
  EXPECT_NEAR(result.external_inductance(0, 0), l_inner + l_outer, 1e-9 * l_outer);
  EXPECT_NEAR(result.external_inductance(0, 1), l_outer, 1e-9 * l_outer);
  EXPECT_NEAR(result.external_inductance(1, 1), l_outer, 1e-9 * l_outer);
}

// What lies in a shell sees only the shell: exact zeros, not small numbers.
TEST(FieldMatrices, ShellShieldsExactly) {
  CrossSection section = in_open(3, 1e-4);
  section.conductors = {wire(2e-3, 0, 1e-3), wire(-2e-3, 0, 1e-3), wire(12e-3, 0, 1e-3),
                        wire(-12e-3, 3e-3, 1e-3)};
  Shell shell;
  shell.inner_radius = 5e-3;
  shell.outer_radius = 6e-3;
  shell.layers = {{7e-3, {4.0, 0.05}}};
  section.shells = {shell};
  const FieldMatrices result = field_matrices(section);
  ASSERT_EQ(result.capacitance.rows(), 4);
  for (int inner : {0, 1}) {
    EXPECT_EQ(result.capacitance(inner, 2), 0.0);
    EXPECT_EQ(result.loss_capacitance(inner, 2), 0.0);
    EXPECT_NEAR(result.capacitance.row(inner).sum(), 0.0, 1e-14 * result.capacitance(inner, inner));
  }
  EXPECT_LT(result.capacitance(2, 3), 0.0);
}

}  // namespace
}  // namespace engine
