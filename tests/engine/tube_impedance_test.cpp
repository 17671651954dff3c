// Schelkunoff's surface impedances of a tube.
#include <gtest/gtest.h>

#include <Eigen/Dense>
#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>
#include <vector>

#include "engine/constants.h"
#include "engine/impedance.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
constexpr double k_pi = std::numbers::pi;

Metal metal(double conductivity, double permeability) {
  return {.conductivity = conductivity, .relative_permeability = permeability};
}

void expect_close(Complex actual, Complex expected, double relative) {
  EXPECT_NEAR(actual.real(), expected.real(), relative * std::abs(expected));
  EXPECT_NEAR(actual.imag(), expected.imag(), relative * std::abs(expected));
}

struct Reference {
  const char* what;
  double a, b;  // m
  Metal metal;
  double frequency;                // Hz
  Complex inner, outer, transfer;  // ohm/m
};

// mpmath 1.2.1, mp.dps = 30, m = sqrt(2j*pi*f*mu_0*mu_r*sigma), I = besseli, K = besselk,
// D = I(1,m*b)*K(1,m*a) - I(1,m*a)*K(1,m*b), for instance
// inner = m/(2*pi*a*sigma*D)*(I(0,m*a)*K(1,m*b) + K(0,m*a)*I(1,m*b)), transfer = 1/(2*pi*a*b*sigma*D).
const std::vector<Reference>& references() {
  static const std::vector<Reference> all{
      {"EMT 3/4, steel, 60 Hz",
       0.010465,
       0.01171,
       metal(6e6, 500),
       60.0,
       {0.0021309447742817432, 0.0014493078838327688},
       {0.0021087076464846416, 0.0012953088666262329},
       {0.0017495642291971373, -0.0006650806513063633}},
      {"RMC 4, steel, seven skin depths thick",
       0.0509,
       0.05715,
       metal(6e6, 1000),
       60.0,
       {0.00061618505397469557, 0.00062124091195962772},
       {0.00055741253469555074, 0.00055330621500034785},
       {8.9356884083674379e-7, -3.5904480113773911e-7}},
      {"aluminium armour, 60 Hz",
       0.0055,
       0.006,
       metal(35e6, 1),
       60.0,
       {0.0015816646610895927, 2.2830284987360965e-6},
       {0.0015816646085865468, 2.0928450159929711e-6},
       {0.0015816635027207295, -1.0923144081744222e-6}},
      {"RMC 4, 60 kHz: exp(-m (b - a)) = 1e-100",
       0.0509,
       0.05715,
       metal(6e6, 1000),
       60e3,
       {0.019641247213746875, 0.019646364427837887},
       {0.017501874236481303, 0.017497812071047972},
       {-1.7415148703017663e-104, -1.7415517080350265e-104}},
      {"EMT 3/4, near dc",
       0.010465,
       0.01171,
       metal(6e6, 500),
       1e-3,
       {0.0019216128622350533, 2.4884276614591344e-8},
       {0.0019216128622285924, 2.2240173381131604e-8},
       {0.0019216128621239353, -1.17514195512405e-8}},
      {"a thick bar with a small bore",
       0.001,
       0.03,
       metal(6e6, 1000),
       60.0,
       {0.021880110812140814, 0.029557696478266389},
       {0.0010689835559345078, 0.0010539336374921658},
       {-8.77740293294386e-18, -1.0526829735290578e-17}},
  };
  return all;
}

TEST(TubeImpedance, MatchesBesselFunctionsOfManyDigits) {
  for (const Reference& r : references()) {
    SCOPED_TRACE(r.what);
    const TubeImpedance z = tube_impedance(r.a, r.b, r.metal, r.frequency, 20.0);
    expect_close(z.inner, r.inner, 1e-12);
    expect_close(z.outer, r.outer, 1e-12);
    expect_close(z.transfer, r.transfer, 1e-12);
  }
}

// A foil of 10 um: the difference of products in the denominator costs some four digits, no more.
// mpmath as above.
TEST(TubeImpedance, KeepsElevenDigitsOnAFoil) {
  const TubeImpedance z = tube_impedance(0.03, 0.03001, metal(58e6, 1), 50.0, 20.0);
  expect_close(z.inner, {0.0091453115912815612, 6.9813169342267452e-9}, 1e-11);
  expect_close(z.transfer, {0.0091453115912795632, -3.4900768070347399e-9}, 1e-11);
}

