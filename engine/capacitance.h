// Electrostatics of a cross-section.
#pragma once

#include <Eigen/Core>

#include "engine/cross_section.h"

namespace engine {

/// What the field solution of a section gives, per metre, in Maxwell form (q = C v, counted from the
/// reference): symmetric, positive diagonal, no positive off-diagonal, no negative row sum.
struct FieldMatrices {
  Eigen::MatrixXd capacitance;            // F/m, row_count x row_count
  Eigen::MatrixXd loss_capacitance;       // F/m: conductance is 2 pi f times this
  Eigen::MatrixXd external_inductance;    // H/m: mu_0 epsilon_0 inv(C without dielectrics)
  int order = 0;                          // harmonics on the circle that needed most
  double estimated_relative_error = 0.0;  // of `capacitance`, max |dC_ij| / sqrt(C_ii C_jj)
};

/// The matrices of a section, to section.tolerance. Throws std::invalid_argument as require_valid
/// does. Method and source: engine/README.md, "Capacitance by circular harmonics".
FieldMatrices field_matrices(const CrossSection& section);

}  // namespace engine
