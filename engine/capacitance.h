// Electrostatics of a cross-section.
#pragma once

#include <Eigen/Core>

#include "engine/cross_section.h"

namespace engine {

/// What the field solution of a section gives, per metre, counted from the reference (q = C v).
/// `capacitance` is in Maxwell form: symmetric, positive diagonal, no positive off-diagonal, no negative
/// row sum. `loss_capacitance` is symmetric and positive semidefinite; a lossy body beside two
/// conductors can make an off-diagonal of it positive. `external_inductance` is symmetric and positive
/// definite. Conductors in a shell couple to what is outside by exactly zero.
struct FieldMatrices {
  Eigen::MatrixXd capacitance;          // F/m, row_count x row_count
  Eigen::MatrixXd loss_capacitance;     // F/m: conductance is 2 pi f times this
  Eigen::MatrixXd external_inductance;  // H/m: mu_0 epsilon_0 inv(C without dielectrics); empty if not wanted
  int order = 0;                        // harmonics on the circle that needed most
  double estimated_relative_error = 0.0;  // of `capacitance`, max |dC_ij| / sqrt(C_ii C_jj)
};

/// Whether the inductance, a second solution as long as the first, is wanted too.
enum class Inductance { with, without };

/// The matrices of a section, to section.tolerance, unless metal all but touches metal: work is bounded,
/// and then the estimate says what was reached. Time grows as the cube of conductors times order: 9
/// insulated wires in a tube take some milliseconds at 1e-4, 30 some 0.1 s. Throws std::invalid_argument as
/// require_valid does. Method and source: engine/README.md, "Capacitance by circular harmonics".
FieldMatrices field_matrices(const CrossSection& section, Inductance inductance = Inductance::with);

}  // namespace engine
