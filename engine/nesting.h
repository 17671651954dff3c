// Which part of a cross-section lies in which, and what is in another's way.
#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "engine/cross_section.h"
#include "engine/outline.h"

namespace engine {

/// A conductor, a body or a shell, seen by its outlines: all around one core.
struct Solid {
  enum class Kind { conductor, body, shell };
  Kind kind = Kind::conductor;
  int index = 0;                                     // in its own list of the section
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  Core core = {};
  double outer_radius = 0.0;  // m, insulation included
  double metal_radius = 0.0;  // m, of the metal seen from outside; 0: a body has none
  double inner_radius = 0.0;  // m, of the room inside
  int parent = -1;            // the smallest one that holds it; -1: the surroundings

  bool is_metal() const { return kind != Kind::body; }
  bool is_hollow() const { return kind != Kind::conductor; }
  Outline outer() const { return {centre, core, outer_radius}; }
  Outline metal() const { return {centre, core, metal_radius}; }
  Outline inner() const { return {centre, core, inner_radius}; }
};

/// Metal closer than this counts as touching; insulation may overlap by as much, because an exact
/// contact is irrational in coordinates.
inline constexpr double k_contact_tolerance = 1e-9;  // m

/// Two parts of a section, or one and the surroundings, that cannot be where they are.
struct Clash {
  enum class Kind { overlap, crosses_wall, metal_touches, metal_touches_inside };
  Kind kind = Kind::overlap;
  int part = 0;     // number among the solids
  int other = -1;   // of the holder where the two are one in the other; -1: the surroundings
  double by = 0.0;  // m, how deep; 0 where metal touches
};

/// `conductor 2`, for messages.
std::string name_of(const Solid& solid);

/// A length (m) in millimetres with its unit, for messages.
std::string in_mm(double length);

/// Conductors, then bodies, then shells, in the section's order, none with a parent yet.
std::vector<Solid> solids_of(const CrossSection& section);

/// The inner outline of the tube; only where there is one.
Outline tube_outline(const CrossSection& section);

/// Everything in each other's way, in the order of `part`.
std::vector<Clash> clashes(const CrossSection& section, const std::vector<Solid>& solids);

/// Like solids_of, each with its parent. Throws std::invalid_argument as require_valid does where something
/// clashes.
std::vector<Solid> nested_solids(const CrossSection& section);

}  // namespace engine
