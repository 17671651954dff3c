// A person who touches: the body's impedance, and the current through it from conductors of one place.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <string>

namespace netlists {

/// The body network for touch currents of IEC 60990, figure 3: 500 ohm in series with 1500 ohm beside
/// 0.22 uF. Ohm; 1990 in magnitude at 50 Hz and 1986 at 60 Hz.
std::complex<double> body_impedance(double frequency);

/// The open-circuit voltages of n conductors of a place to ground (V) and their impedance matrix (ohm, n x n,
/// symmetric).
struct TouchPorts {
  Eigen::VectorXcd volts;
  Eigen::MatrixXcd impedance;
};

/// A way to touch and the current through the body, A.
struct Touch {
  double current = 0.0;
  int first = -1;   // conductor, -1: all together
  int second = -1;  // conductor of the other hand, -1: ground
};

/// One conductor to ground: the largest.
Touch single_touch(const TouchPorts& ports, std::complex<double> body);
/// All conductors together to ground. Conductors that are one point, as the pieces of one wire, may be
/// among them: the impedance matrix is then singular and the least of all divisions of the current is taken.
Touch joint_touch(const TouchPorts& ports, std::complex<double> body);
/// Hand to hand between the pair that drives most; current 0 for fewer than two.
Touch pair_touch(const TouchPorts& ports, std::complex<double> body);

/// What a lasting current (A) of 15 to 100 Hz does, in the words of the zones of IEC 60479-1.
std::string body_zone(double current);

}  // namespace netlists
