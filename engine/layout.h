// How loose conductors come to lie in a raceway.
#pragma once

#include <Eigen/Core>
#include <random>
#include <span>
#include <vector>

namespace engine {

/// Centres (m) of round things of the given radii (m) resting at random in a round tube of
/// `tube_radius` (m), its centre the origin, gravity along -y. Nothing overlaps: all gaps are at
/// least 1e-6 m. The same state of `random` gives the same layout.
/// Throws std::invalid_argument if no packing is found: the things are too many or too large.
/// Method and source: engine/README.md, "Layouts".
std::vector<Eigen::Vector2d> resting_layout(std::span<const double> radii, double tube_radius,
                                            std::mt19937_64& random);

/// The same in a rectangular raceway of this half width and half height (m), its middle the origin.
std::vector<Eigen::Vector2d> resting_layout(std::span<const double> radii, const Eigen::Vector2d& half_size,
                                            std::mt19937_64& random);

/// Centres (m) of round things lying side by side on the line y = 0 in random order, centred on
/// x = 0, `gap` (m, >= 1e-6) apart.
std::vector<Eigen::Vector2d> row_layout(std::span<const double> radii, double gap, std::mt19937_64& random);

}  // namespace engine
