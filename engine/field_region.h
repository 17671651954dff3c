// The field of one region: circles in a uniform medium within one boundary.
#pragma once

#include <Eigen/Core>
#include <array>
#include <vector>

#include "engine/harmonics.h"

namespace engine {

/// One matrix for each level of truncation.
using LevelMatrices = std::array<Eigen::MatrixXcd, k_levels>;

/// What a circle does in the region around it. Amplitudes are normalised as in HarmonicLayout, charges
/// in units of 2 pi epsilon_0, so that potentials come out in V.
struct CircleResponse {
  HarmonicCircle circle;
  std::vector<int> conductors;  // the section's numbers of what it holds
  Eigen::VectorXcd reflection;  // outgoing over incoming, per harmonic; used where `coupled` is empty
  LevelMatrices coupled;        // the same where harmonics mix, 2 order x 2 order; empty where they do not
  LevelMatrices outgoing;       // charge-like outgoing per charge inside, 2 order x conductors; may be empty
  LevelMatrices potentials;     // of the conductors over the circle's, per charge inside

  bool mixes_harmonics() const { return coupled.back().size() > 0; }
};

/// Round circles in a medium within a boundary.
struct Region {
  enum class Boundary { open, plane, metal_wall, body_wall };
  Boundary boundary = Boundary::open;
  double radius = 0.0;                  // m, of the wall around the origin; else where the logarithm is zero
  std::complex<double> medium = 1.0;    // relative permittivity
  double tolerance = 1e-4;              // losses are summed to a hundredth of it
  std::vector<CircleResponse> circles;  // none of them overlap
};

/// Potentials per charge of all conductors in the region, counted from the boundary (in the open, from
/// the logarithm's zero), in the order in which the circles name them. In units of 1 / (2 pi epsilon_0).
LevelMatrices potential_coefficients(const Region& region);

/// The response of a body in `medium`, seen from outside with harmonics up to `orders`, its inside known
/// as a region with a body_wall around the origin. `wall_order` harmonics describe the inside of the wall.
CircleResponse body_response(const Body& body, const Region& inside, std::complex<double> medium,
                             const Orders& orders, int wall_order);

}  // namespace engine
