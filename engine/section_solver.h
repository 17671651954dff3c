// Capacitance of a whole section, put together from its regions.
#pragma once

#include "engine/field_region.h"
#include "engine/section_tree.h"

namespace engine {

/// Solves a section at orders that are `scale` times what the geometry asks for.
class SectionSolver {
 public:
  explicit SectionSolver(const CrossSection& section) : tree_(section) {}

  /// F/m, of all conductors: counted from the plane or the tube; in the open, of zero net charge.
  LevelMatrices capacitance(double scale);

  const Orders& largest_orders() const { return largest_orders_; }  // of the last solution
  int largest_system() const { return largest_system_; }            // unknowns, of the last solution

 private:
  void add_round(LevelMatrices& total, int enclosure, double scale);
  void add_with_outlines(LevelMatrices& total, int enclosure, double scale);
  void add(Eigen::MatrixXcd& total, const Eigen::MatrixXcd& potentials, const std::vector<int>& numbers,
           int enclosure) const;

  SectionTree tree_;
  Orders largest_orders_ = {};
  int largest_system_ = 0;
};

}  // namespace engine
