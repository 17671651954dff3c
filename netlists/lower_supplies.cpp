// Supplies: which are alive, their sources and strays, their transformers.
#include <fmt/format.h>

#include <boost/random/uniform_real_distribution.hpp>
#include <cmath>
#include <numbers>
#include <random>

#include "netlists/lowering.h"

namespace netlists {
namespace {

constexpr double k_default_stray = 1e-9;  // F, a line of an ungrounded supply to ground

}  // namespace

void Lowering::add_supplies() {
  states_.assign(building_.supplies.size(), {});
  std::vector<bool> known(building_.supplies.size(), false);
  for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
    if (building_.supplies[s].fed_from) continue;
    states_[s] = {true, own_angle(s)};
    known[s] = true;
  }
  // A secondary dies with its primary, which may be a secondary itself.
  for (bool progress = true; progress;) {
    progress = false;
    for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
      if (known[s]) continue;
      const std::optional<Complex> primary = primary_volts(s);
      if (!primary) continue;
      states_[s] = {true, secondary_angle(building_.supplies[s], std::arg(*primary))};
      known[s] = true;
      progress = true;
    }
  }
  for (std::size_t s = 0; s < building_.supplies.size(); ++s) add_supply(s);
}

double Lowering::own_angle(std::size_t index) {
  const Supply& supply = building_.supplies[index];
  if (supply.angle) return *supply.angle;
  if (index == 0) return 0.0;
  std::mt19937_64 random(seed_ * 1000003ull + index);
  const double angle = boost::random::uniform_real_distribution<double>(0.0, 2 * std::numbers::pi)(random);
  out_.warnings.push_back(
      fmt::format("supply '{}': neither fed_from nor angle is given; its phase against '{}' is drawn at "
                  "random ({:.0f} deg)",
                  supply.name.text, building_.supplies[0].name.text, angle * 180 / std::numbers::pi));
  return angle;
}

engine::Complex Lowering::pole_volts(std::size_t supply, const SystemType& system,
                                     const std::string& pole) const {
  for (const Pole& line : system.lines) {
    if (line.name == pole) return std::polar(line.volts, line.angle + states_[supply].turn);
  }
  return std::polar(system.neutral_volts, states_[supply].turn);
}

void Lowering::add_supply(std::size_t index) {
  const Supply& supply = building_.supplies[index];
  const SystemType& system = *system_of(building_, supply);
  const SupplyState& state = states_[index];
  const Complex impedance =
      supply.impedance.value_or(Complex(system.impedance_resistance, system.impedance_reactance));
  if (!supply.impedance) {
    assumptions_.insert(fmt::format("supply '{}': source impedance {:.3g} + j{:.3g} ohm per line",
                                    supply.name.text, impedance.real(), impedance.imag()));
  }
  const int middle = joints_.point(star(supply, system));
  for (const std::string& pole : poles(system)) {
    const int point = joints_.point(terminal(supply, pole));
    if (point == middle) continue;
    const Complex volts = state.alive ? pole_volts(index, system, pole) : 0.0;
    out_.network.sources.push_back({point, middle, volts, impedance});
    out_.source_names.push_back(supply.name.text + " " + pole);
    if (!state.alive)
      out_.connections.push_back({point, middle, Join::wire, impedance, "winding of " + supply.name.text});
  }
  if (!state.alive)
    out_.states.push_back(fmt::format("supply {}: off, its primary is not fed", supply.name.text));
  if (state.alive) add_poles(index, system);
  if (supply.asynchronous) {
    out_.warnings.push_back(fmt::format(
        "supply '{}' is asynchronous: combined at one instant's phase, not yet by RMS", supply.name.text));
  }
  add_grounding(supply, system);
  if (supply.fed_from) add_transformer(supply, system);
}

void Lowering::add_poles(std::size_t index, const SystemType& system) {
  const Supply& supply = building_.supplies[index];
  const std::string grounded = grounded_pole(building_, supply);
  const Complex base = grounded.empty() ? Complex(0.0) : pole_volts(index, system, grounded);
  for (const std::string& pole : poles(system)) {
    out_.poles.push_back({joints_.point(terminal(supply, pole)), pole_volts(index, system, pole) - base,
                          supply.name.text, pole, pole == grounded});
  }
}

void Lowering::add_grounding(const Supply& supply, const SystemType& system) {
  const std::string grounding = supply.grounding.value_or(system.default_grounding);
  if (!supply.grounding) {
    assumptions_.insert(fmt::format("supply '{}': grounding '{}', the usual one of '{}'", supply.name.text,
                                    grounding, system.name));
  }
  if (grounding == "resistance") {
    const int pole = joints_.point(star(supply, system));
    add_element("grounding " + supply.name.text, pole, 0, 1.0 / supply.grounding_resistance);
    out_.connections.push_back(
        {pole, 0, Join::load, supply.grounding_resistance, "grounding of " + supply.name.text});
  }
  const double omega = 2 * std::numbers::pi * building_.frequency;
  const std::vector<std::string> names = poles(system);
  for (const std::string& name : names) {
    if (supply.insulation > 0.0)
      add_element("insulation " + supply.name.text + " " + name, joints_.point(terminal(supply, name)), 0,
                  1.0 / supply.insulation);
  }
  std::vector<double> stray = supply.stray_line_to_ground;
  if (stray.empty() && floats(building_, supply)) {
    stray.assign(names.size(), k_default_stray);
    assumptions_.insert(
        fmt::format("supply '{}': {:.3g} nF from each pole to ground inside it (common practice)",
                    supply.name.text, k_default_stray * 1e9));
  }
  if (stray.size() == 1) stray.assign(names.size(), stray[0]);
  for (std::size_t i = 0; i < names.size() && i < stray.size(); ++i) {
    if (stray[i] == 0.0) continue;
    add_element("stray " + supply.name.text + " " + names[i], joints_.point(terminal(supply, names[i])), 0,
                Complex(0.0, omega * stray[i]));
  }
}

}  // namespace netlists
