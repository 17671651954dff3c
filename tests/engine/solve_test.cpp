#include "engine/solve.h"

#include <gtest/gtest.h>

#include <cmath>
#include <complex>
#include <memory>
#include <numbers>
#include <random>
#include <vector>

#include "tests/engine/nodal_reference.h"
#include "tests/engine/sample_networks.h"

namespace engine {
namespace {

using testing::hard_case;
using testing::NodalReference;
using testing::random_building;
using testing::Sample;
using testing::Wide;

constexpr double k_omega = 2 * std::numbers::pi * 60.0;  // rad/s
constexpr Complex k_j{0, 1};

template <typename Real>
Complex narrow(const std::complex<Real>& value) {
  return {static_cast<double>(value.real()), static_cast<double>(value.imag())};
}

double relative_error(Complex found, Complex expected) {
  return std::abs(found - expected) / std::abs(expected);
}

/// n conductors without mutual coupling but for `mutual` farads a metre between neighbours.
std::shared_ptr<const LineMatrices> plain_matrices(int n, Complex impedance, double to_earth, double mutual) {
  LineMatrices matrices{impedance * Eigen::MatrixXcd::Identity(n, n),
                        to_earth * Eigen::MatrixXd::Identity(n, n), Eigen::MatrixXd::Zero(n, n)};
  for (int i = 0; i + 1 < n; ++i) {
    matrices.capacitance(i, i) += mutual;
    matrices.capacitance(i + 1, i + 1) += mutual;
    matrices.capacitance(i, i + 1) -= mutual;
    matrices.capacitance(i + 1, i) -= mutual;
  }
  return std::make_shared<LineMatrices>(std::move(matrices));
}

struct Errors {
  double volts = 0, emf = 0, source_impedance = 0;
};

/// Worst relative errors of `found` volts and impedances against the many-digit answer.
template <typename Volts, typename Emf, typename Impedance>
Errors worst_errors(const Sample& sample, const Volts& volts, const Emf& emf, const Impedance& impedance) {
  const NodalReference<Wide> reference(sample.network);
  const auto exact = reference.volts();
  Errors worst;
  for (int node = 1; node < sample.network.node_count; ++node)
    worst.volts = std::max(worst.volts, relative_error(volts(node), narrow(exact[node])));
  for (const auto& [a, b] : sample.segments)
    worst.emf = std::max(worst.emf, relative_error(emf(a, b), narrow(exact[a] - exact[b])));
  const int last = static_cast<int>(sample.floating.size()) - 1;
  for (const auto& [i, j] : {std::pair{0, last}, std::pair{last / 2, last / 3}, std::pair{0, -1}}) {
    const int a = sample.floating[i], b = j < 0 ? 0 : sample.floating[j];
    const auto response = reference.response(a, b);
    worst.source_impedance =
        std::max(worst.source_impedance, relative_error(impedance(a, b), narrow(response[a] - response[b])));
  }
  return worst;
}

Errors worst_errors(const Sample& sample) {
  const SolvedNetwork solved(sample.network);
  EXPECT_LT(solved.residual(), 1e-14);
  EXPECT_TRUE(solved.undetermined().empty());
  return worst_errors(
      sample, [&](int node) { return solved.volts(node); }, [&](int a, int b) { return solved.volts(a, b); },
      [&](int a, int b) { return solved.source_impedance(a, b); });
}

void expect_promised(const Errors& errors) {
  EXPECT_LT(errors.volts, 1e-10);  // the promises of solve.h
  EXPECT_LT(errors.source_impedance, 1e-10);
  EXPECT_LT(errors.emf, 1e-8);
}

// Against plain nodal analysis in 45 digits, which shares no formulation with the engine.
TEST(SolvedNetwork, MatchesManyDigitsOnRandomBuildings) {
  for (unsigned seed = 1; seed <= 6; ++seed) {
    SCOPED_TRACE(seed);
    expect_promised(worst_errors(random_building(seed, seed == 6 ? 28 : 12)));
  }
}

// A whole building that no electrode ties to earth: one island, live, on capacitance alone.
TEST(SolvedNetwork, MatchesManyDigitsOnAnIsolatedBuilding) {
  Sample sample = random_building(51, 12);
  ASSERT_EQ(sample.network.elements[0].b, 0);
  sample.network.elements[0].admittance = 1e-9;
  expect_promised(worst_errors(sample));
}

// Both sides of what counts as strong, 1e-4 S: wires of kilosiemens that hang on such loads, on a source of
// that impedance, and two islands that such a load joins while only picofarads tie them to earth.
TEST(SolvedNetwork, MatchesManyDigitsAtTheEdgeOfStrong) {
  for (const double load : {0.9e-4, 1.1e-4}) {  // S
    SCOPED_TRACE(load);
    Sample sample = hard_case();
    Network& network = sample.network;
    const auto& wires = sample.wires;
    for (Line& line : network.lines) line.length = 0.5;
    network.elements.push_back({wires[0].back(), wires[2].back(), load});
    network.elements.push_back({wires[4].back(), wires[5].front(), load});
    network.node_count += 1;
    network.sources.push_back({network.node_count - 1, 0, {30.0, 40.0}, 1 / load});
    network.elements.push_back({network.node_count - 1, wires[2].front(), 50.0});
    expect_promised(worst_errors(sample));
  }
}

TEST(SolvedNetwork, MatchesManyDigitsWherePlainNodalAnalysisFails) {
  const Sample sample = hard_case();
  expect_promised(worst_errors(sample));
  const NodalReference<double> nodal(sample.network);
  const auto plain = nodal.volts();
  const Errors errors = worst_errors(
      sample, [&](int node) { return plain[node]; }, [&](int a, int b) { return plain[a] - plain[b]; },
      [&](int a, int b) { return nodal.response(a, b)[a] - nodal.response(a, b)[b]; });
  EXPECT_GT(errors.volts, 1e-9);  // so the island basis is needed
  EXPECT_GT(errors.source_impedance, 1e-9);
}

// A floating wire beside a live one: V = U C12 / (C12 + C20), the capacitive divider of any textbook.
TEST(SolvedNetwork, FloatingWireIsACapacitiveDivider) {
  const double c12 = 60e-12, c20 = 40e-12, length = 25;  // F/m, F/m, m
  Network network;
  network.node_count = 5;
  network.lines.push_back({plain_matrices(2, {5e-3, 1e-3}, c20, c12), length, 1, {1, 2}, {3, 4}});
  network.sources.push_back({1, 0, 120.0, 1e-6});
  const SolvedNetwork solved(network);
  // The charging current drops 1e-5 A * 0.13 ohm along the wires: 1e-8 of the volts.
  EXPECT_NEAR(std::abs(solved.volts(2)), 120.0 * c12 / (c12 + c20), 1e-5);
  const Complex source = 1.0 / (k_j * k_omega * (c12 + c20) * length);
  EXPECT_LT(relative_error(solved.source_impedance(2, 0), source), 1e-6);
}

// Loading rule: a meter of resistance R reads 0.707 of the open-circuit volts where the reactance of the
// floating wire's capacitance equals R. Capacitances at 60 Hz: C = 1 / (2 pi f R), for 10 Mohm 0.265 nF,
// 1 Mohm 2.65 nF, 300 kohm 8.8 nF, 10 kohm 265 nF, 3 kohm 884 nF, to the digits given.
TEST(SolvedNetwork, MeterLoadsTheDivider) {
  const std::vector<std::pair<double, double>> table = {
      {10e6, 0.265e-9}, {1e6, 2.65e-9}, {300e3, 8.84e-9}, {10e3, 265e-9}, {3e3, 884e-9}};  // ohm, F
  for (const auto& [resistance, capacitance] : table) {
    SCOPED_TRACE(resistance);
    Network network;
    network.node_count = 5;
    const double length = 30;  // m
    const double half = capacitance / 2 / length;
    network.lines.push_back({plain_matrices(2, {5e-3, 1e-3}, half, half), length, 1, {1, 2}, {3, 4}});
    network.sources.push_back({1, 0, 120.0, 1e-6});
    const double open = std::abs(SolvedNetwork(network).volts(4));
    network.elements.push_back({4, 0, 1 / resistance});
    const double read = std::abs(SolvedNetwork(network).volts(4));
    EXPECT_NEAR(read / open, std::numbers::sqrt2 / 2, 1.5e-3);  // the table gives three digits
  }
}

// A ladder of equal resistors, 1 ohm along and 1 ohm across: from the far end volts and amperes in turn are
// the Fibonacci numbers (1 V; 1 A; 2 V; 3 A; 5 V; ...), each the sum of the two before it, by Kirchhoff's
// laws.
TEST(SolvedNetwork, ResistiveLadderGivesFibonacciNumbers) {
  Network network;
  const int rungs = 4;
  network.node_count = 2 + rungs;
  const auto wire = plain_matrices(1, 1.0, 0, 0);
  for (int rung = 0; rung < rungs; ++rung) {
    network.lines.push_back({wire, 1.0, 1, {1 + rung}, {2 + rung}});
    network.elements.push_back({2 + rung, 0, 1.0});
  }
  network.sources.push_back({1, 0, 34.0, 1e-12});
  const SolvedNetwork solved(network);
  const double fibonacci[] = {34, 13, 5, 2, 1};
  for (int i = 0; i <= rungs; ++i) EXPECT_NEAR(solved.volts(1 + i).real(), fibonacci[i], 1e-9);
  EXPECT_NEAR(solved.current(0, 0).real(), 21, 1e-9);
}

// Faraday: the open-circuit EMF along a wire beside a current is its mutual impedance times the current.
TEST(SolvedNetwork, EmfAlongAnOpenWireIsMutualImpedanceTimesCurrent) {
  auto matrices = std::make_shared<LineMatrices>(*plain_matrices(2, {5e-3, 1e-3}, 1e-30, 0));
  const Complex mutual = k_j * k_omega * 4e-7;  // ohm/m
  matrices->impedance(0, 1) = matrices->impedance(1, 0) = mutual;
  Network network;
  network.node_count = 5;
  const double length = 20;  // m
  network.lines.push_back({matrices, length, 1, {1, 2}, {3, 4}});
  network.sources.push_back({1, 0, 120.0, 1e-3});
  network.elements.push_back({3, 0, 1.0 / 12.0});
  const SolvedNetwork solved(network);
  const Complex current = 120.0 / (Complex(12.0 + 1e-3) + matrices->impedance(0, 0) * length);
  EXPECT_LT(relative_error(solved.current(0, 0), current), 1e-13);
  EXPECT_LT(relative_error(solved.volts(2, 4), mutual * length * current), 1e-12);
}

// A line of n cells is n lines of one cell.
TEST(SolvedNetwork, CellsAreShortLinesInARow) {
  std::mt19937 random(3);
  const auto matrices = testing::random_matrices(random, 2, 60);
  Network whole;
  whole.node_count = 5;
  whole.lines.push_back({matrices, 30e3, 3, {1, 2}, {3, 4}});
  whole.sources.push_back({1, 0, 120.0, 0.01});
  Network parts = whole;
  parts.node_count = 9;
  parts.lines = {{matrices, 10e3, 1, {1, 2}, {5, 6}},
                 {matrices, 10e3, 1, {5, 6}, {7, 8}},
                 {matrices, 10e3, 1, {7, 8}, {3, 4}}};
  const SolvedNetwork a(whole), b(parts);
  for (int node = 1; node < 5; ++node) EXPECT_LT(relative_error(a.volts(node), b.volts(node)), 1e-13);
  for (int cell = 0; cell < 3; ++cell)
    EXPECT_LT(relative_error(a.current(0, 0, cell), b.current(cell, 0)), 1e-10);
}

// Conductors of a line may share nodes, and one may end where it begins: a closed loop, in which the
// induced EMF drives a current that meets the loop's own impedance alone.
TEST(SolvedNetwork, TakesSharedNodesAndLoops) {
  auto matrices = std::make_shared<LineMatrices>(*plain_matrices(2, {5e-3, 1e-3}, 1e-12, 0));
  const Complex mutual = k_j * k_omega * 4e-7;  // ohm/m
  matrices->impedance(0, 1) = matrices->impedance(1, 0) = mutual;
  Network network;
  network.node_count = 4;
  network.lines.push_back({matrices, 20.0, 1, {1, 3}, {2, 3}});
  network.sources.push_back({1, 0, 120.0, 1e-3});
  network.elements.push_back({2, 0, 0.1});
  const SolvedNetwork solved(network);
  const Complex expected = -mutual * solved.current(0, 0) / matrices->impedance(1, 1);
  EXPECT_LT(relative_error(solved.current(0, 1), expected), 1e-12);

  Sample shared{network, {3}, {}, {}};
  shared.network.lines.push_back({matrices, 7.0, 2, {1, 1}, {2, 2}});
  const auto exact = NodalReference<Wide>(shared.network).volts();
  const SolvedNetwork again(shared.network);
  for (int node = 1; node < 3; ++node)
    EXPECT_LT(relative_error(again.volts(node), narrow(exact[node])), 1e-12);
}

// Three EMFs in a ring that do not quite close drive a current: 3 V over 3 * 0.5 ohm.
TEST(SolvedNetwork, SourcesInARingNeedNotClose) {
  Network network;
  network.node_count = 4;
  network.sources = {{1, 2, {240.0, 0}, 0.5}, {2, 3, {-120.0, 200.0}, 0.5}, {3, 1, {-117.0, -200.0}, 0.5}};
  network.elements.push_back({1, 0, 1.0});
  const SolvedNetwork solved(network);
  EXPECT_NEAR(std::abs(solved.volts(1)), 0.0, 1e-12);
  EXPECT_LT(std::abs(solved.volts(1, 2) - Complex(239.0, 0)), 1e-10);  // 240 V less 2 A in 0.5 ohm
}

// An isolated supply with nothing to earth at all: potentials undetermined, its own voltage is not.
TEST(SolvedNetwork, ReportsWhatNothingTiesToEarth) {
  Network network;
  network.node_count = 7;
  network.lines.push_back({plain_matrices(1, 0.1, 0, 0), 1.0, 1, {1}, {2}});
  network.sources.push_back({1, 3, 120.0, 0.1});
  network.elements.push_back({2, 4, k_j * k_omega * 1e-9});  // ties two islands to each other only
  network.sources.push_back({5, 0, 60.0, 1.0});
  const SolvedNetwork solved(network);
  EXPECT_EQ(solved.undetermined(), (std::vector<int>{1, 2, 3, 4, 6}));
  EXPECT_TRUE(std::isnan(solved.volts(2).real()));
  EXPECT_TRUE(std::isnan(solved.volts(2, 5).real()));
  EXPECT_TRUE(std::isnan(solved.source_impedance(2, 0).real()));
  EXPECT_TRUE(std::isnan(solved.source_impedances(std::vector{std::pair{2, 0}})[0].real()));
  EXPECT_NEAR(solved.volts(5).real(), 60.0, 1e-12);
  EXPECT_NEAR(solved.volts(2, 3).real(), 120.0, 1e-12);
  EXPECT_LT(relative_error(solved.source_impedance(4, 3), 0.2 + 1.0 / (k_j * k_omega * 1e-9)), 1e-12);
}

// Reciprocity: what 1 A at a does at b, 1 A at b does at a.
TEST(SolvedNetwork, TransferImpedancesAreReciprocal) {
  const Sample sample = random_building(11, 20);
  const SolvedNetwork solved(sample.network);
  const int count = sample.network.node_count;
  for (int trial = 0; trial < 12; ++trial) {
    const int a = 1 + trial * 7 % (count - 1), b = 1 + (trial * 29 + 5) % (count - 1);
    const Complex ab = solved.response(a, 0)[b], ba = solved.response(b, 0)[a];
    EXPECT_LT(std::abs(ab - ba), 1e-10 * std::abs(ab)) << a << ' ' << b;
  }
}

// The response to 1 A between two nodes gives their source impedance.
TEST(SolvedNetwork, ResponseAgreesWithSourceImpedance) {
  const Sample sample = random_building(12, 10);
  const SolvedNetwork solved(sample.network);
  const int a = sample.floating.front(), b = sample.floating.back();
  const Eigen::VectorXcd response = solved.response(a, b);
  EXPECT_LT(relative_error(response[a] - response[b], solved.source_impedance(a, b)), 1e-10);
}

// Two ways to one answer: read off the factors, and a refined solution for each pair.
TEST(SolvedNetwork, ManySourceImpedancesAgreeWithEach) {
  for (const Sample& sample : {random_building(13, 14), hard_case()}) {
    const SolvedNetwork solved(sample.network);
    std::vector<std::pair<int, int>> pairs = sample.segments;
    for (const int node : sample.floating) pairs.emplace_back(node, 0);
    pairs.emplace_back(sample.floating[0], sample.floating[0]);
    const std::vector<Complex> impedances = solved.source_impedances(pairs);
    EXPECT_EQ(impedances.back(), Complex{});
    for (std::size_t i = 0; i + 1 < pairs.size(); ++i) {
      const Complex expected = solved.source_impedance(pairs[i].first, pairs[i].second);
      EXPECT_LT(std::abs(impedances[i] - expected), 1e-9 * std::abs(expected)) << i;  // as solve.h promises
    }
  }
}

// Power balance: what the EMFs give is what wires, shunts, elements and sources' impedances take.
TEST(SolvedNetwork, SourcesGiveWhatTheRestTakes) {
  for (unsigned seed = 21; seed < 25; ++seed) {
    Sample sample = random_building(seed, 15);
    for (Line& line : sample.network.lines) line.cells = 1;
    const Network& network = sample.network;
    const SolvedNetwork solved(network);
    Complex given, taken;
    for (const Source& source : network.sources) {
      const Complex current = (source.volts - solved.volts(source.a, source.b)) / source.impedance;
      given += source.volts * std::conj(current);
      taken += source.impedance * std::norm(current);
    }
    for (const Element& element : network.elements)
      taken += std::conj(element.admittance) * std::norm(solved.volts(element.a, element.b));
    for (int i = 0; i < static_cast<int>(network.lines.size()); ++i) {
      const Line& line = network.lines[i];
      const int n = static_cast<int>(line.from.size());
      Eigen::VectorXcd currents(n), from(n), to(n);
      for (int k = 0; k < n; ++k) {
        currents[k] = solved.current(i, k);
        from[k] = solved.volts(line.from[k]);
        to[k] = solved.volts(line.to[k]);
      }
      const Eigen::MatrixXcd shunt =
          0.5 * line.length * (line.matrices->conductance + k_j * k_omega * line.matrices->capacitance);
      taken += currents.dot(line.matrices->impedance * line.length * currents);
      taken += std::conj(from.dot(shunt * from)) + std::conj(to.dot(shunt * to));
    }
    EXPECT_LT(std::abs(given - taken), 1e-12 * std::abs(given)) << seed;
  }
}

// Superposition: the EMFs together give the sum of what each gives alone.
TEST(SolvedNetwork, SuperposesItsSources) {
  const Sample sample = random_building(31, 12);
  const SolvedNetwork all(sample.network);
  std::vector<Complex> sum(sample.network.node_count);
  for (std::size_t alone = 0; alone < sample.network.sources.size(); ++alone) {
    Network network = sample.network;
    for (std::size_t i = 0; i < network.sources.size(); ++i)
      if (i != alone) network.sources[i].volts = 0;
    const SolvedNetwork one(network);
    for (int node = 0; node < network.node_count; ++node) sum[node] += one.volts(node);
  }
  for (int node = 1; node < sample.network.node_count; ++node)
    EXPECT_LT(std::abs(sum[node] - all.volts(node)), 1e-11 * 120.0) << node;
}

}  // namespace
}  // namespace engine
