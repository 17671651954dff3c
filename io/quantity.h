// Quantities with their units, as users write them.
#pragma once

#include <complex>
#include <string>
#include <variant>

namespace io {

enum class Dimension {
  length,       // mm, cm, m, km, ft, in (fractions allowed: "3/4 in", "1 1/4 in")
  area,         // mm2, kcmil, AWG sizes
  resistance,   // mohm, ohm, kohm, Mohm
  capacitance,  // pF, nF, uF
  inductance,   // uH, mH, H
  voltage,      // mV, V, kV
  current,      // uA, mA, A
  power,        // W, kW
  apparent,     // VA, kVA
  frequency,    // Hz
  angle,        // deg, rad
  ratio,        // %, or a plain number
  temperature,  // degC, degF
  resistivity,  // ohm m
  conductivity  // S/m
};

/// The value in SI (angles in rad, temperatures in degC, ratios as a fraction, areas in m2), or what
/// is wrong and what would be right, as in "length 18 has no unit; write '18 m'". Not finite values
/// and text after the unit are refused. `what` names the quantity in the message.
std::variant<double, std::string> parse_quantity(const std::string& text, Dimension dimension,
                                                 const std::string& what);

}  // namespace io
