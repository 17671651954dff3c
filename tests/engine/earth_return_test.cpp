// The earth as a return, against the printed figures and against another theory.
#include "engine/earth_return.h"

#include <gtest/gtest.h>

#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>

#include "engine/constants.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
constexpr double k_pi = std::numbers::pi;

// The handbooks' pi^2 f 1e-7 ohm/m and 658.9 sqrt(rho / f) m (Carson 1926 with mu_0 = 4 pi 1e-7).
TEST(EarthReturn, MatchesTheHandbooksFigures) {
  for (const double f : {16.7, 50.0, 60.0, 400.0}) {
    for (const double rho : {10.0, 100.0, 3000.0}) {
      const EarthReturn earth = earth_return(f, rho);
      EXPECT_NEAR(earth.resistance, k_pi * k_pi * f * 1e-7, 1e-8 * earth.resistance);
      EXPECT_NEAR(earth.depth, 658.9 * std::sqrt(rho / f), 1e-4 * earth.depth);
    }
  }
  EXPECT_NEAR(earth_return(50.0, 100.0).depth, 931.8, 0.1);
  EXPECT_NEAR(earth_return(60.0, 100.0).depth, 850.6, 0.1);
  EXPECT_NEAR(earth_return(60.0, 100.0).resistance, 0.0592e-3, 0.0001e-3);
}

/// Mutual impedance of two conductors at height h, distance d apart, with the earth's surface mirrored at a
/// complex depth: Deri, Tevan, Semlyen and Castanheira, IEEE Trans. PAS-100 (1981) 3686.
Complex complex_depth_mutual(double h, double d, double f, double rho) {
  const Complex s(0.0, f * k_mu_0);
  const Complex p = std::sqrt(rho / (2 * k_pi * s));
  return s * std::log(std::sqrt(std::pow(2.0 * (h + p), 2) + d * d) / d);
}

// At low frequency both theories have the resistance w mu_0 / 8; in the reactance the complex depth is larger
// by egamma - 1/2 = 0.0772 under the logarithm, whatever the frequency, a known difference.
TEST(EarthReturn, AgreesWithTheComplexDepthWhereTheoryDoes) {
  for (const double f : {50.0, 60.0}) {
    for (const double rho : {20.0, 100.0, 1000.0}) {
      const double h = 0.05, d = 0.01;  // m, a cable over a slab
      const EarthReturn earth = earth_return(f, rho);
      const Complex deri = complex_depth_mutual(h, d, f, rho);
      const double scale = f * k_mu_0;                // ohm/m
      const double left_out = 4.0 * h / earth.depth;  // the next term of both series
      EXPECT_NEAR(deri.real(), earth.resistance, scale * left_out);
      EXPECT_NEAR(deri.imag() - scale * std::log(earth.depth / d), scale * (std::numbers::egamma - 0.5),
                  scale * left_out);
    }
  }
}

TEST(EarthReturn, RefusesWhatIsNotPhysical) {
  EXPECT_THROW(earth_return(0.0, 100.0), std::invalid_argument);
  EXPECT_THROW(earth_return(60.0, 0.0), std::invalid_argument);
  EXPECT_THROW(earth_return(60.0, std::nan("")), std::invalid_argument);
}

}  // namespace
}  // namespace engine
