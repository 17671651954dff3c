// A flat metal strip under a section: the tray its cables lie on.
#pragma once

#include <Eigen/Core>

#include "engine/cross_section.h"
#include "engine/impedance.h"

namespace engine {

struct Strip {
  double width = 0.0;       // m
  double thickness = 0.0;   // m
  double height = 0.0;      // m, above the earthed plane
  double metal_area = 0.0;  // m2, what carries current along it
  Metal metal;
};

/// Capacitance of a thin strip to the plane under it, F/m, in air: the fit of Hammerstad and Jensen
/// (1980) to the conformal map, within 0.01 %. Throws std::invalid_argument unless both are positive.
double strip_capacitance(double width, double height);

/// Mean of ln(distance) from a point at (x, y) to a strip of `width` on y = 0, centred on x = 0; the
/// exact integral. Distances in m.
double mean_log_distance_to_strip(double width, double x, double y);

/// Takes the matrices of a section whose plane is the strip and adds the strip as their last row,
/// counted from earth: capacitance and conductance gain its own row, the series impedance its
/// resistance, its self part by the geometric mean distance 0.2235 (w + t) of a strip from itself
/// (Grover), and its mutual parts. Matrices in F/m, S/m and ohm/m.
void add_strip_row(const CrossSection& section, const Strip& strip, const ImpedanceConditions& conditions,
                   Eigen::MatrixXcd& impedance, Eigen::MatrixXd& capacitance, Eigen::MatrixXd& conductance);

}  // namespace engine
