#include "engine/network.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <functional>
#include <limits>
#include <random>
#include <stdexcept>
#include <string>

#include "engine/solve.h"
#include "tests/engine/sample_networks.h"

namespace engine {
namespace {

using ::testing::HasSubstr;

/// One line of two conductors, one element and one source.
Network small_network() {
  std::mt19937 random(1);
  Network network;
  network.node_count = 5;
  network.lines.push_back({testing::random_matrices(random, 2, 60), 10.0, 1, {1, 2}, {3, 4}});
  network.elements.push_back({3, 0, {0.1, 0.0}});
  network.sources.push_back({1, 0, 120.0, {0.01, 0.0}});
  return network;
}

std::string refusal(const std::function<void(Network&)>& spoil) {
  Network network = small_network();
  spoil(network);
  try {
    require_valid(network);
  } catch (const std::invalid_argument& error) {
    return error.what();
  }
  return "accepted";
}

std::shared_ptr<LineMatrices> copied(const Line& line) {
  return std::make_shared<LineMatrices>(*line.matrices);
}

TEST(RequireValid, AcceptsASoundNetwork) {
  EXPECT_EQ(refusal([](Network&) {}), "accepted");
}

TEST(RequireValid, NamesTheNodeThatIsOutOfRange) {
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].to[1] = 5; }),
            "line 0: node 5 is out of range; nodes are 0 to 4");
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].from[0] = -1; }),
            "line 0: node -1 is out of range; nodes are 0 to 4");
  EXPECT_EQ(refusal([](Network& n) { n.elements[0].b = 9; }),
            "element 0: node 9 is out of range; nodes are 0 to 4");
  EXPECT_EQ(refusal([](Network& n) { n.sources[0].a = 9; }),
            "source 0: node 9 is out of range; nodes are 0 to 4");
}

TEST(RequireValid, NamesWhatIsWrongWithALine) {
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].length = 0; }),
            "line 0: length 0 m is not positive and finite");
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].length = std::numeric_limits<double>::infinity(); }),
            "line 0: length inf m is not positive and finite");
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].cells = 0; }), "line 0: 0 cells; at least 1 is needed");
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].to.pop_back(); }), "line 0: 2 conductors begin, but 1 end");
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].matrices = nullptr; }), "line 0: has no matrices");
  EXPECT_EQ(refusal([](Network& n) { n.lines[0].from.clear(), n.lines[0].to.clear(); }),
            "line 0: has no conductor");
}

TEST(RequireValid, NamesTheMatrixThatIsWrong) {
  const auto with = [](auto change) {
    return refusal([&](Network& network) {
      const auto matrices = copied(network.lines[0]);
      change(*matrices);
      network.lines[0].matrices = matrices;
    });
  };
  EXPECT_EQ(with([](LineMatrices& m) { m.capacitance.resize(3, 2); }),
            "line 0: capacitance is 3 x 2, but the line has 2 conductors");
  EXPECT_EQ(with([](LineMatrices& m) { m.impedance(0, 1) = std::numeric_limits<double>::quiet_NaN(); }),
            "line 0: impedance is not finite");
  EXPECT_EQ(with([](LineMatrices& m) { m.conductance(1, 1) = std::numeric_limits<double>::infinity(); }),
            "line 0: conductance is not finite");
  EXPECT_THAT(with([](LineMatrices& m) { m.capacitance(0, 1) *= 1.01; }),
              HasSubstr("line 0: capacitance is not symmetric: entries differ by"));
}

TEST(RequireValid, NamesWhatIsWrongWithBranchesAndTheWhole) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  EXPECT_EQ(refusal([](Network& n) { n.sources[0].impedance = 0; }), "source 0: has no impedance");
  EXPECT_EQ(refusal([&](Network& n) { n.sources[0].impedance = nan; }), "source 0: impedance is not finite");
  EXPECT_EQ(refusal([&](Network& n) { n.sources[0].volts = nan; }), "source 0: volts are not finite");
  EXPECT_EQ(refusal([&](Network& n) { n.elements[0].admittance = nan; }),
            "element 0: admittance is not finite");
  EXPECT_EQ(refusal([](Network& n) { n.frequency = 0; }), "frequency 0 Hz is not positive and finite");
  EXPECT_EQ(refusal([](Network& n) { n.node_count = 0; }), "0 nodes; earth alone is one");
}

TEST(SolvedNetwork, RefusesWhatIsNotValid) {
  Network network = small_network();
  network.lines[0].length = -3;
  EXPECT_THROW(SolvedNetwork{network}, std::invalid_argument);
}

TEST(SolvedNetwork, RefusesAnImpedanceWithoutInverse) {
  Network network = small_network();
  const auto matrices = copied(network.lines[0]);
  matrices->impedance.setZero();
  network.lines[0].matrices = matrices;
  try {
    const SolvedNetwork solved(network);
    FAIL() << "accepted";
  } catch (const std::invalid_argument& error) {
    EXPECT_STREQ(error.what(), "line 0: its impedance matrix is singular");
  }
}

}  // namespace
}  // namespace engine
