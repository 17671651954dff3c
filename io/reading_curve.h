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

/// A reading that an instrument of so much resistance and nothing else would show.
struct CurvePoint {
  double resistance = 0.0;  // ohm
  double volts = 0.0;       // V RMS
};

/// The curve's axis, ohm: what people measure with lies between.
inline constexpr double k_curve_first = 1e2;
inline constexpr double k_curve_last = 1e8;

/// |V R / (R + Z)| at `count` resistances (2 or more), evenly spaced in their logarithm from k_curve_first
/// to k_curve_last. Empty where V or Z is not finite or V is zero.
std::vector<CurvePoint> curve_points(std::complex<double> open_circuit, std::complex<double> source_impedance,
                                     int count);

/// |V R / (R + Z)| for R from 100 ohm to 100 Mohm on a logarithmic axis, as text of at most `width`
/// columns, with the marks as letters and a legend. "" where V or Z is not finite or V is zero.
std::string reading_curve(std::complex<double> open_circuit, std::complex<double> source_impedance,
                          const std::vector<CurveMark>& marks, int width);

}  // namespace io
