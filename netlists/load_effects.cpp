#include "netlists/load_effects.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace netlists {

using Complex = std::complex<double>;

Port without_load(const Port& loaded, Complex admittance) {
  const Complex rest = 1.0 - loaded.impedance * admittance;
  return {loaded.volts / rest, loaded.impedance / rest};
}

double rectified_current(const Port& port, double dc_volts, double frequency) {
  const double peak = std::numbers::sqrt2 * std::abs(port.volts);
  const double impedance = std::abs(port.impedance);
  if (peak <= dc_volts || impedance == 0.0) return 0.0;
  if (std::abs(port.impedance.imag()) > port.impedance.real()) {
    const double capacitance = 1.0 / (2 * std::numbers::pi * frequency * impedance);
    return 4 * frequency * capacitance * (peak - dc_volts);
  }
  const double begins = std::asin(dc_volts / peak);  // rad
  const double conducts = std::numbers::pi / 2 - begins;
  return 2 / (std::numbers::pi * impedance) * (peak * std::cos(begins) - dc_volts * conducts);
}

std::optional<double> length_share(const Port& port, Complex load, double threshold_volts) {
  // |load + x Z| = |V load| / threshold, with x the present length over the length looked for: the largest x.
  const double a = std::norm(port.impedance);
  const double b = (load * std::conj(port.impedance)).real();
  const double c = std::norm(load) - std::norm(port.volts * load) / (threshold_volts * threshold_volts);
  const double root = b * b - a * c;
  if (a == 0.0 || root < 0.0) return std::nullopt;
  // The sum that does not cancel, whichever sign b has.
  const double x = b <= 0.0 ? (-b + std::sqrt(root)) / a : -c / (b + std::sqrt(root));
  if (!(x > 0.0)) return std::nullopt;
  return 1.0 / x;
}

double threshold_volts(const LoadEffect& effect, double nominal, Complex load) {
  const double low = effect.share > 0.0 ? effect.share * nominal : effect.volts;
  if (effect.volts_at_low_current <= 0.0) return low;
  return std::max(low, std::min(effect.volts_at_low_current, effect.current * std::abs(load)));
}

}  // namespace netlists
