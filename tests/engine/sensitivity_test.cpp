#include "engine/sensitivity.h"

#include <gtest/gtest.h>

#include <cmath>
#include <complex>
#include <functional>
#include <memory>
#include <numbers>

#include "tests/engine/sample_networks.h"

namespace engine {
namespace {

using testing::random_building;
using testing::Sample;

constexpr Complex k_meter{3e5, -2e5};  // ohm, near the source impedances of floating wires

Complex shown(const Network& network, int a, int b) {
  const SolvedNetwork solved(network);
  return solved.volts(a, b) * k_meter / (k_meter + solved.source_impedance(a, b));
}

Observable observable(const SolvedNetwork& solved, int a, int b) {
  const Complex v = solved.volts(a, b);
  const Complex z = solved.source_impedance(a, b);
  return {a, b, k_meter / (k_meter + z), -v * k_meter / std::pow(k_meter + z, 2)};
}

/// Central differences of the whole solution, Richardson's extrapolation over two steps.
Complex difference(const Network& network, int a, int b, const std::function<void(Network&, double)>& change,
                   double step) {
  const auto slope = [&](double h) {
    Network up = network;
    Network down = network;
    change(up, h);
    change(down, -h);
    return (shown(up, a, b) - shown(down, a, b)) / (2 * h);
  };
  return (4.0 * slope(step / 2) - slope(step)) / 3.0;
}

// The promise of the header, for parameters of every kind. Steps of 1e-3 relative: their truncation is of the
// order 1e-12, the solution holds 1e-10, so the difference of two holds some 1e-7.
TEST(Sensitivity, AgreesWithFiniteDifferences) {
  const Sample sample = random_building(3, 10);
  const Network& network = sample.network;
  const SolvedNetwork solved(network);
  for (const int a : {sample.floating.front(), sample.floating[sample.floating.size() / 2]}) {
    const Sensitivity by(solved, observable(solved, a, 0));
    const double size = std::abs(shown(network, a, 0));
    for (int l = 0; l < static_cast<int>(network.lines.size()); l += 3) {
      const LineMatrices& matrices = *network.lines[l].matrices;
      const Eigen::Index n = matrices.capacitance.rows();
      const double omega = 2 * std::numbers::pi * network.frequency;
      for (const auto& [i, j] : {std::pair<Eigen::Index, Eigen::Index>{0, 0}, {0, n - 1}, {1, 2}}) {
        Eigen::MatrixXd direction = Eigen::MatrixXd::Zero(n, n);
        direction(i, j) = direction(j, i) = matrices.capacitance(i, i);
        const auto capacitance = [&, l](Network& changed, double h) {
          auto moved = std::make_shared<LineMatrices>(*changed.lines[l].matrices);
          moved->capacitance += h * direction;
          changed.lines[l].matrices = moved;
        };
        const Complex expected =
            by.by_shunt(l).cwiseProduct(Complex(0, omega) * direction.cast<Complex>()).sum();
        EXPECT_LT(std::abs(difference(network, a, 0, capacitance, 1e-3) - expected), 1e-6 * size) << l;
        const Eigen::MatrixXcd along =
            direction.cast<Complex>() * (matrices.impedance(i, i) / matrices.capacitance(i, i));
        const auto impedance = [&, l](Network& changed, double h) {
          auto moved = std::make_shared<LineMatrices>(*changed.lines[l].matrices);
          moved->impedance += h * along;
          changed.lines[l].matrices = moved;
        };
        EXPECT_LT(std::abs(difference(network, a, 0, impedance, 1e-3) -
                           by.by_impedance(l).cwiseProduct(along).sum()),
                  1e-6 * size)
            << l;
      }
      const auto length = [l](Network& changed, double h) { changed.lines[l].length *= 1 + h; };
      const Complex expected = by.by_length(l) * network.lines[l].length;
      EXPECT_LT(std::abs(difference(network, a, 0, length, 1e-3) - expected), 1e-6 * size) << l;
    }
    for (int e = 0; e < static_cast<int>(network.elements.size()); ++e) {
      const auto admittance = [e](Network& changed, double h) { changed.elements[e].admittance *= 1 + h; };
      EXPECT_LT(std::abs(difference(network, a, 0, admittance, 1e-3) -
                         by.by_element(e) * network.elements[e].admittance),
                1e-6 * size)
          << e;
    }
    for (int s = 0; s < static_cast<int>(network.sources.size()); ++s) {
      const auto emf = [s](Network& changed, double h) { changed.sources[s].volts *= 1 + h; };
      EXPECT_LT(std::abs(difference(network, a, 0, emf, 1e-3) - by.by_emf(s) * network.sources[s].volts),
                1e-6 * size)
          << s;
    }
  }
}

// What is linear in its sources is the sum of its derivatives by them, times them (Euler).
TEST(Sensitivity, BySourcesAddsUpToTheReading) {
  const Sample sample = random_building(5, 12);
  const SolvedNetwork solved(sample.network);
  for (std::size_t k = 0; k < sample.floating.size(); k += 5) {
    const int a = sample.floating[k];
    const Sensitivity by(solved, observable(solved, a, 0));
    Complex sum = 0.0;
    for (std::size_t s = 0; s < sample.network.sources.size(); ++s)
      sum += by.by_emf(static_cast<int>(s)) * sample.network.sources[s].volts;
    const Complex reading = shown(sample.network, a, 0);
    EXPECT_LT(std::abs(sum - reading), 1e-8 * std::abs(reading)) << a;
  }
}

}  // namespace
}  // namespace engine
