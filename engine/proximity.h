// Eddy currents that parallel conductors induce in each other.
#pragma once

#include <Eigen/Core>
#include <vector>

namespace engine {

/// A round conductor as its neighbours' magnetic field finds it: solid, of this dc resistance.
struct EddyWire {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double radius = 0.0;                               // m
  double resistance = 0.0;                           // ohm/m; 0: only a line of current, no metal
  double permeability = 1.0;                         // relative
};

/// What eddy currents add to the impedances of currents that return far away, ohm/m, symmetric with a
/// positive semidefinite real part: the proximity effect. Conductors too thin for a thousandth of their own
/// resistance (radius under a quarter of the skin depth) count as lines of current. Throws
/// std::invalid_argument where two overlap. Method and source: engine/README.md, "Series impedance".
Eigen::MatrixXcd proximity_impedance(const std::vector<EddyWire>& wires, double frequency);

}  // namespace engine
