// A cross-section taken apart: what each enclosure holds.
#pragma once

#include <complex>
#include <vector>

#include "engine/cross_section.h"
#include "engine/nesting.h"

namespace engine {

/// The surroundings, or the inside of a shell: places that do not see each other's field.
constexpr int k_surroundings = -1;

/// All solids of a section with what they hold. Refers to the section. Throws as nested_solids does.
class SectionTree {
 public:
  explicit SectionTree(const CrossSection& section);

  const CrossSection& section() const { return section_; }
  const Solid& solid(int i) const { return solids_[static_cast<size_t>(i)]; }
  int size() const { return static_cast<int>(solids_.size()); }
  /// Solids directly in solid `parent`, or in the surroundings.
  const std::vector<int>& children_of(int parent) const { return children_[static_cast<size_t>(parent + 1)]; }
  /// The row of a conductor or a shell.
  int number_of(int solid) const;
  /// Of a conductor or a shell.
  const std::vector<Layer>& layers_of(int solid) const;
  const Body& body(int solid) const;
  const Shell& shell(int solid) const;
  /// Whether any outline in the enclosure, or its own wall, is not a circle.
  bool has_outlines(int enclosure) const;
  /// m, well beyond the outermost solid, so that all potentials per charge are positive.
  double extent() const;

 private:
  bool holds_outlines(int parent) const;

  const CrossSection& section_;
  std::vector<Solid> solids_;
  std::vector<std::vector<int>> children_;  // of the surroundings, then of each solid
};

}  // namespace engine
