#include "engine/strip.h"

#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>

#include "engine/constants.h"
#include "engine/earth_return.h"

namespace engine {
namespace {

using std::numbers::pi;

// A Maxwell matrix counted from a conductor, recounted from earth with that conductor as last row.
Eigen::MatrixXd with_reference_row(const Eigen::MatrixXd& matrix, double reference_to_earth) {
  const Eigen::Index n = matrix.rows();
  Eigen::MatrixXd grown(n + 1, n + 1);
  grown.topLeftCorner(n, n) = matrix;
  grown.topRightCorner(n, 1) = -matrix.rowwise().sum();
  grown.bottomLeftCorner(1, n) = grown.topRightCorner(n, 1).transpose();
  grown(n, n) = matrix.sum() + reference_to_earth;
  return grown;
}

// The integral of ln sqrt(s^2 + y^2) over s.
double log_integral(double s, double y) {
  const double square = s * s + y * y;
  if (square == 0.0) return 0.0;
  return 0.5 * s * std::log(square) - s + (y == 0.0 ? 0.0 : y * std::atan(s / y));
}

}  // namespace

double strip_capacitance(double width, double height) {
  if (!(width > 0) || !(height > 0))
    throw std::invalid_argument("a strip needs a width and a height above 0 m");
  const double u = width / height;
  const double f = 6 + (2 * pi - 6) * std::exp(-std::pow(30.666 / u, 0.7528));
  return 2 * pi * k_epsilon_0 / std::log(f / u + std::hypot(1.0, 2 / u));
}

double mean_log_distance_to_strip(double width, double x, double y) {
  return (log_integral(x + width / 2, y) - log_integral(x - width / 2, y)) / width;
}

void add_strip_row(const CrossSection& section, const Strip& strip, const ImpedanceConditions& conditions,
                   Eigen::MatrixXcd& impedance, Eigen::MatrixXd& capacitance, Eigen::MatrixXd& conductance) {
  capacitance = with_reference_row(capacitance, strip_capacitance(strip.width, strip.height));
  conductance = with_reference_row(conductance, 0.0);

  const Eigen::Index n = impedance.rows();
  const EarthReturn earth = earth_return(conditions.frequency, conditions.earth_resistivity);
  const double x_per_log = 2 * pi * conditions.frequency * k_mu_0 / (2 * pi);  // ohm/m
  const auto external = [&](double log_distance) {
    return std::complex<double>(earth.resistance, x_per_log * (std::log(earth.depth) - log_distance));
  };
  impedance.conservativeResize(n + 1, n + 1);
  for (Eigen::Index i = 0; i < n; ++i) {
    const auto wires = static_cast<Eigen::Index>(section.conductors.size());
    const Eigen::Vector2d centre =
        i < wires ? section.conductors[i].centre : section.shells[i - wires].centre;
    impedance(i, n) = external(mean_log_distance_to_strip(strip.width, centre.x(), centre.y()));
    impedance(n, i) = impedance(i, n);
  }
  const double resistance = (1 + strip.metal.temperature_coefficient * (conditions.temperature - 20)) /
                            (strip.metal.conductivity * strip.metal_area);
  impedance(n, n) = resistance + external(std::log(0.2235 * (strip.width + strip.thickness)));
}

}  // namespace engine
