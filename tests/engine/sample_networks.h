// Networks to test solvers on: random ones that look like a building, and ones made to be hard.
#pragma once

#include <memory>
#include <random>
#include <vector>

#include "engine/network.h"

namespace engine::testing {

/// Matrices of n wires lying at random, rows spread over 20 mm; the last one is a wide raceway around them.
/// Inductance from distances, capacitance from random positive partial capacitances (F/m).
std::shared_ptr<const LineMatrices> random_matrices(std::mt19937& random, int n, double frequency,
                                                    double least_capacitance = 5e-12,
                                                    double most_capacitance = 80e-12);

/// A network with the nodes that a test asks about.
struct Sample {
  Network network;
  std::vector<int> floating;                  // nodes on conductors that nothing feeds but through a load
  std::vector<std::pair<int, int>> segments;  // ends of floating segments
  std::vector<std::vector<int>> wires;        // nodes of each conductor, by conductor
};

/// A tree of raceways that carry circuits with loads, spares that float, a bonded pair of spares, leaks,
/// meters, an open neutral behind a load and an isolated supply. About `runs` * 8 segments.
Sample random_building(unsigned seed, int runs);

/// Beside a 120 V feeder with load, 100 km long in 10 m and 25 km steps: floating wires, closed by
/// milliohms and joined in a loop, and one that only picofarads tie to the rest.
Sample hard_case();

}  // namespace engine::testing
