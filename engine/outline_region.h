// The field of one region in which not everything is round: circles by harmonics, outlines by panels.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <vector>

#include "engine/cross_section.h"
#include "engine/outline.h"

namespace engine {

/// A round conductor with its layers, or the outside of a round shell.
struct CoveredCircle {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double metal_radius = 0.0;                         // m
  std::vector<Layer> layers;
  std::complex<double> medium = 1.0;  // relative permittivity around it

  double radius() const { return layers.empty() ? metal_radius : layers.back().outer_radius; }  // m
};

/// An outline on which the permittivity jumps, or the surface of a metal.
struct Surface {
  enum class Kind {
    dielectric,  // insulation on both sides
    conductor,   // metal inside
    wall         // metal outside: the region's boundary
  };
  Kind kind = Kind::dielectric;
  Outline outline;
  std::complex<double> inside = 1.0;   // relative permittivity; not of a conductor
  std::complex<double> outside = 1.0;  // relative permittivity; not of a wall
};

/// Everything in one enclosure, or outside of all enclosures. Its conductors are numbered as they stand in
/// `circles`, then the surfaces of kind conductor as they stand in `surfaces`.
struct OutlineRegion {
  enum class Boundary { open, plane, round_wall, wall };
  Boundary boundary = Boundary::open;
  double radius = 0.0;      // m, of the round wall around the origin; else where the logarithm is zero
  double tolerance = 1e-4;  // decides orders and panels
  std::vector<CoveredCircle> circles;
  std::vector<Surface> surfaces;
};

/// Potentials per charge of all conductors, counted from the boundary (in the open, from the logarithm's
/// zero), in units of 1 / (2 pi epsilon_0), and what it took.
struct OutlineSolution {
  Eigen::MatrixXcd potentials;
  int order = 0;     // of the circle that needed most; without circles, points a panel
  int unknowns = 0;  // harmonics and points
};

/// At `resolution` times the orders and points that the tolerance asks for. Throws std::length_error where
/// that is more than k_most_outline_unknowns. Method and sources: engine/README.md, "Capacitance by
/// boundary integrals".
OutlineSolution potential_coefficients(const OutlineRegion& region, double resolution);

inline constexpr int k_most_outline_unknowns = 9000;  // some 650 MB and minutes

}  // namespace engine
