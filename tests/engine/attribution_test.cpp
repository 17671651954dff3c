#include "engine/attribution.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <functional>
#include <memory>
#include <numbers>
#include <optional>
#include <stdexcept>
#include <string>
#include <vector>

#include "tests/engine/sample_networks.h"

namespace engine {
namespace {

using testing::hard_case;
using testing::random_building;
using testing::Sample;

constexpr double k_omega = 2 * std::numbers::pi * 60.0;  // rad/s
constexpr Complex k_j{0, 1};

/// Every wire of a sample is a group of its own, what is on no wire another; the floating ones are victims.
Aggressors aggressors_of(const Sample& sample) {
  const Network& network = sample.network;
  const int supply = static_cast<int>(sample.wires.size());
  Aggressors result{
      std::vector<int>(network.node_count, supply), {}, std::vector<int>(network.sources.size())};
  for (int wire = 0; wire < supply; ++wire)
    for (std::size_t i = 1; i < sample.wires[wire].size(); ++i) result.of_node[sample.wires[wire][i]] = wire;
  for (const int node : sample.floating) result.of_node[node] = -1;
  for (const auto& [a, b] : sample.segments) result.of_node[a] = result.of_node[b] = -1;
  for (const Line& line : network.lines) {
    std::vector<int>& groups = result.of_segment.emplace_back();
    for (const int node : line.to) groups.push_back(result.of_node[node]);
  }
  for (std::size_t i = 0; i < network.sources.size(); ++i) result.of_source[i] = 1000 + static_cast<int>(i);
  return result;
}

Complex sum_of(const std::vector<Contribution>& contributions) {
  Complex sum;
  for (const Contribution& contribution : contributions) sum += contribution.volts;
  return sum;
}

std::optional<Complex> volts_of(const std::vector<Contribution>& contributions, int group, Path path) {
  for (const Contribution& contribution : contributions)
    if (contribution.group == group && contribution.path == path) return contribution.volts;
  return std::nullopt;
}

void expect_sum(const SolvedNetwork& solved, const Attribution& attribution, int a, int b) {
  const std::vector<Contribution> contributions = attribution.contributions(a, b);
  const Complex volts = solved.volts(a, b);
  EXPECT_LT(std::abs(sum_of(contributions) - volts), 1e-9 * std::abs(volts)) << a << ' ' << b << ' ' << volts;
  EXPECT_TRUE(std::is_sorted(contributions.begin(), contributions.end(), [](const auto& x, const auto& y) {
    return std::abs(x.volts) > std::abs(y.volts);
  }));
}

// The promise of the header: against earth, against aggressors (live ones and ground), against victims.
TEST(Attribution, AddsUpOnRandomBuildings) {
  for (unsigned seed = 1; seed <= 8; ++seed) {
    SCOPED_TRACE(seed);
    const Sample sample = random_building(seed, 14);
    const SolvedNetwork solved(sample.network);
    const Attribution attribution(solved, aggressors_of(sample));
    const int ground = 1, bus = sample.network.sources[0].a, count = static_cast<int>(sample.floating.size());
    for (int i = 0; i < count; i += 3) {
      const int a = sample.floating[i], victim = sample.floating[(i + count / 2) % count];
      for (const int b : {0, ground, bus, victim})
        if (a != b) expect_sum(solved, attribution, a, b);
    }
  }
}

// An EMF of microvolts along a floating wire is explained to 1e-9 of itself, not of the volts it stands at.
TEST(Attribution, AddsUpAlongFloatingWires) {
  for (const Sample& sample : {random_building(41, 14), hard_case()}) {
    const SolvedNetwork solved(sample.network);
    const Attribution attribution(solved, aggressors_of(sample));
    for (const auto& [a, b] : sample.segments) expect_sum(solved, attribution, a, b);
  }
}

/// Two live wires, a floating one beside them. Nodes: 1, 2, 3 at the start, 4, 5, 6 at the end.
struct Trio {
  double c13 = 50e-12, c23 = 20e-12, c30 = 30e-12;                 // F/m
  Complex z13 = k_j * k_omega * 5e-7, z23 = k_j * k_omega * 3e-7;  // ohm/m
  double length = 20;                                              // m
  Network network;
  Aggressors aggressors{{-1, 1, 2, -1, 1, 2, -1}, {{1, 2, -1}}, {1, 2}};

