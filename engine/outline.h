// The outlines of a cross-section: circles, stadiums and rectangles as one family of shapes.
#pragma once

#include <Eigen/Core>
#include <array>

#include "engine/cross_section.h"

namespace engine {

/// All points within `rounding` of a core: a circle around a point, a stadium around a line, a rectangle
/// with round or, where the rounding is zero, sharp corners around a rectangle. Always convex.
struct Outline {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  Core core = {};
  double rounding = 0.0;  // m

  bool is_circle() const { return core.is_point(); }
  /// Of the core, counter-clockwise from the upper right one; some coincide where it is a line or a point.
  std::array<Eigen::Vector2d, 4> corners() const;
};

/// Of a point from the outline in m, negative inside.
double signed_distance(const Outline& outline, const Eigen::Vector2d& point);

/// Between two outlines that lie beside each other, m; negative where they overlap.
double gap_between(const Outline& a, const Outline& b);

/// The least distance from the rim of `held` to that of `holder` around it, m; negative where it sticks out.
double room_inside(const Outline& holder, const Outline& held);

/// Height of the lowest point, m.
double lowest(const Outline& outline);

/// Distance of the farthest point from `origin`, m.
double farthest(const Outline& outline, const Eigen::Vector2d& origin);

}  // namespace engine
