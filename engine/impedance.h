// Series impedance of a cross-section.
#pragma once

#include <Eigen/Core>
#include <complex>

#include "engine/cross_section.h"

namespace engine {

/// What the series impedance depends on beside the geometry.
struct ImpedanceConditions {
  double frequency = 60.0;           // Hz
  double temperature = 20.0;         // degC, of all metal
  double earth_resistivity = 100.0;  // ohm m, for the return of a section over a plane
};

/// Geometric mean radius over bundle radius of a concentric-lay conductor: exp(-1/4) for one strand.
/// Throws std::invalid_argument for a number that is not of the concentric series (1, 7, 19, 37, ...).
double gmr_ratio(int strands);

/// Resistivity at `temperature` (degC), ohm m. Throws std::invalid_argument where it is not positive.
double resistivity(const Metal& metal, double temperature);

/// DC resistance at `temperature` (degC), ohm/m. Without a given one it is that of straight strands; the
/// lay of real ones adds some 2 %.
double dc_resistance(const RoundConductor& conductor, double temperature);

/// Internal impedance with skin effect, ohm/m: the round solid wire's Bessel function form scaled to
/// the conductor's dc resistance, internal inductance scaled to the strands' geometric mean radius.
/// Of the conductor alone: what neighbours add is in proximity.h.
std::complex<double> internal_impedance(const RoundConductor& conductor, double frequency,
                                        double temperature);

/// The surface impedances of a tube after Schelkunoff (1934), ohm/m: a current that flows along the wall
/// and returns inside leaves a field `inner` times itself on the inner surface and `transfer` times itself on
/// the outer one; one that returns outside, `outer` and `transfer`. All three are the dc resistance at 0 Hz.
/// Within 1e-12 of exact for walls over a hundredth of the radius, from dc to walls many skin depths thick.
struct TubeImpedance {
  std::complex<double> inner;
  std::complex<double> outer;
  std::complex<double> transfer;
};
TubeImpedance tube_impedance(double inner_radius, double outer_radius, const Metal& metal, double frequency,
                             double temperature);

/// Series impedance of a section, ohm/m, row_count x row_count, symmetric, real part positive definite.
/// Rows as in CrossSection. Return: over a plane, the earth after Carson; in a metal tube, the tube;
/// in the open, the reference conductor. Inside a shell the shell is a conductor like the others; shells
/// may hold shells.
///
/// Eddy currents among the round conductors of an enclosure are in it (proximity effect). Shells and tubes
/// carry currents spread evenly around them: metal walls are no magnetic walls, without images.
/// Throws std::invalid_argument as require_valid does, and where a condition is not physical.
/// Method and source: engine/README.md, "Series impedance".
Eigen::MatrixXcd series_impedance(const CrossSection& section, const ImpedanceConditions& conditions);

}  // namespace engine
