// Which circle of a cross-section lies in which.
#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "engine/cross_section.h"

namespace engine {

/// A conductor, a body or a shell, seen as the circle of its outermost surface.
struct Circle {
  enum class Kind { conductor, body, shell };
  Kind kind = Kind::conductor;
  int index = 0;                                     // in its own list of the section
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double outer_radius = 0.0;                         // m, insulation included
  double metal_radius = 0.0;                         // m, of the metal seen from outside; 0: a body has none
  double inner_radius = 0.0;                         // m, of the room inside; 0: a conductor has none
  int parent = -1;  // the smallest circle that holds it; -1: the surroundings
};

/// Metal closer than this counts as touching; insulation may overlap by as much, because an exact
/// contact is irrational in coordinates.
inline constexpr double k_contact_tolerance = 1e-9;  // m

/// `conductor 2`, for messages.
std::string name_of(const Circle& circle);

/// A length (m) in millimetres with its unit, for messages.
std::string in_mm(double length);

/// All circles of a section: conductors, then bodies, then shells, each with its parent.
/// Throws std::invalid_argument as require_valid does where circles cross, overlap or touch in metal.
std::vector<Circle> nested_circles(const CrossSection& section);

}  // namespace engine
