// Circular harmonics: how the field of one circle looks at another, and what a round boundary sends back.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <vector>

#include "engine/cross_section.h"

namespace engine {

/// Relative permittivity with its loss, e (1 - j tan d).
inline std::complex<double> complex_permittivity(const Dielectric& dielectric) {
  return dielectric.permittivity * std::complex<double>(1.0, -dielectric.loss_tangent);
}

/// Where the harmonics of a circle are counted.
struct HarmonicCircle {
  std::complex<double> centre;  // m, x + i y
  double radius = 0.0;          // m
  int order = 0;                // harmonics 1..order, a cosine and a sine each
};

/// Where the unknowns of a region stand: the total charges of its circles first, then circle by circle
/// the cosine and sine of harmonic 1, 2, ... A charge-like unknown is normalised so that the potential
/// matrix between charge-like and potential-like amplitudes is symmetric (engine/README.md).
struct HarmonicLayout {
  explicit HarmonicLayout(const std::vector<HarmonicCircle>& circles);
  int circle_count() const { return static_cast<int>(first.size()); }
  std::vector<int> first;  // of each circle's harmonics
  int size = 0;
};

/// Potentials at every circle per unit charge-like amplitude on every circle, in empty space: self
/// terms of the harmonics are left out. The logarithm is zero at `scale` (m).
Eigen::MatrixXd direct_potentials(const std::vector<HarmonicCircle>& circles, double scale);

/// The same from the images in an earthed plane at y = 0, which are to be added.
Eigen::MatrixXd plane_potentials(const std::vector<HarmonicCircle>& circles, double scale);

/// The same from the exact images in a circle of `radius` (m) around the origin, as if every harmonic
/// k >= 1 that arrives there came back with the factor +1; a metal wall is -1 times this.
Eigen::MatrixXd wall_images(const std::vector<HarmonicCircle>& circles, double radius);

/// What arrives at a circle of `radius` (m) around the origin: rows are the cosine and sine of harmonic
/// 1..order there, columns as in HarmonicLayout. Its transpose takes a regular field scaled at `radius`
/// to the circles.
Eigen::MatrixXd harmonics_at_wall(const std::vector<HarmonicCircle>& circles, double radius, int order);

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
WallResponse wall_response(const RoundBody& body, std::complex<double> medium, int k);

/// The reflection at the inner surface alone, which back_inside tends to as k grows.
std::complex<double> inner_surface_reflection(const RoundBody& body, std::complex<double> medium);

}  // namespace engine
