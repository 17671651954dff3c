// The surface impedances of a round tube, by modified Bessel functions of complex argument.
#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>
#include <string>

#include "engine/constants.h"
#include "engine/impedance.h"

namespace engine {
namespace {

using Complex = std::complex<double>;

/// Orders 0 and 1 of I and K, scaled so that none over- or underflows: i = exp(-z) I(z), k = exp(z) K(z).
struct ScaledBessel {
  Complex i0, i1, k0, k1;
};

/// I by its power series, for small |z|: no digit is lost that way, other than by quadrature.
void add_i_by_series(Complex z, ScaledBessel& bessel) {
  const Complex quarter = 0.25 * z * z;
  Complex term = 1.0;
  for (int k = 0; std::abs(term) > 1e-18; term *= quarter / ((k + 1.0) * (k + 1.0)), ++k) {
    bessel.i0 += term;
    bessel.i1 += term / (k + 1.0);
  }
  bessel.i0 *= std::exp(-z);
  bessel.i1 *= 0.5 * z * std::exp(-z);
}

/// I_n(z) = (1/pi) integral over 0..pi of exp(z cos t) cos(n t) dt by the trapezoidal rule, which
/// converges geometrically on a period: error exp(-N^2 cos(arg z) / (2 |z|)) for N points around.
void add_i_by_trapezoid(Complex z, ScaledBessel& bessel) {
  const int half = 20 + static_cast<int>(6.0 * std::sqrt(std::abs(z)));  // points on 0..pi
  for (int i = 0; i <= half; ++i) {
    const double t = std::numbers::pi * i / half;
    const double s = std::sin(0.5 * t);
    const Complex f =
        std::exp(-2.0 * z * s * s) * (i == 0 || i == half ? 0.5 : 1.0) / static_cast<double>(half);
    bessel.i0 += f;
    bessel.i1 += f * std::cos(t);
  }
}

/// K_n(z) = integral over 0..inf of exp(-z cosh t) cosh(n t) dt, likewise; the integrand falls double
/// exponentially and is analytic in a strip of half width pi/4 while |arg z| <= pi/4.
void add_k(Complex z, ScaledBessel& bessel) {
  const double step = 0.125 / std::sqrt(std::max(1.0, std::abs(z) / 8.0));
  for (int i = 0;; ++i) {
    const double t = i * step;
    const double s = std::sinh(0.5 * t);
    const double n1 = std::cosh(t);
    const Complex f = std::exp(-2.0 * z * s * s) * (i == 0 ? 0.5 : 1.0) * step;
    bessel.k0 += f;
    bessel.k1 += f * n1;
    if (std::abs(f) * n1 < 1e-18 * std::abs(bessel.k0)) return;
  }
}

ScaledBessel scaled_bessel(Complex z) {
  ScaledBessel bessel{};
  if (std::abs(z) < 4.0) {
    add_i_by_series(z, bessel);
  } else {
    add_i_by_trapezoid(z, bessel);
  }
  add_k(z, bessel);
  return bessel;
}

}  // namespace

TubeImpedance tube_impedance(double inner_radius, double outer_radius, const Metal& metal, double frequency,
                             double temperature) {
  if (!(0.0 < inner_radius && inner_radius < outer_radius && std::isfinite(outer_radius))) {
    throw std::invalid_argument("a tube of inner radius " + std::to_string(1e3 * inner_radius) +
                                " mm and outer radius " + std::to_string(1e3 * outer_radius) +
                                " mm has no wall");
  }
  const double a = inner_radius;
  const double b = outer_radius;
  const double rho = resistivity(metal, temperature);  // ohm m
  const double omega_mu = 2.0 * std::numbers::pi * frequency * k_mu_0 * metal.relative_permeability;
  const Complex m = std::sqrt(Complex(0.0, omega_mu / rho));  // 1/m
  const double dc = rho / (std::numbers::pi * (b - a) * (b + a));
  if (std::abs(m) * b < 1e-7) return {.inner = dc, .outer = dc, .transfer = dc};

  const ScaledBessel at_a = scaled_bessel(m * a);
  const ScaledBessel at_b = scaled_bessel(m * b);
  // Numerator and denominator are divided by exp(m (b - a)), so that thick walls do not overflow.
  const Complex once = std::exp(-m * (b - a));
  const Complex twice = once * once;
  const Complex d = at_b.i1 * at_a.k1 - twice * at_a.i1 * at_b.k1;
  const Complex scale = rho / (2.0 * std::numbers::pi * d);  // ohm m^2
  return {.inner = scale * m / a * (at_a.k0 * at_b.i1 + twice * at_a.i0 * at_b.k1),
          .outer = scale * m / b * (at_b.i0 * at_a.k1 + twice * at_b.k0 * at_a.i1),
          .transfer = scale / (a * b) * once};
}

}  // namespace engine
