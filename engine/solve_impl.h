// What a solved network keeps. For solve.cpp and attribution.cpp alone.
#pragma once

#include <vector>

#include "engine/island_basis.h"
#include "engine/solve.h"

namespace engine {

struct SolvedNetwork::Impl {
  explicit Impl(Network wanted);

  Network network;
  IslandBasis basis;
  IslandBasis::State state;
  std::vector<int> first_section;  // in basis.network().sections, by line
  std::vector<int> undetermined;   // nodes
};

}  // namespace engine