TEST(TubeImpedance, IsTheDcResistanceAtRest) {
  const double a = 5e-3, b = 7e-3, sigma = 35e6;
  const double dc = 1.0 / (sigma * k_pi * (b * b - a * a));
  for (const double frequency : {0.0, 1e-9, 1e-7}) {
    const TubeImpedance z = tube_impedance(a, b, metal(sigma, 1), frequency, 20.0);
    expect_close(z.inner, dc, 1e-8);
    expect_close(z.outer, dc, 1e-8);
    expect_close(z.transfer, dc, 1e-8);
  }
}

// Where the wall is thin beside the radius it is a plane sheet: dc m t coth(m t) on its surfaces, and across
// it dc m t / sinh(m t), whatever m t. Schelkunoff, Bell System Technical Journal 13 (1934), equation 82 ff.
TEST(TubeImpedance, BecomesASheetWhenThin) {
  const double a = 0.5, t = 1e-3;  // m; what is left out is of the order t / a
  const double sigma = 6e6;
  const double dc = 1.0 / (sigma * 2 * k_pi * (a + t / 2) * t);
  for (const double mu : {1.0, 100.0, 2000.0}) {
    const TubeImpedance z = tube_impedance(a, a + t, metal(sigma, mu), 60.0, 20.0);
    const Complex mt = t * std::sqrt(Complex(0.0, 2 * k_pi * 60.0 * k_mu_0 * mu * sigma));
    expect_close(z.transfer, dc * mt / std::sinh(mt), 3 * t / a);
    expect_close(z.inner, dc * mt / std::tanh(mt), 3 * t / a);
    expect_close(z.outer, dc * mt / std::tanh(mt), 3 * t / a);
  }
}

// Internal inductance at low frequency, from the energy of the field in the wall, H = I (r^2 - a^2) / (2 pi r
// q) for a current that returns outside and I (b^2 - r^2) / (2 pi r q) for one that returns inside; Grover,
// Inductance Calculations (1946).
TEST(TubeImpedance, HasTheTextbookInternalInductance) {
  const double a = 5e-3, b = 7e-3, f = 1.0;
  const TubeImpedance z = tube_impedance(a, b, metal(35e6, 1), f, 20.0);
  const double q = b * b - a * a;
  const double log_ratio = std::log(b / a);
  const double scale = f * k_mu_0;
  const double outer = scale * (std::pow(a * a / q, 2) * log_ratio + (b * b - 3 * a * a) / (4 * q));
  const double inner = scale * (std::pow(b * b / q, 2) * log_ratio - (3 * b * b - a * a) / (4 * q));
  EXPECT_NEAR(z.outer.imag(), outer, 1e-6 * outer);  // corrections of the order f^2 are 1e-7
  EXPECT_NEAR(z.inner.imag(), inner, 1e-6 * inner);
}

// With a vanishing bore the outer surface is that of a solid wire, another piece of code.
TEST(TubeImpedance, BecomesASolidWireWithoutItsBore) {
  RoundConductor wire;
  wire.radius = 5e-3;
  for (const double frequency : {50.0, 5e3, 500e3}) {
    const TubeImpedance z = tube_impedance(1e-9, wire.radius, wire.metal, frequency, 20.0);
    expect_close(z.outer, internal_impedance(wire, frequency, 20.0), 1e-10);
  }
}

// A passive wall: whatever flows inside and outside, it takes power.
TEST(TubeImpedance, TakesPower) {
  for (const double permeability : {1.0, 30.0, 1000.0}) {
    for (const double wall : {1e-4, 1e-3, 1e-2}) {
      for (const double frequency : {1.0, 60.0, 2e3, 1e5}) {
        const TubeImpedance z = tube_impedance(0.02, 0.02 + wall, metal(6e6, permeability), frequency, 20.0);
        EXPECT_GT(z.inner.real(), 0.0);
        const double det = z.inner.real() * z.outer.real() - z.transfer.real() * z.transfer.real();
        EXPECT_GT(det, -1e-13 * z.inner.real() * z.outer.real());
      }
    }
  }
}

TEST(TubeImpedance, RefusesAWallThatIsNone) {
  EXPECT_THROW(tube_impedance(0.02, 0.02, Metal{}, 60.0, 20.0), std::invalid_argument);
  EXPECT_THROW(tube_impedance(0.0, 0.02, Metal{}, 60.0, 20.0), std::invalid_argument);
  EXPECT_THROW(tube_impedance(0.02, std::nan(""), Metal{}, 60.0, 20.0), std::invalid_argument);
}

}  // namespace
}  // namespace engine
