// Networks the size of a building, made from a few figures.
#pragma once

#include <utility>
#include <vector>

#include "engine/network.h"

namespace benchmarks {

struct BuildingSize {
  int segments = 10000;         // conductor segments to reach, raceways and ground wires included
  int runs = 4;                 // raceways in a row from panel to last outlet
  int most_circuits = 4;        // in one raceway, 1 at least
  double floating_share = 0.2;  // spares, as a part of the circuits
  unsigned seed = 1;
};

struct SampleBuilding {
  engine::Network network;
  int segments = 0;
  std::vector<int> floating;                    // nodes that nothing feeds
  std::vector<std::pair<int, int>> neighbours;  // two floating nodes in one raceway, at the same place
};

/// Panels on one service; from each, home runs whose circuits end one by one along the raceways.
SampleBuilding branching_building(const BuildingSize& size);

/// A square mesh of trays of up to 40 conductors; circuits take random ways through it, spares among them.
SampleBuilding mesh_of_trays(const BuildingSize& size);

}  // namespace benchmarks
