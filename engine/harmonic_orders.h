// How many harmonics a circle needs, told from the geometry before anything is solved.
#pragma once

#include <complex>
#include <vector>

namespace engine {

/// A circle as its neighbours see it.
struct FacingCircle {
  std::complex<double> centre;  // m
  double radius = 0.0;          // m, of its outer surface
  double core_radius = 0.0;     // m, of the metal inside, or of the farthest metal a body holds; 0: none
  double reflection = 1.0;      // magnitude, of its outer surface at high harmonics; 1 for bare metal
};

/// A round wall around the origin as the circles inside see it.
struct FacingWall {
  double radius = 0.0;      // m
  double reflection = 1.0;  // magnitude; 1 for metal
};

/// Harmonics that circle `self` needs so that what passes between it and its neighbours is known to
/// `tolerance`; the largest over all neighbours, not bounded. Images of the circles in a plane are
/// neighbours like others. Source: engine/README.md, "Capacitance by circular harmonics".
double needed_order(const std::vector<FacingCircle>& circles, size_t self, bool over_plane,
                    const std::vector<FacingWall>& walls, double tolerance);

}  // namespace engine
