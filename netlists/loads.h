// Loads as impedances at their nominal voltage.
#pragma once

#include <complex>
#include <string>

#include "netlists/building.h"

namespace netlists {

struct LoadModel {
  std::complex<double> admittance;  // S; 0: open
  double nominal_volts = 0.0;       // V, that it is made for
  bool filter = false;              // a filter capacitor: counts for nothing in conditions
  bool drive = false;               // its output disturbs what lies beside it
  std::string assumption;           // what was taken that the model did not say; "" if nothing
};

/// The nominal voltage between a circuit's first line and its neutral (`second` is a neutral or a
/// ground), or between its first two lines, V. 0 for a circuit without a panel.
double nominal_volts(const Building& building, const Circuit& circuit, const std::string& second);

/// The linear admittance of a load in its state: from resistance or capacitance as given, else from
/// power, apparent power or current at the nominal voltage, with the kind's power factor.
LoadModel load_model(const Building& building, const Circuit& circuit, const Load& load);

}  // namespace netlists
