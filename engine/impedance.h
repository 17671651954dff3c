// Series impedance of a cross-section.
#pragma once

#include <Eigen/Core>
#include <complex>

#include "engine/cross_section.h"

namespace engine {

/// What the series impedance depends on beside the geometry.
struct ImpedanceConditions {
  double frequency = 60.0;           // Hz
  double temperature = 20.0;         // degC
  double earth_resistivity = 100.0;  // ohm m, for the return of a section over a plane
};

/// Geometric mean radius over bundle radius of a concentric-lay conductor: exp(-1/4) for one strand.
/// Throws std::invalid_argument for a number that is not of the concentric series (1, 7, 19, 37, ...).
double gmr_ratio(int strands);

/// DC resistance at `temperature` (degC), ohm/m.
double dc_resistance(const RoundConductor& conductor, double temperature);

/// Internal impedance with skin effect, ohm/m: the round solid wire's Bessel function form scaled to
/// the conductor's dc resistance, internal inductance scaled to the strands' geometric mean radius.
std::complex<double> internal_impedance(const RoundConductor& conductor, double frequency,
                                        double temperature);

/// The surface impedances of a tube after Schelkunoff (1934), ohm/m.
struct TubeImpedance {
  std::complex<double> inner;     // current returns inside
  std::complex<double> outer;     // current returns outside
  std::complex<double> transfer;  // from one surface to the other
};
TubeImpedance tube_impedance(double inner_radius, double outer_radius, const Metal& metal, double frequency,
                             double temperature);

/// Series impedance of a section, ohm/m, row_count x row_count, symmetric, real part positive definite.
/// Rows as in CrossSection. Return: over a plane, the earth after Carson; in a metal tube, the tube;
/// in the open, the reference conductor. Inside a shell the shell is a conductor like the others.
Eigen::MatrixXcd series_impedance(const CrossSection& section, const ImpedanceConditions& conditions);

}  // namespace engine
