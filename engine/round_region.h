// Builds the regions of a cross-section in which everything is round.
#pragma once

#include <vector>

#include "engine/field_region.h"
#include "engine/harmonic_orders.h"
#include "engine/section_tree.h"

namespace engine {

// Fractions of the full order at which a section is solved too, for the estimate of the error.
inline constexpr std::array<double, k_levels> k_fractions = {0.6, 0.8, 1.0};
inline constexpr int k_largest_order = 400;  // beyond it powers of radii underflow

/// Turns what an enclosure holds into circles that respond to each other, with orders `scale` times those
/// that the geometry asks for.
class RoundRegions {
 public:
  RoundRegions(const SectionTree& tree, double scale) : tree_(tree), scale_(scale) {}

  /// Of the surroundings or of a shell.
  Region region_of(int enclosure);

  const Orders& largest_orders() const { return largest_orders_; }  // so far
  int largest_system() const { return largest_system_; }            // unknowns, so far

 private:
  void fill(Region& region, int parent, const Eigen::Vector2d& origin, const std::vector<FacingWall>& walls);
  Orders scaled(double order) const;
  FacingCircle face_of(int member, const Eigen::Vector2d& origin, std::complex<double> medium) const;
  double core_radius(int member) const;
  double surface_reflection(int member, std::complex<double> medium) const;
  CircleResponse response_of(int member, std::complex<double> medium, const Orders& orders);
  CircleResponse response_of_body(int member, std::complex<double> medium, const Orders& orders);
  int wall_order(const Body& body, const Region& inside) const;

  const SectionTree& tree_;
  double scale_ = 1.0;
  Orders largest_orders_ = {};
  int largest_system_ = 0;
};

/// Of potential through layers around metal, per charge in units of 2 pi epsilon_0.
std::complex<double> rise_through(double metal_radius, const std::vector<Layer>& layers);

}  // namespace engine
