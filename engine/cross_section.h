// The cross-section of a run: what lies where, of what.
#pragma once

#include <Eigen/Core>
#include <vector>

namespace engine {

/// An insulating material at the frequency in question.
struct Dielectric {
  double permittivity = 1.0;  // relative, >= 1
  double loss_tangent = 0.0;  // tan delta, >= 0
};

/// A metal. Resistivity follows the temperature linearly from its value at 20 degC.
struct Metal {
  double conductivity = 58.0e6;              // S/m at 20 degC
  double relative_permeability = 1.0;        // effective, at the flux in question
  double temperature_coefficient = 0.00393;  // 1/K at 20 degC
};

/// A concentric layer of insulation; it begins where the one inside it ends.
struct Layer {
  double outer_radius = 0.0;  // m
  Dielectric dielectric;
};

/// What the radii of a body or a tube are counted from: a point (a round one), a line (a flat one with
/// round ends) or a rectangle.
struct Core {
  Eigen::Vector2d half_size = Eigen::Vector2d::Zero();  // m, half of the width and of the height
  double turn = 0.0;                                    // rad, counter-clockwise

  bool is_point() const { return half_size == Eigen::Vector2d::Zero(); }
  bool is_rectangle() const { return half_size.minCoeff() > 0.0; }
};

/// A round conductor, solid or of concentric strands, with its layers from the inside out.
struct RoundConductor {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double radius = 0.0;                               // m, of the strand bundle
  int strands = 1;                                   // 1, 7, 19, 37, 61, ...
  double dc_resistance = 0.0;  // ohm/m at 20 degC; 0: from the metal and the strands' area
  Metal metal;
  std::vector<Layer> layers;

  double outer_radius() const { return layers.empty() ? radius : layers.back().outer_radius; }  // m
};

/// An insulating body that holds conductors: a plastic conduit (filler air) or a jacket, round or flat
/// (filler solid). Whatever lies within inner_radius of the core lies in the filler.
struct Body {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double inner_radius = 0.0;                         // m
  double outer_radius = 0.0;                         // m
  Dielectric wall;
  Dielectric filler;
  Core core = {};
};

/// A metal tube that holds conductors and is a conductor itself: armour, a screen, a metal raceway. Air
/// inside unless `filler` says otherwise; `layers` is what covers it outside, if it is round. A wireway of
/// sheet is a rectangle of inner_radius 0 and of its wall as outer_radius: bent, so round outside.
struct Shell {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double inner_radius = 0.0;                         // m
  double outer_radius = 0.0;                         // m
  double dc_resistance = 0.0;  // ohm/m at 20 degC; 0: from the metal and the wall's area
  Metal metal;
  Dielectric filler;
  std::vector<Layer> layers;
  Core core = {};

  double covered_radius() const { return layers.empty() ? outer_radius : layers.back().outer_radius; }  // m
};

/// What surrounds everything else.
enum class Surroundings {
  open,       // air to infinity; the net charge of all conductors is zero
  plane,      // an earthed plane at y = 0, everything above it
  metal_tube  // a metal tube, round or rectangular, centred on the origin
};

/// A whole section. Conductors are numbered as they stand in `conductors`, then the shells as they
/// stand in `shells`; every matrix of a section has its rows in that order, the reference left out.
/// The reference is the plane, the tube, or in the open the conductor `reference`.
struct CrossSection {
  Surroundings surroundings = Surroundings::open;
  double tube_inner_radius = 0.0;  // m, for metal_tube
  double tube_outer_radius = 0.0;  // m, for metal_tube
  Metal tube_metal;                // for metal_tube
  Core tube_core;                  // for metal_tube
  std::vector<RoundConductor> conductors;
  std::vector<Body> bodies;
  std::vector<Shell> shells;
  int reference = -1;       // for open: the number of the reference conductor
  double tolerance = 1e-4;  // of the capacitance matrix, max |dC_ij| / sqrt(C_ii C_jj)

  int conductor_count() const { return static_cast<int>(conductors.size() + shells.size()); }
  int row_count() const { return conductor_count() - (surroundings == Surroundings::open ? 1 : 0); }
};

/// Throws std::invalid_argument, naming the numbers and distances that clash, where metal touches
/// metal, outlines cross, a radius is not positive and finite, layers do not grow, something lies
/// outside the tube or under the plane, or an open section has no reference. Insulation may touch.
void require_valid(const CrossSection& section);

}  // namespace engine
