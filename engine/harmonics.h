// Circular harmonics: how the field of one circle looks at another, and what a round boundary sends back.
#pragma once

#include <Eigen/Core>
#include <array>
#include <complex>
#include <vector>

#include "engine/cross_section.h"

namespace engine {

/// Relative permittivity with its loss, e (1 - j tan d).
inline std::complex<double> complex_permittivity(const Dielectric& dielectric) {
  return dielectric.permittivity * std::complex<double>(1.0, -dielectric.loss_tangent);
}

/// Orders at which a field is truncated, ascending: two to compare with, then the full one.
constexpr size_t k_levels = 3;
using Orders = std::array<int, k_levels>;

/// Where the harmonics of a circle are counted.
struct HarmonicCircle {
  std::complex<double> centre;  // m, x + i y
  double radius = 0.0;          // m
  Orders orders = {};           // harmonics 1..order at each level, a cosine and a sine each

  int order() const { return orders.back(); }
};

/// Where the unknowns of a region stand: first the total charges of its circles, then their harmonics,
/// those of the lowest level first, so that a lower level is a leading block. A charge-like unknown is
/// normalised so that the potentials it makes are a symmetric matrix (engine/README.md).
struct HarmonicLayout {
  explicit HarmonicLayout(const std::vector<HarmonicCircle>& circles);
  int circle_count() const { return static_cast<int>(row.size()); }
  int size() const { return size_at.back(); }
  std::vector<std::vector<int>> row;       // [circle][n - 1]: the cosine of harmonic n; its sine is next
  std::array<int, k_levels> size_at = {};  // of the leading block of each level, charges included
};

// The next three fill in the lower triangle of a symmetric matrix with rows as in HarmonicLayout: the
// potential at every circle per unit of charge-like amplitude, in empty space.

/// Adds the direct field; self terms of the harmonics are left out. The logarithm is zero at `scale` (m).
void add_direct(Eigen::MatrixXd& potentials, const HarmonicLayout& layout,
                const std::vector<HarmonicCircle>& circles, double scale);

/// Adds the images in an earthed plane at y = 0.
void add_plane_images(Eigen::MatrixXd& potentials, const HarmonicLayout& layout,
                      const std::vector<HarmonicCircle>& circles, double scale);

/// Adds `factor` times the exact images in a circle of `radius` (m) around the origin, as if every
/// harmonic k >= 1 that arrives there came back unchanged; the factor of a metal wall is -1.
void add_wall_images(Eigen::MatrixXd& potentials, const HarmonicLayout& layout,
                     const std::vector<HarmonicCircle>& circles, double radius, double factor);

/// What arrives at a circle of `radius` (m) around the origin: rows are the cosine and sine of harmonic
/// 1..order there, columns as in HarmonicLayout. Its transpose takes a regular field scaled at `radius`
/// to the circles.
Eigen::MatrixXd harmonics_at_wall(const HarmonicLayout& layout, const std::vector<HarmonicCircle>& circles,
                                  double radius, int order);

/// Outgoing over incoming amplitude of harmonics 1..order of a metal circle covered with `layers`, in
/// `medium`, scaled at the outermost surface: -1 for bare metal.
Eigen::VectorXcd metal_reflection(double metal_radius, const std::vector<Layer>& layers,
                                  std::complex<double> medium, int order);

/// What a round wall between a filler inside and a medium outside does to harmonic k.
struct WallResponse {
  std::complex<double> back_inside;   // of what arrives from inside, scaled at the inner radius
  std::complex<double> through;       // either way, charge-like to charge-like outward
  std::complex<double> back_outside;  // of what arrives from outside, scaled at the outer radius
};
WallResponse wall_response(const Body& body, std::complex<double> medium, int k);

/// The reflection at the inner surface alone, which back_inside tends to as k grows.
std::complex<double> inner_surface_reflection(const Body& body, std::complex<double> medium);

}  // namespace engine
