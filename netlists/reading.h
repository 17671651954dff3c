// What an instrument shows between two points, its own loading included.
#pragma once

#include <complex>
#include <vector>

#include "netlists/catalogue.h"
#include "netlists/findings.h"

namespace netlists {

/// What two points offer: an open-circuit voltage behind an impedance.
struct Port {
  std::complex<double> volts;      // V RMS
  std::complex<double> impedance;  // ohm
};

/// The input impedance of an instrument, its capacitance in parallel, ohm. `resistance` in ohm is that
/// of the range in force.
std::complex<double> input_impedance(const InstrumentType& instrument, double resistance, double frequency);

/// Two points with their potentials from earth: volts (V) and impedances (ohm), to see what an instrument's
/// common lead to earth does to them.
struct PointPair {
  std::complex<double> volts_a;
  std::complex<double> volts_b;
  std::complex<double> impedance_a;
  std::complex<double> impedance_b;
  std::complex<double> mutual;
};

/// What an instrument of three terminals shows between a and b, its common lead with its capacitance to earth
/// on b; ohm is the resistance of the range in force.
double shown_between(const InstrumentType& instrument, double resistance, const PointPair& points,
                     double frequency);

/// The reading between two points that are both soft, its common lead on b; `swapped` is set where the
/// readings with the leads one way and the other differ by over 5 % of the larger.
Reading read_soft(const InstrumentType& instrument, const PointPair& points, double frequency);

/// What shows with the common lead in the air: the circuit closes through `common_to_earth` alone. `port` is
/// that of the point to earth.
double read_lead_in_air(const InstrumentType& instrument, const Port& port, double frequency);

/// The reading, with the range in force: a person begins on the highest range and goes down as long
/// as the next lower one holds what the present one shows. Reference, appearance and what is judged
/// are left to the caller. An instrument on dead-zero source impedance loads nothing.
Reading read(const InstrumentType& instrument, const Port& port, double frequency);

/// The resistance of the range in force, ohm.
double resistance_in_force(const InstrumentType& instrument, const Reading& reading);

}  // namespace netlists
