// How finely the circles and outlines of a region are resolved.
#pragma once

#include <vector>

#include "engine/harmonics.h"
#include "engine/outline_region.h"
#include "engine/panels.h"

namespace engine {

struct OutlineResolution {
  std::vector<HarmonicCircle> circles;  // in the region's order, all levels alike
  PanelledOutlines outlines;            // in the order of the region's surfaces
};

/// Told from the geometry: harmonics as among circles, with outlines as mirrors; panels as fine as what is
/// near them. Throws std::length_error above k_most_outline_unknowns.
OutlineResolution resolution_of(const OutlineRegion& region, double resolution);

}  // namespace engine
