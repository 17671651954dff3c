// What a meter would read, drawn against its own resistance.
#pragma once

#include <complex>
#include <string>
#include <vector>

#include "netlists/findings.h"

namespace io {

/// An instrument on the curve: where it stands and what it reads there, its capacitance included.
struct CurveMark {
  std::string instrument;
  double resistance = 0.0;  // ohm
  double volts = 0.0;       // V RMS
};

/// The voltmeters of the findings that read at `place` to its reference, with the resistance of the
/// range they read on.
std::vector<CurveMark> curve_marks(const netlists::Findings& findings, const netlists::PlaceFindings& place);

/// |V R / (R + Z)| for R from 100 ohm to 100 Mohm on a logarithmic axis, as text of at most `width`
/// columns, with the marks as letters and a legend. "" where V or Z is not finite or V is zero.
std::string reading_curve(std::complex<double> open_circuit, std::complex<double> source_impedance,
                          const std::vector<CurveMark>& marks, int width);

}  // namespace io
