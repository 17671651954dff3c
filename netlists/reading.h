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

/// The reading, with the range in force: a person begins on the highest range and goes down as long
/// as the next lower one holds what the present one shows. Reference, appearance and what is judged
/// are left to the caller. An instrument on dead-zero source impedance loads nothing.
Reading read(const InstrumentType& instrument, const Port& port, double frequency);

/// The resistance of the range in force, ohm.
double resistance_in_force(const InstrumentType& instrument, const Reading& reading);

}  // namespace netlists
