// Where the panels and places of a building stand in a drawing, from its runs alone.
#pragma once

#include <string>
#include <vector>

#include "netlists/building.h"

namespace io {

/// A panel or place. Columns count from the panels outwards, rows from the top; a row is a unit of height.
struct PlanNode {
  std::string name;
  bool panel = false;
  int column = 0;
  double row = 0.0;
  int lanes = 1;  // runs side by side that come in from the node before
};

/// A run as drawn between two nodes, always away from the panels.
struct PlanEdge {
  std::size_t run = 0;  // index into Building::runs
  std::size_t from = 0;
  std::size_t to = 0;   // indices into nodes
  int lane = 0;         // 0 to nodes[to].lanes - 1
  bool closes = false;  // a loop: it joins two nodes that are drawn already
};

struct PlanLayout {
  std::vector<PlanNode> nodes;
  std::vector<PlanEdge> edges;
  int columns = 0;
  double rows = 0.0;
};

/// Lays a building out as trees that grow from its panels, those with a supply first, to the right: each
/// place stands in the middle of what is fed through it. Runs between the same two places lie side by side,
/// those that close a loop join across. Only runs of `wanted` (one a run) are laid out. The same building
/// always gives the same layout; time grows with the runs.
PlanLayout plan_layout(const netlists::Building& building, const std::vector<bool>& wanted);

/// The runs by which each run hangs on a panel, itself last; a run that closes a loop hangs on its from end.
std::vector<std::vector<std::size_t>> ways_to_panels(const netlists::Building& building);

}  // namespace io
