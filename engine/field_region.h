// The field of one region: circles in a uniform medium within one boundary.
#pragma once

#include <Eigen/Core>
#include <vector>

#include "engine/harmonics.h"

namespace engine {

/// What a circle does in the region around it. Amplitudes are normalised as in HarmonicLayout, charges
/// in units of 2 pi epsilon_0, so that potentials come out in V.
struct CircleResponse {
  HarmonicCircle circle;        // its order is that of what follows
  std::vector<int> conductors;  // the section's numbers of what it holds
  Eigen::VectorXcd reflection;  // per harmonic, size order; used where `coupled` is empty
  Eigen::MatrixXcd coupled;     // outgoing over incoming, 2 order x 2 order; empty if it is diagonal
  Eigen::MatrixXcd outgoing;    // charge-like outgoing per charge inside, 2 order x conductors; may be empty
  Eigen::MatrixXcd potentials;  // of the conductors over the circle per charge inside
};

/// Round circles in a medium within a boundary.
struct Region {
  enum class Boundary { open, plane, metal_wall, body_wall };
  Boundary boundary = Boundary::open;
  double radius = 0.0;  // m, of the wall around the origin; for open: where the logarithm is zero
  std::complex<double> medium = 1.0;    // relative permittivity
  std::vector<CircleResponse> circles;  // none of them overlap
};

/// Potentials per charge of all conductors in the region, counted from the boundary (in the open, from
/// the logarithm's zero), in the order in which the circles name them. In units of 1 / (2 pi epsilon_0).
Eigen::MatrixXcd potential_coefficients(const Region& region);

/// The response of a body in `medium`, seen from outside with `order` harmonics, its inside known as a
/// region with a body_wall around the origin. `wall_order` harmonics describe the inside of the wall.
CircleResponse body_response(const RoundBody& body, const Region& inside, std::complex<double> medium,
                             int order, int wall_order);

}  // namespace engine
