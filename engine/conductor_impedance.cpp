// A round conductor by itself: its resistance, its strands, its skin effect.
#include <boost/math/tools/fraction.hpp>
#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>
#include <string>
#include <utility>

#include "engine/constants.h"
#include "engine/impedance.h"

namespace engine {
namespace {

using Complex = std::complex<double>;

/// Rings around the middle strand of a concentric lay: 1 + 6 + 12 + ... + 6 rings = `strands`.
int rings_of(int strands) {
  int rings = 0;
  int total = 1;
  while (total < strands) total += 6 * ++rings;
  if (total != strands) {
    throw std::invalid_argument(std::to_string(strands) +
                                " strands make no concentric lay; 1, 7, 19, 37, 61, 91, 127 do");
  }
  return rings;
}

/// ln of the product of distances from the point (x, 0) to n points evenly spread on a circle of radius
/// R, the first of them at `angle`: |x^n - (R e^{j angle})^n|, scaled by the larger power against overflow.
double log_distances_to_ring(double x, double radius, int n, double angle) {
  const double larger = std::max(x, radius);
  const Complex difference = std::pow(x / larger, n) - std::polar(std::pow(radius / larger, n), n * angle);
  return n * std::log(larger) + std::log(std::abs(difference));
}

/// Sum over the strands of ring `a` of ln of the distances to all strands of ring `b`; strand radius 1,
/// so that ring k has radius 2 k. For a == b a strand's distance to itself is its own geometric mean
/// radius exp(-1/4), and the product over the others is n R^(n-1).
double log_distances_between_rings(int a, int b) {
  if (a == 0 && b == 0) return -0.25;
  if (a == 0 || b == 0) return 6.0 * (a + b) * std::log(2.0 * (a + b));
  const int n_a = 6 * a;
  const int n_b = 6 * b;
  if (a == b) return n_a * (std::log(n_a) + (n_a - 1) * std::log(2.0 * a) - 0.25);
  double sum = 0.0;
  for (int i = 0; i < n_a; ++i) {
    sum += log_distances_to_ring(2.0 * a, 2.0 * b, n_b, 2.0 * std::numbers::pi * i / n_a);
  }
  return sum;
}

/// The terms w / (4 k (k+1)) of Gauss's continued fraction
/// (z/2) I0(z)/I1(z) = 1 + (w/8) / (1 + (w/24) / (1 + ...)), w = z^2.
struct BesselRatioTerms {
  using result_type = std::pair<Complex, Complex>;
  Complex w;
  int k = 0;
  result_type operator()() {
    ++k;
    return {w / (4.0 * k * (k + 1.0)), 1.0};
  }
};

}  // namespace

double gmr_ratio(int strands) {
  const int rings = rings_of(strands);
  double sum = 0.0;
  for (int a = 0; a <= rings; ++a) {
    for (int b = 0; b <= rings; ++b) sum += log_distances_between_rings(a, b);
  }
  const double n = strands;
  return std::exp(sum / (n * n)) / (2.0 * rings + 1.0);
}

double resistivity(const Metal& metal, double temperature) {
  const double value = (1.0 + metal.temperature_coefficient * (temperature - 20.0)) / metal.conductivity;
  if (!(value > 0.0 && std::isfinite(value))) {
    throw std::invalid_argument("a metal of " + std::to_string(metal.conductivity) +
                                " S/m and temperature coefficient " +
                                std::to_string(metal.temperature_coefficient) + "/K has no resistance at " +
                                std::to_string(temperature) + " degC");
  }
  return value;
}

double dc_resistance(const RoundConductor& conductor, double temperature) {
  const double rho = resistivity(conductor.metal, temperature);  // ohm m
  if (conductor.dc_resistance > 0.0) return conductor.dc_resistance * conductor.metal.conductivity * rho;
  const int rings = rings_of(conductor.strands);
  const double strand_radius = conductor.radius / (2.0 * rings + 1.0);                       // m
  const double area = conductor.strands * std::numbers::pi * strand_radius * strand_radius;  // m^2
  return rho / area;
}

std::complex<double> internal_impedance(const RoundConductor& conductor, double frequency,
                                        double temperature) {
  const double resistance = dc_resistance(conductor, temperature);
  const double omega_mu = 2.0 * std::numbers::pi * frequency * k_mu_0 * conductor.metal.relative_permeability;
  // (m a)^2 for a conductivity that spreads the dc resistance over the whole bundle circle.
  BesselRatioTerms terms{.w = Complex(0.0, omega_mu / (std::numbers::pi * resistance))};
  // What a dc current makes of it is 1; the fraction adds the rest, so that neither part cancels.
  const Complex beyond_dc =
      boost::math::tools::continued_fraction_a(terms, std::numeric_limits<double>::epsilon());
  const double strands_over_solid = -4.0 * std::log(gmr_ratio(conductor.strands));
  return resistance * Complex(1.0 + beyond_dc.real(), beyond_dc.imag() * strands_over_solid);
}

}  // namespace engine
