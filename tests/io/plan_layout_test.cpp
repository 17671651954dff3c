#include "io/plan_layout.h"

#include <gtest/gtest.h>

#include <map>
#include <random>
#include <set>

namespace {
using netlists::Building;

Building building_of(const std::vector<std::string>& panels,
                     const std::vector<std::pair<std::string, std::string>>& runs) {
  Building building;
  for (const std::string& name : panels) building.panels.push_back({{name, {}}, {}, {}});
  for (const auto& [from, to] : runs) {
    netlists::Run run;
    run.name = {"R" + std::to_string(building.runs.size()), {}};
    run.from = {from, {}};
    run.to = {to, {}};
    building.runs.push_back(run);
  }
  return building;
}

io::PlanLayout all_of(const Building& building) {
  return io::plan_layout(building, std::vector<bool>(building.runs.size(), true));
}

const io::PlanNode& node(const io::PlanLayout& layout, const std::string& name) {
  for (const auto& one : layout.nodes)
    if (one.name == name) return one;
  throw std::logic_error("no node " + name);
}

TEST(PlanLayout, APlaceStandsInTheMiddleOfWhatItFeeds) {
  const auto layout = all_of(building_of({"LP"}, {{"LP", "J"}, {"J", "a"}, {"b", "J"}, {"J", "c"}}));
  EXPECT_EQ(node(layout, "LP").column, 0);
  EXPECT_EQ(node(layout, "J").column, 1);
  EXPECT_EQ(node(layout, "b").column, 2);  // drawn away from the panel, whichever way the run was named
  EXPECT_EQ(node(layout, "J").row, node(layout, "b").row);
  EXPECT_EQ(layout.rows, 3.0);
}

TEST(PlanLayout, RunsSideBySideHaveLanesAndLoopsJoinAcross) {
  const auto layout = all_of(building_of({"LP"}, {{"LP", "J"}, {"LP", "J"}, {"J", "a"}, {"a", "LP"}}));
  EXPECT_EQ(node(layout, "J").lanes, 2);
  int loops = 0;
  for (const auto& edge : layout.edges) loops += edge.closes ? 1 : 0;
  EXPECT_EQ(loops, 1);
}

TEST(PlanLayout, OnlyWantedRunsAreDrawn) {
  const Building building = building_of({"LP"}, {{"LP", "J"}, {"J", "a"}, {"J", "b"}});
  const auto layout = io::plan_layout(building, {true, false, true});
  EXPECT_EQ(layout.edges.size(), 2u);
  EXPECT_EQ(layout.nodes.size(), 3u);
}

TEST(WaysToPanels, FollowTheRunsHome) {
  const Building building = building_of({"LP"}, {{"J", "a"}, {"LP", "J"}, {"a", "b"}});
  const auto ways = io::ways_to_panels(building);
  EXPECT_EQ(ways[2], (std::vector<std::size_t>{1, 0, 2}));
  EXPECT_EQ(ways[1], (std::vector<std::size_t>{1}));
}

// What a drawing must keep on any building: every run once, no two nodes on one spot, runs that close no loop
// one column on. Fixed seed: a failure repeats.
TEST(PlanLayout, KeepsItsPromisesOnRandomBuildings) {
  std::mt19937 random(7);
  for (int trial = 0; trial < 40; ++trial) {
    SCOPED_TRACE(trial);
    std::vector<std::pair<std::string, std::string>> runs;
    for (int k = 0; k < 60; ++k) {
      const auto from = random() % 50, to = random() % 50;
      if (from != to) runs.emplace_back("p" + std::to_string(from), "p" + std::to_string(to));
    }
    const auto layout = all_of(building_of({"p0", "p1"}, runs));
    std::set<std::pair<int, double>> spots;
    for (const auto& one : layout.nodes) EXPECT_TRUE(spots.insert({one.column, one.row}).second) << one.name;
    std::set<std::size_t> drawn;
    for (const auto& edge : layout.edges) {
      EXPECT_TRUE(drawn.insert(edge.run).second);
      const int step = layout.nodes[edge.to].column - layout.nodes[edge.from].column;
      EXPECT_TRUE(edge.closes || step == 1);
    }
    EXPECT_EQ(drawn.size(), runs.size());
  }
}

// A chain as long as no building's must not exhaust the stack.
TEST(PlanLayout, BearsALongChain) {
  std::vector<std::pair<std::string, std::string>> runs;
  for (int k = 0; k < 5000; ++k) runs.emplace_back("p" + std::to_string(k), "p" + std::to_string(k + 1));
  const auto layout = all_of(building_of({"p0"}, runs));
  EXPECT_EQ(layout.columns, 5001);
  EXPECT_EQ(layout.rows, 1.0);
}

}  // namespace
