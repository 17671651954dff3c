// What a load makes of the little that coupling offers it: thresholds, linear and not.
#pragma once

#include <complex>
#include <optional>

#include "netlists/catalogue.h"
#include "netlists/reading.h"

namespace netlists {

/// The port behind a load's terminals with the load taken away. `loaded` holds the voltage across the load
/// and the impedance seen there, the load of `admittance` (S) included. Exact but for what cancels: good to
/// 1e-9 times the ratio of the source's impedance to the load's.
Port without_load(const Port& loaded, std::complex<double> admittance);

/// The mean current that a bridge rectifier lets through into `dc_volts` (V), A. Behind a capacitive port the
/// charge that swings through it in each half period, 4 f C (V_peak - V_dc) (the charge balance of a
/// capacitor-fed bridge); behind a resistive one the mean of the current over the time it conducts. Zero
/// where the peak does not reach `dc_volts`. The port is what of the two lies nearer to its phase.
double rectified_current(const Port& port, double dc_volts, double frequency);

/// The share of its present length at which the coupled run first puts `threshold_volts` (V) on a load of
/// impedance `load` (ohm): the open-circuit voltage stays and the source's impedance goes as one over the
/// length. Above 1: longer than now. Nothing where no length does it.
std::optional<double> length_share(const Port& port, std::complex<double> load, double threshold_volts);

/// From which voltage (V) on an effect is possible at a load of impedance `load` (ohm) and nominal voltage
/// `nominal` (V). An input of IEC 61131-2 is surely off up to its low limit at any current, and up to the
/// limit of its "on" state while it draws no more than its off-state current.
double threshold_volts(const LoadEffect& effect, double nominal, std::complex<double> load);

}  // namespace netlists