  Trio() {
    LineMatrices matrices{Eigen::MatrixXcd::Zero(3, 3), Eigen::MatrixXd::Zero(3, 3),
                          Eigen::MatrixXd::Zero(3, 3)};
    matrices.impedance.diagonal().setConstant({5e-3, 1e-3});
    matrices.impedance(0, 2) = matrices.impedance(2, 0) = z13;
    matrices.impedance(1, 2) = matrices.impedance(2, 1) = z23;
    matrices.capacitance << c13, 0, -c13, 0, c23, -c23, -c13, -c23, c13 + c23 + c30;
    network.node_count = 7;
    network.lines.push_back({std::make_shared<LineMatrices>(matrices), length, 1, {1, 2, 3}, {4, 5, 6}});
    network.sources = {{1, 0, 120.0, 0.01}, {2, 0, std::polar(120.0, 2.0), 0.01}};
    network.elements = {{4, 0, 0.1}, {5, 0, 0.05}};
  }
};

// Closed forms: the divider splits the electric part as C13 : C23, the EMF along the wire is z I of each.
TEST(Attribution, SplitsTheDividerAndTheEmf) {
  const Trio trio;
  const SolvedNetwork solved(trio.network);
  const Attribution attribution(solved, trio.aggressors);
  const auto middle = [&](int from, int to) { return 0.5 * (solved.volts(from) + solved.volts(to)); };
  const double c = trio.c13 + trio.c23 + trio.c30;

  const auto at_start = attribution.contributions(3, 0), at_end = attribution.contributions(6, 0);
  for (const auto& [group, expected] :
       {std::pair{1, trio.c13 / c * middle(1, 4)}, {2, trio.c23 / c * middle(2, 5)}}) {
    const Complex mean = 0.5 * (volts_of(at_start, group, Path::electric).value() +
                                volts_of(at_end, group, Path::electric).value());
    EXPECT_LT(std::abs(mean - expected), 1e-8 * std::abs(expected));  // charging drops 1e-9 of the volts
  }
  const auto along = attribution.contributions(3, 6);
  const Complex emf1 = trio.z13 * trio.length * solved.current(0, 0);
  const Complex emf2 = trio.z23 * trio.length * solved.current(0, 1);
  // The EMF itself drives a charging current: 0.1 ohm times 4e-7 S of half the wire, 4e-8 of it.
  EXPECT_LT(std::abs(volts_of(along, 1, Path::magnetic).value() - emf1), 4e-8 * std::abs(emf1));
  EXPECT_LT(std::abs(volts_of(along, 2, Path::magnetic).value() - emf2), 4e-8 * std::abs(emf2));
  EXPECT_FALSE(volts_of(along, 1, Path::conductive));
}

// A leak alone, without capacitance, is a divider of two resistors, and conductive.
TEST(Attribution, CallsALeakConductive) {
  Network network;
  network.node_count = 3;
  network.sources = {{1, 0, 120.0, 0.01}};
  network.elements = {{1, 2, 1 / 300e3}, {2, 0, 1 / 100e3}};
  const SolvedNetwork solved(network);
  const auto contributions = Attribution(solved, {{-1, 7, -1}, {}, {7}}).contributions(2, 0);
  ASSERT_EQ(contributions.size(), 1U);
  EXPECT_EQ(contributions[0].group, 7);
  EXPECT_EQ(contributions[0].path, Path::conductive);
  EXPECT_NEAR(contributions[0].volts.real(), 30.0, 1e-4);  // less the source's 3e-6 V
}

// An isolated supply's legs stand at shares of its own volts, set by its strays: U C2 / (C1 + C2) to earth.
TEST(Attribution, IsolatedSupplyStandsOnItsOwnEmf) {
  const double c1 = 2.1e-9, c2 = 2.3e-9;  // F
  Network network;
  network.node_count = 3;
  network.sources = {{1, 2, 120.0, 0.1}};
  network.elements = {{1, 0, k_j * k_omega * c1}, {2, 0, k_j * k_omega * c2}, {1, 2, 0.1}};
  const SolvedNetwork solved(network);
  const Attribution attribution(solved, {{-1, -1, -1}, {}, {5}});
  const auto contributions = attribution.contributions(1, 0);
  ASSERT_EQ(contributions.size(), 1U);
  EXPECT_EQ(contributions[0].group, 5);
  EXPECT_EQ(contributions[0].path, Path::conductive);
  const double terminal = 120.0 / 1.01;  // V, 0.1 ohm before 10 ohm
  EXPECT_NEAR(contributions[0].volts.real(), terminal * c2 / (c1 + c2), 1e-6);
  EXPECT_NEAR(sum_of(attribution.contributions(1, 2)).real(), terminal, 1e-6);
}

// Behind a winding of 0.1 ohm an open neutral lies within microvolts of its hot: that difference too adds up.
TEST(Attribution, AddsUpAcrossALoadThatCarriesOnlyCharge) {
  Trio trio;
  trio.network.elements.push_back({4, 6, 1.0 / 0.1});
  const SolvedNetwork solved(trio.network);
  const Attribution attribution(solved, trio.aggressors);
  ASSERT_LT(std::abs(solved.volts(6, 4)), 1e-5);
  expect_sum(solved, attribution, 6, 4);
  expect_sum(solved, attribution, 3, 1);
  EXPECT_NEAR(std::abs(volts_of(attribution.contributions(6, 0), 1, Path::conductive).value()),
              std::abs(solved.volts(4)), 1e-3);
}

std::string refusal(const std::function<void(Trio&)>& spoil, int a = 3) {
  Trio trio;
  spoil(trio);
  const SolvedNetwork solved(trio.network);
  try {
    Attribution(solved, trio.aggressors).contributions(a, 0);
  } catch (const std::invalid_argument& error) {
    return error.what();
  }
  return "accepted";
}

TEST(Attribution, RefusesGroupsThatContradict) {
  EXPECT_EQ(refusal([](Trio&) {}), "accepted");
  EXPECT_EQ(refusal([](Trio& t) { t.aggressors.of_node.pop_back(); }),
            "aggressors: a group is due for each node, each line and each source");
  EXPECT_EQ(refusal([](Trio& t) { t.aggressors.of_segment[0].pop_back(); }),
            "aggressors: line 0: a group is due for each conductor");
  EXPECT_EQ(refusal([](Trio& t) { t.aggressors.of_segment[0][2] = 3; }),
            "aggressors: line 0, conductor 2: is an aggressor or victim, but not both its ends are");
  EXPECT_EQ(refusal([](Trio& t) {
              t.network.sources.push_back({3, 0, 1.0, 1.0});
              t.aggressors.of_source.push_back(-1);
            }),
            "aggressors: source 2: feeds a victim and has no group");
  EXPECT_EQ(refusal([](Trio&) {}, 1), "node 1 is no victim");
}

}  // namespace
}  // namespace engine
