#include "engine/proximity.h"

#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>

#include "engine/constants.h"
#include "engine/harmonic_orders.h"
#include "engine/harmonics.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Eigen::Index;
using Eigen::MatrixXcd;
using Eigen::MatrixXd;

constexpr double k_tolerance = 1e-5;  // of what is added
constexpr double k_most_order = 40;   // enough for bare wires a hundredth of a radius apart
constexpr double k_thin = 0.25;       // radius over skin depth: the fourth power of it over 4 is 1e-3

// (gamma b)^2, gamma the propagation constant of metal that spreads the dc resistance over the circle.
double squared_argument(const EddyWire& wire, double frequency) {
  return 2 * frequency * k_mu_0 * wire.permeability / wire.resistance;
}

// gamma b is its root times the root of j, and twice the square of radius over skin depth is its magnitude.
bool has_eddies(const EddyWire& wire, double frequency) {
  return wire.resistance > 0.0 &&
         (squared_argument(wire, frequency) / 2 > k_thin * k_thin || wire.permeability > 1.0);
}

// Outgoing over incoming harmonics n = 1..order of the vector potential: with x = gamma b,
// (n (mu - 1) - x I_{n+1}/I_n) / (n (mu + 1) + x I_{n+1}/I_n), the ratios of Bessel functions by their
// recurrence from far beyond, where they vanish.
Eigen::VectorXcd reflection(const EddyWire& wire, double frequency, int order) {
  const Complex x = std::sqrt(Complex(0.0, squared_argument(wire, frequency)));
  const int beyond = order + 30 + static_cast<int>(std::ceil(1.5 * std::abs(x)));
  Eigen::VectorXcd result(order);
  Complex ratio = 0.0;  // I_{n+1} / I_n
  for (int n = beyond; n >= 1; --n) {
    ratio = 1.0 / (2.0 * (n + 1) / x + ratio);
    if (n <= order)
      result(n - 1) = (n * (wire.permeability - 1) - x * ratio) / (n * (wire.permeability + 1) + x * ratio);
  }
  return result;
}

std::vector<HarmonicCircle> circles_of(const std::vector<EddyWire>& wires, double frequency) {
  std::vector<FacingCircle> facing;
  for (const EddyWire& w : wires) facing.push_back({{w.centre.x(), w.centre.y()}, w.radius, w.radius, 1.0});
  std::vector<HarmonicCircle> circles;
  for (size_t i = 0; i < wires.size(); ++i) {
    int order = 0;
    if (has_eddies(wires[i], frequency))
      order = static_cast<int>(
          std::ceil(std::min(needed_order(facing, i, false, {}, k_tolerance), k_most_order)));
    circles.push_back({facing[i].centre, wires[i].radius, {order, order, order}});
  }
  return circles;
}

void require_apart(const std::vector<EddyWire>& wires) {
  for (size_t i = 0; i < wires.size(); ++i)
    for (size_t j = 0; j < i; ++j)
      if ((wires[i].centre - wires[j].centre).norm() < wires[i].radius + wires[j].radius)
        throw std::invalid_argument("conductors " + std::to_string(j) + " and " + std::to_string(i) +
                                    " overlap");
}

}  // namespace

MatrixXcd proximity_impedance(const std::vector<EddyWire>& wires, double frequency) {
  require_apart(wires);
  const auto n = static_cast<Index>(wires.size());
  const std::vector<HarmonicCircle> circles = circles_of(wires, frequency);
  const HarmonicLayout layout(circles);
  const Index harmonics = layout.size() - n;
  if (harmonics == 0) return MatrixXcd::Zero(n, n);
  MatrixXd lower = MatrixXd::Zero(layout.size(), layout.size());
  add_direct(lower, layout, circles, 1.0);
  const MatrixXd potentials = lower.selfadjointView<Eigen::Lower>();
  Eigen::VectorXcd reflections = Eigen::VectorXcd::Zero(harmonics);
  for (size_t i = 0; i < wires.size(); ++i) {
    if (circles[i].order() == 0) continue;
    const Eigen::VectorXcd one = reflection(wires[i], frequency, circles[i].order());
    for (int m = 0; m < circles[i].order(); ++m)
      for (const Index part : {0, 1}) reflections(layout.row[i][static_cast<size_t>(m)] - n + part) = one(m);
  }
  // Currents S of the harmonics: S = G (T S + T_q I); seen from the axes they add T_q' S.
  const MatrixXcd drive = potentials.bottomLeftCorner(harmonics, n).cast<Complex>();
  MatrixXcd system =
      -(reflections.asDiagonal() * potentials.bottomRightCorner(harmonics, harmonics).cast<Complex>());
  system.diagonal().array() += 1.0;
  const MatrixXcd added = drive.transpose() * system.partialPivLu().solve(reflections.asDiagonal() * drive);
  return Complex(0.0, frequency * k_mu_0) * (added + added.transpose()) / 2.0;
}

}  // namespace engine
