// What lands where: supplies at panels, wires on bars and breakers.
#include <fmt/format.h>

#include <algorithm>
#include <stdexcept>

#include "netlists/lowering.h"

namespace netlists {

std::string Lowering::bar(const std::string& panel, const std::string& what) const {
  return what == "ground" ? "ground@" + panel : panel + "." + what;
}

std::string Lowering::wire_point(const PhysicalWire& wire, const std::string& place, int run) const {
  const std::string& run_name = building_.runs[run].name.text;
  for (const Cut& cut : building_.cuts) {
    const int meant = wiring_.find("", cut.wire.text);
    if (meant >= 0 && &wiring_.wires[meant] == &wire && cut.at.text == place && cut.side.text == run_name) {
      return wire.id + "/" + run_name + "@" + place;
    }
  }
  return wire.id + "@" + place;
}

int Lowering::point_of(const std::string& circuit, const std::string& name, const std::string& place) {
  const int wire = wiring_.find(circuit, name);
  if (wire >= 0) return joints_.point(wiring_.wires[wire].id + "@" + place);
  if (name == "earth") return 0;
  if (name == "ground" || name == "neutral") {
    return joints_.point(name == "ground" ? "ground@" + place : bar(place, name));
  }
  return joints_.point(name + "@" + place);  // a raceway
}

std::string Lowering::terminal(const Supply& supply, const std::string& pole) {
  return supply.name.text + "." + pole;
}

std::string Lowering::star(const Supply& supply, const SystemType& system) {
  return terminal(supply, system.neutral && system.neutral_volts == 0.0 ? "neutral" : "middle of windings");
}

std::vector<std::string> Lowering::poles(const SystemType& system) const {
  std::vector<std::string> names;
  for (const Pole& line : system.lines) names.push_back(line.name);
  if (system.neutral) names.emplace_back("neutral");
  return names;
}

void Lowering::join_supplies() {
  for (const Supply& supply : building_.supplies) {
    const SystemType* system = system_of(building_, supply);
    if (!system) throw std::invalid_argument("supply '" + supply.name.text + "': unknown system");
    const std::string grounded = grounded_pole(building_, supply);
    if (!grounded.empty()) joints_.join(joints_.point(terminal(supply, grounded)), 0);
    if (floats(building_, supply)) out_.floating_supplies.insert(supply.name.text);
  }
}

void Lowering::join_panel(const Panel& panel) {
  const Supply* supply = root_supply(building_, panel);
  if (!supply || !panel.supply) return;
  for (const std::string& pole : poles(*system_of(building_, *supply))) {
    joints_.join(joints_.point(bar(panel.name.text, pole)), joints_.point(terminal(*supply, pole)));
  }
  joints_.join(joints_.point(bar(panel.name.text, "ground")), 0);
  assumptions_.insert(
      fmt::format("panel '{}' stands at supply '{}': no feeder between them, its ground bar is earth",
                  panel.name.text, supply->name.text));
}

void Lowering::lay_wire(const PhysicalWire& wire) {
  for (const int run : wire.runs) {
    joints_.point(wire_point(wire, building_.runs[run].from.text, run));
    joints_.point(wire_point(wire, building_.runs[run].to.text, run));
  }
}

bool Lowering::reaches(const PhysicalWire& wire, const std::string& place) const {
  return std::any_of(wire.runs.begin(), wire.runs.end(), [&](int run) {
    return building_.runs[run].from.text == place || building_.runs[run].to.text == place;
  });
}

bool Lowering::breaker_on(const Circuit& circuit, std::size_t pole) const {
  return pole >= circuit.breaker.size() || circuit.breaker[pole];
}

void Lowering::land(const Circuit& circuit) {
  if (!circuit.panel) return;
  const Panel* panel = find_panel(building_, circuit.panel->text);
  const Supply* supply = panel ? root_supply(building_, *panel) : nullptr;
  if (!supply) return;
  const SystemType& system = *system_of(building_, *supply);
  std::vector<const PhysicalWire*> wires;
  std::vector<std::string> names;
  for (const Wire& wire : circuit.wires) {
    const int index = wiring_.find(circuit.name.text, wire.name.text);
    if (index < 0 || !wire.alias.empty() || !reaches(wiring_.wires[index], panel->name.text)) continue;
    wires.push_back(&wiring_.wires[index]);
    names.push_back(wire.name.text);
  }
  const std::vector<std::string> lands = landings(circuit, names);
  for (std::size_t i = 0; i < wires.size(); ++i)
    land_wire(circuit, system, panel->name.text, *wires[i], lands[i]);
  tell_breaker(circuit, system);
}

void Lowering::land_wire(const Circuit& circuit, const SystemType& system, const std::string& panel,
                         const PhysicalWire& wire, const std::string& where) {
  const int point = joints_.point(wire.id + "@" + panel);
  if (where == "neutral" || where == "ground") {
    joints_.join(point, joints_.point(bar(panel, where)));
    if (where == "ground") landed_ground_.insert(wire.id + "@" + panel);
    return;
  }
  if (where.empty()) {
    if (wire.ground) landed_ground_.insert(wire.id + "@" + panel);  // told not to land: stays apart there
    return;
  }
  std::string line;
  std::size_t pole = 0;
  if (where.rfind("pole ", 0) == 0) {
    pole = static_cast<std::size_t>(std::stoi(where.substr(5)));
    line = line_of_pole(system, circuit, pole);
  } else {
    line = where.substr(5);
    while (pole < circuit.poles.size() && line_of_pole(system, circuit, pole) != line) ++pole;
  }
  if (breaker_on(circuit, pole)) joints_.join(point, joints_.point(bar(panel, line)));
}

void Lowering::tell_breaker(const Circuit& circuit, const SystemType& system) {
  std::string text;
  for (std::size_t i = 0; i < circuit.poles.size(); ++i) {
    text += fmt::format("{}{} {}", i ? ", " : "", line_of_pole(system, circuit, i),
                        breaker_on(circuit, i) ? "on" : "off");
  }
  if (!text.empty()) out_.states.push_back(fmt::format("{} breaker: {}", circuit.name.text, text));
}

void Lowering::land_feeder(const Panel& panel) {
  if (!panel.feeder) return;
  const Supply* supply = root_supply(building_, panel);
  if (!supply) return;
  const SystemType& system = *system_of(building_, *supply);
  std::size_t line = 0;
  for (const Wire& wire : panel.feeder->wires) {
    const int index = wiring_.find(panel.name.text, wire.name.text);
    if (index < 0) continue;
    const bool neutral = names_neutral(wire.name.text);
    const bool ground = names_ground(wire.name.text);
    if (!neutral && !ground && line >= system.lines.size()) continue;
    const std::string pole = neutral ? "neutral" : ground ? "ground" : system.lines[line++].name;
    const std::string& id = wiring_.wires[index].id;
    const std::string near_end = id + "@" + panel.feeder->from.text;
    const std::string far_end = id + "@" + panel.name.text;
    if (wiring_.wires[index].runs.empty()) joints_.join(joints_.point(near_end), joints_.point(far_end));
    joints_.join(joints_.point(far_end), joints_.point(bar(panel.name.text, pole)));
    if (neutral || ground || panel.feeder->breaker_on) {
      joints_.join(joints_.point(near_end), joints_.point(bar(panel.feeder->from.text, pole)));
    }
  }
  out_.states.push_back(
      fmt::format("{} feeder breaker: {}", panel.name.text, panel.feeder->breaker_on ? "on" : "off"));
}

}  // namespace netlists
