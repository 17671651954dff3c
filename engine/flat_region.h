// Builds the regions of a cross-section in which not everything is round.
#pragma once

#include <vector>

#include "engine/outline_region.h"
#include "engine/section_tree.h"

namespace engine {

struct FlatRegion {
  OutlineRegion region;
  std::vector<int> numbers;  // the section's rows of the region's conductors
};

/// Of the surroundings or of a shell, with places counted from its centre.
FlatRegion flat_region(const SectionTree& tree, int enclosure);

}  // namespace engine
