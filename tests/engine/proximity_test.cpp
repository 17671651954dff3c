#include "engine/proximity.h"

#include <gtest/gtest.h>

#include <Eigen/Eigenvalues>
#include <cmath>
#include <numbers>

#include "engine/constants.h"
#include "engine/impedance.h"
#include "tests/engine/sample_sections.h"

namespace engine {
namespace {

using std::numbers::pi;

EddyWire eddy_wire(double x, double radius, double conductivity) {
  return {{x, 0.0}, radius, 1.0 / (conductivity * pi * radius * radius), 1.0};
}

// Go and return through two wires: what the loop's impedance gains.
std::complex<double> loop_gain(double radius, double apart, double conductivity, double frequency) {
  const Eigen::MatrixXcd z = proximity_impedance(
      {eddy_wire(0.0, radius, conductivity), eddy_wire(apart, radius, conductivity)}, frequency);
  return z(0, 0) + z(1, 1) - 2.0 * z(0, 1);
}

// In a uniform field of B a long cylinder of metal, its skin depth much larger than itself, takes
// pi sigma w^2 B^2 b^4 / 4 a metre: the loss of E = w B x over its circle. Far apart, B = mu_0 I / (2 pi D).
TEST(ProximityImpedance, FarApartTheLossIsThatOfACylinderInAUniformField) {
  const double b = 1e-3, apart = 100e-3, sigma = 58e6, omega = 2 * pi * 1000;
  EXPECT_EQ(loop_gain(b, apart, sigma, 10.0).real(), 0.0);  // too thin to count at 10 Hz
  const double per_wire = pi * sigma * std::pow(omega * k_mu_0 / (2 * pi * apart), 2) * std::pow(b, 4) / 4;
  // The power series of I_2 / I_0 (Abramowitz and Stegun 9.6.10) goes on with 1 - 11/96 (b / skin depth)^4.
  const double depth = std::sqrt(2 / (omega * k_mu_0 * sigma));
  const double truth = 2 * per_wire * (1 - 11.0 / 96 * std::pow(b / depth, 4));
  EXPECT_NEAR(loop_gain(b, apart, sigma, 1000.0).real(), truth, 3e-4 * truth);
}

// Where the skin is thin a pair has Rs / (pi b) (D/2b) / sqrt((D/2b)^2 - 1) (S. Ramo, J. R. Whinnery,
// T. Van Duzer, Fields and Waves in Communication Electronics, table of lines; from memory).
TEST(ProximityImpedance, WithAThinSkinAPairHasTheTextbooksResistance) {
  const double b = 1e-3, sigma = 58e6, frequency = 1e9;
  RoundConductor alone = wire(0, 0, b);
  alone.metal = {sigma, 1.0, 0.0};
  const double surface = std::sqrt(pi * frequency * k_mu_0 / sigma);
  for (const double apart : {2.5e-3, 4e-3, 10e-3}) {
    const double wide = apart / (2 * b);
    const double truth = surface / (pi * b) * wide / std::sqrt(wide * wide - 1);
    const double loop =
        2 * internal_impedance(alone, frequency, 20.0).real() + loop_gain(b, apart, sigma, frequency).real();
    EXPECT_NEAR(loop, truth, 5e-3 * truth) << apart;
  }
}

// And its external inductance shrinks from ln(D/b) to arcosh(D/2b), that of charges on perfect metal.
TEST(ProximityImpedance, WithAThinSkinAPairHasTheInductanceOfPerfectMetal) {
  const double b = 1e-3, apart = 2.5e-3, frequency = 1e12;
  const double gain = loop_gain(b, apart, 58e6, frequency).imag() / (2 * pi * frequency);
  EXPECT_NEAR(gain, k_mu_0 / pi * (std::acosh(apart / (2 * b)) - std::log(apart / b)), 1e-3 * k_mu_0 / pi);
}

TEST(ProximityImpedance, IsSymmetricAndTakesPower) {
  std::vector<EddyWire> wires;
  for (int k = 0; k < 4; ++k) wires.push_back({{15e-3 * k, 4e-3 * (k % 2)}, 6e-3 + 0.2e-3 * k, 1e-4, 1.0});
  wires.push_back({{30e-3, 25e-3}, 1e-3, 0.0, 1.0});  // a line of current
  const Eigen::MatrixXcd z = proximity_impedance(wires, 60.0);
  EXPECT_EQ(z, z.transpose());
  const Eigen::VectorXd eigenvalues = Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(z.real()).eigenvalues();
  EXPECT_GE(eigenvalues.minCoeff(), -1e-12 * eigenvalues.maxCoeff());
  EXPECT_GT(eigenvalues.maxCoeff(), 0.0);
}

}  // namespace
}  // namespace engine
