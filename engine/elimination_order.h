// In which order the unknowns of a sum of blocks are eliminated.
#pragma once

#include <vector>

#include "engine/symmetric_factor.h"

namespace engine {

struct EliminationOrder {
  std::vector<int> place;  // of each unknown in the order
  std::vector<int> begin;  // group g is eliminated at places begin[g] to begin[g + 1]
};

/// Unknowns in the same blocks become one group, which is eliminated at once (Duff and Reid 1983); the groups
/// go in the order of approximate minimum degree on their graph.
EliminationOrder elimination_order(int size, const BlockPattern& pattern);

}  // namespace engine
