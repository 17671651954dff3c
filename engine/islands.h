// Which nodes hang together by strong connections, and what potential they would have at no load.
#pragma once

#include <vector>

#include "engine/flat_network.h"

namespace engine {

/// An admittance below this, in S, does not make two nodes one island: meters, leakage, stray capacitance.
inline constexpr double k_strong = 1e-4;

/// The islands of a network: line conductors, sources and elements of at least k_strong join.
struct Islands {
  std::vector<int> of_node;     // island of each node; island 0 holds earth
  std::vector<int> root;        // of each island: the node from which it counts
  std::vector<Complex> offset;  // V of each node above its island's root with no current anywhere,
                                // along the tree of strongest connections

  /// Islands that shunts or weak branches couple have one group; whatever is tied to earth is in group 0.
  /// Only differences of potential are determined inside any other group.
  std::vector<int> group;           // of each island
  std::vector<bool> is_group_root;  // of each island: the one its group counts from; island 0 for group 0
};

Islands find_islands(const FlatNetwork& network);

}  // namespace engine
