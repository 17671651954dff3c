// A tube that is not round, as the round one whose currents act like its own.
#pragma once

#include "engine/cross_section.h"

namespace engine {

struct TubeWall {
  double inner_radius = 0.0;  // m
  double outer_radius = 0.0;  // m
};

/// The round tube of the same geometric mean distance from the middle to the inner surface, so that the flux
/// per ampere between a conductor in the middle and the wall is the same, and of the same metal area, so
/// that its resistance to direct current is. A round tube is its own. Source: engine/README.md, "Series
/// impedance".
TubeWall equivalent_tube(const Core& core, double inner_radius, double outer_radius);

}  // namespace engine
