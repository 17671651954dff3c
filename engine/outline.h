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

/// Of what a body or a shell is bounded by.
inline Outline outer_outline(const Body& body) { return {body.centre, body.core, body.outer_radius}; }
inline Outline inner_outline(const Body& body) { return {body.centre, body.core, body.inner_radius}; }
inline Outline metal_outline(const Shell& shell) { return {shell.centre, shell.core, shell.outer_radius}; }
inline Outline covered_outline(const Shell& shell) {
  return {shell.centre, shell.core, shell.covered_radius()};
}
inline Outline inner_outline(const Shell& shell) { return {shell.centre, shell.core, shell.inner_radius}; }

/// Of a point from the outline in m, negative inside.
double signed_distance(const Outline& outline, const Eigen::Vector2d& point);

/// Between two outlines that lie beside each other, m; negative where they overlap.
double gap_between(const Outline& a, const Outline& b);

/// The least distance from the rim of `held` to that of `holder` around it, m; negative where it sticks out.
double room_inside(const Outline& holder, const Outline& held);

/// The upright rectangle around the outline: its lower left and upper right corners, m.
std::array<Eigen::Vector2d, 2> bounds(const Outline& outline);

/// Height of the lowest point, m.
double lowest(const Outline& outline);

/// Distance of the farthest point from `origin`, m.
double farthest(const Outline& outline, const Eigen::Vector2d& origin);

}  // namespace engine
