// Round wires and what surrounds them, for the tests of sections.
#pragma once

#include <utility>
#include <vector>

#include "engine/cross_section.h"

namespace engine {

inline RoundConductor wire(double x, double y, double radius, std::vector<Layer> layers = {}) {
  RoundConductor conductor;
  conductor.centre = {x, y};
  conductor.radius = radius;
  conductor.layers = std::move(layers);
  return conductor;
}

inline CrossSection in_tube(double radius, double tolerance) {
  CrossSection section;
  section.surroundings = Surroundings::metal_tube;
  section.tube_inner_radius = radius;
  section.tube_outer_radius = 1.1 * radius;
  section.tolerance = tolerance;
  return section;
}

inline CrossSection over_plane(double tolerance) {
  CrossSection section;
  section.surroundings = Surroundings::plane;
  section.tolerance = tolerance;
  return section;
}

inline CrossSection in_open(int reference, double tolerance) {
  CrossSection section;
  section.surroundings = Surroundings::open;
  section.reference = reference;
  section.tolerance = tolerance;
  return section;
}

}  // namespace engine
