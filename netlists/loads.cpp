#include "netlists/loads.h"

#include <fmt/format.h>

#include <cmath>
#include <numbers>

#include "netlists/plan.h"
#include "netlists/wiring.h"

namespace netlists {
namespace {

using Complex = std::complex<double>;

// A load of a circuit that no panel feeds has no nominal voltage of its own: that of the model's first
// supply.
double volts_or_first_supply(const Building& building, const Circuit& circuit, const std::string& second) {
  const double own = nominal_volts(building, circuit, second);
  if (own > 0 || building.supplies.empty()) return own;
  const SystemType* system = system_of(building, building.supplies.front());
  return system ? line_voltage(*system) : 0.0;
}

Complex running(const Load& load, const LoadKind& kind, double volts, double omega, std::string& assumption) {
  if (load.resistance || load.capacitance) {
    return Complex(load.resistance ? 1.0 / *load.resistance : 0.0,
                   load.capacitance ? omega * *load.capacitance : 0.0);
  }
  if (kind.default_capacitance > 0.0 && !load.power && !load.apparent && !load.current) {
    assumption = fmt::format("{:.3g} nF, the usual of its kind", kind.default_capacitance * 1e9);
    return {0.0, omega * kind.default_capacitance};
  }
  const double factor = load.power_factor.value_or(kind.power_factor);
  double apparent = 0.0;  // VA
  if (load.apparent) {
    apparent = *load.apparent;
  } else if (load.current) {
    apparent = *load.current * volts;
  } else {
    const double power = load.power.value_or(kind.default_power);
    if (!load.power) assumption = fmt::format("{:.3g} W, the usual of its kind", power);
    apparent = power / factor;
  }
  if (volts <= 0.0) return 0.0;
  const double magnitude = apparent / (volts * volts);  // S
  const double reactive = std::sqrt(std::max(0.0, 1.0 - factor * factor));
  return {magnitude * factor, (kind.capacitive ? 1.0 : -1.0) * magnitude * reactive};
}

}  // namespace

double nominal_volts(const Building& building, const Circuit& circuit, const std::string& second) {
  const Panel* panel = circuit.panel ? find_panel(building, circuit.panel->text) : nullptr;
  const Supply* supply = panel ? root_supply(building, *panel) : nullptr;
  const SystemType* system = supply ? system_of(building, *supply) : nullptr;
  if (!system) return 0.0;
  const auto line = [&](std::size_t pole) -> Complex {
    const std::string name = line_of_pole(*system, circuit, pole);
    for (const Pole& candidate : system->lines) {
      if (candidate.name == name) return std::polar(candidate.volts, candidate.angle);
    }
    return system->lines.empty() ? Complex(0.0) : std::polar(system->lines[0].volts, system->lines[0].angle);
  };
  const bool to_neutral = names_neutral(second) || names_ground(second) || circuit.poles.size() < 2;
  return std::abs(line(0) - (to_neutral ? Complex(system->neutral_volts) : line(1)));
}

LoadModel load_model(const Building& building, const Circuit& circuit, const Load& load) {
  LoadModel model;
  const auto found = building.catalogue.loads.find(load.kind);
  const LoadKind kind = found == building.catalogue.loads.end() ? LoadKind{} : found->second;
  model.drive = load.kind == "drive";
  model.filter = kind.filter;
  const bool neutral = names_neutral(load.between.first.text) || names_ground(load.between.first.text);
  const double volts =
      volts_or_first_supply(building, circuit, neutral ? load.between.first.text : load.between.second.text);
  model.nominal_volts = kind.nominal_volts > 0.0 ? kind.nominal_volts : volts;
  const double omega = 2 * std::numbers::pi * building.frequency;
  if (load.state == LoadState::off) return model;
  if (load.state == LoadState::standby) {
    model.admittance = Complex(kind.standby_resistance > 0 ? 1.0 / kind.standby_resistance : 0.0,
                               omega * kind.standby_capacitance);
    return model;
  }
  model.admittance = running(load, kind, model.nominal_volts, omega, model.assumption);
  return model;
}

}  // namespace netlists
