#include "engine/section_tree.h"

#include <algorithm>

namespace engine {

SectionTree::SectionTree(const CrossSection& section)
    : section_(section), solids_(nested_solids(section)), children_(solids_.size() + 1) {
  for (int i = 0; i < size(); ++i) children_[static_cast<size_t>(solid(i).parent + 1)].push_back(i);
}

int SectionTree::number_of(int i) const {
  const int wires = static_cast<int>(section_.conductors.size());
  return solid(i).index + (solid(i).kind == Solid::Kind::shell ? wires : 0);
}

const std::vector<Layer>& SectionTree::layers_of(int i) const {
  const auto index = static_cast<size_t>(solid(i).index);
  return solid(i).kind == Solid::Kind::conductor ? section_.conductors[index].layers
                                                 : section_.shells[index].layers;
}

const Body& SectionTree::body(int i) const { return section_.bodies[static_cast<size_t>(solid(i).index)]; }

const Shell& SectionTree::shell(int i) const { return section_.shells[static_cast<size_t>(solid(i).index)]; }

bool SectionTree::has_outlines(int enclosure) const {
  if (enclosure != k_surroundings) return !solid(enclosure).core.is_point() || holds_outlines(enclosure);
  const bool tube = section_.surroundings == Surroundings::metal_tube;
  return (tube && !section_.tube_core.is_point()) || holds_outlines(k_surroundings);
}

bool SectionTree::holds_outlines(int parent) const {
  const auto& children = children_of(parent);
  return std::any_of(children.begin(), children.end(), [&](int child) {
    if (!solid(child).core.is_point()) return true;
    return solid(child).kind == Solid::Kind::body && holds_outlines(child);
  });
}

double SectionTree::extent() const {
  double reach = 0.0;
  for (const Solid& s : solids_) reach = std::max(reach, farthest(s.outer(), solids_[0].centre));
  return 10 * reach;
}

}  // namespace engine
