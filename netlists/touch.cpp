#include "netlists/touch.h"

#include <Eigen/QR>
#include <numbers>

namespace netlists {
namespace {

using Complex = std::complex<double>;

constexpr double k_skin_ohms = 1500.0;
constexpr double k_skin_farads = 0.22e-6;
constexpr double k_inner_ohms = 500.0;
constexpr double k_same_point = 1e-7;  // of the largest impedance: below it two conductors are one point

// Zones of IEC 60479-1 for a current that lasts ten seconds and more; from memory.
constexpr double k_perception = 0.5e-3;   // A
constexpr double k_strong = 5e-3;         // A
constexpr double k_fibrillation = 35e-3;  // A

}  // namespace

Complex body_impedance(double frequency) {
  const Complex skin(1 / k_skin_ohms, 2 * std::numbers::pi * frequency * k_skin_farads);
  return k_inner_ohms + 1.0 / skin;
}

Touch single_touch(const TouchPorts& ports, Complex body) {
  Touch most;
  for (int i = 0; i < ports.volts.size(); ++i) {
    const double current = std::abs(ports.volts(i) / (ports.impedance(i, i) + body));
    if (most.first < 0 || current > most.current) most = {current, i, -1};
  }
  return most;
}

Touch joint_touch(const TouchPorts& ports, Complex body) {
  if (ports.volts.size() == 0) return {};
  Eigen::CompleteOrthogonalDecomposition<Eigen::MatrixXcd> inverse;
  inverse.setThreshold(k_same_point);
  inverse.compute(ports.impedance);
  const Complex short_circuit = inverse.solve(ports.volts).sum();
  const Complex admittance = inverse.solve(Eigen::VectorXcd::Ones(ports.volts.size())).sum();
  return {std::abs(short_circuit / (1.0 + body * admittance)), -1, -1};
}

Touch pair_touch(const TouchPorts& ports, Complex body) {
  Touch most;
  for (int i = 0; i < ports.volts.size(); ++i) {
    for (int j = i + 1; j < ports.volts.size(); ++j) {
      const Complex between = ports.impedance(i, i) + ports.impedance(j, j) - 2.0 * ports.impedance(i, j);
      const double current = std::abs((ports.volts(i) - ports.volts(j)) / (between + body));
      if (most.first < 0 || current > most.current) most = {current, i, j};
    }
  }
  return most;
}

std::string body_zone(double current) {
  if (current >= k_fibrillation) return "zone AC-4: may kill";
  if (current >= k_strong) return "zone AC-3: strong cramp, may not be able to let go";
  if (current >= k_perception) return "zone AC-2: felt, muscles may jerk";
  return "zone AC-1: perhaps just felt";
}

}  // namespace netlists
