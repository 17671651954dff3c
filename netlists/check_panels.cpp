// Panels: what feeds them, who sits in which slot, and what every wire lands on.
#include <fmt/format.h>

#include <algorithm>
#include <map>
#include <set>

#include "netlists/checks.h"
#include "netlists/plan.h"

namespace netlists {
namespace {

/// Follows each panel's feeders upwards; a circle is reported once, at its first panel in the file.
void check_feeder_circles(Checks& checks) {
  std::set<std::string> told;
  for (const Panel& panel : checks.building.panels) {
    std::vector<std::string> way{panel.name.text};
    const Panel* at = &panel;
    while (at != nullptr && at->feeder && way.size() <= checks.building.panels.size()) {
      const int from = checks.panels.find(at->feeder->from.text);
      at = from < 0 ? nullptr : &checks.building.panels[static_cast<std::size_t>(from)];
      if (at == nullptr) break;
      way.push_back(at->name.text);
      if (at == &panel) break;
    }
    if (at != &panel || way.size() < 2 || told.contains(panel.name.text)) continue;
    told.insert(way.begin(), way.end());
    checks.error(panel.feeder->from.mark,
                 fmt::format("panel '{}' is fed in a circle: {}", panel.name.text, fmt::join(way, " from ")));
  }
}

/// The supply behind a transformer's primary.
const Supply* supply_upstream(const Checks& checks, const Supply& supply) {
  if (!supply.fed_from) return nullptr;
  const int circuit = checks.circuits.find(supply.fed_from->circuit.text);
  if (circuit < 0) return nullptr;
  const auto& panel_name = checks.building.circuits[static_cast<std::size_t>(circuit)].panel;
  const Panel* panel = panel_name ? find_panel(checks.building, panel_name->text) : nullptr;
  return panel != nullptr ? root_supply(checks.building, *panel) : nullptr;
}

void check_supply_circles(Checks& checks) {
  std::set<std::string> told;
  for (const Supply& supply : checks.building.supplies) {
    std::vector<std::string> way{supply.name.text};
    const Supply* at = supply_upstream(checks, supply);
    for (; at != nullptr && at != &supply && way.size() <= checks.building.supplies.size();
         at = supply_upstream(checks, *at))
      way.push_back(at->name.text);
    if (at != &supply || told.contains(supply.name.text)) continue;
    told.insert(way.begin(), way.end());
    way.push_back(supply.name.text);
    checks.error(supply.fed_from->circuit.mark, fmt::format("supply '{}' is fed in a circle: {}",
                                                            supply.name.text, fmt::join(way, " from ")));
  }
}

std::string line_list(const SystemType& system) {
  std::vector<std::string> names;
  for (const Pole& line : system.lines) names.push_back(line.name);
  return fmt::format("{}", fmt::join(names, ", "));
}

bool has_line(const SystemType& system, const std::string& name) {
  return std::any_of(system.lines.begin(), system.lines.end(), [&](const Pole& p) { return p.name == name; });
}

/// Slot against line, and no two poles on one line.
void check_poles(Checks& checks, const Circuit& circuit, const SystemType& system) {
  std::map<std::string, std::size_t> taken;
  for (std::size_t i = 0; i < circuit.poles.size(); ++i) {
    const PolePosition& pole = circuit.poles[i];
    if (!pole.line.empty() && !has_line(system, pole.line)) {
      checks.error(pole.mark, fmt::format("{}: system '{}' has no line '{}'; it has {}",
                                          circuit_label(circuit), system.name, pole.line, line_list(system)));
      continue;
    }
    if (pole.slot && !pole.line.empty()) {
      Circuit by_slot;
      by_slot.poles.push_back({pole.slot, "", pole.mark});
      const std::string line = line_of_pole(system, by_slot, 0);
      if (line != pole.line)
        checks.error(pole.mark, fmt::format("{}: slot {} is on line {}, not on {}", circuit_label(circuit),
                                            *pole.slot, line, pole.line));
    }
    const std::string line = line_of_pole(system, circuit, i);
    if (!line.empty() && !taken.emplace(line, i).second)
      checks.error(pole.mark, fmt::format("{}: two poles of its breaker are on the same line {}",
                                          circuit_label(circuit), line));
  }
}

void check_slots(Checks& checks) {
  std::map<std::pair<std::string, int>, const Circuit*> taken;
  for (const Circuit& circuit : checks.building.circuits) {
    if (!circuit.panel) continue;
    for (const PolePosition& pole : circuit.poles) {
      if (!pole.slot) continue;
      const auto [first, fresh] = taken.emplace(std::pair(circuit.panel->text, *pole.slot), &circuit);
      if (!fresh)
        checks.error(pole.mark, fmt::format("{}: slot {} of panel '{}' is taken already, by '{}'",
                                            circuit_label(circuit), *pole.slot, circuit.panel->text,
                                            first->second->name.text));
    }
  }
}

void check_lands(Checks& checks, const Circuit& circuit, const SystemType& system) {
  for (const auto& [wire, where] : circuit.lands) {
    const bool there = std::any_of(circuit.wires.begin(), circuit.wires.end(),
                                   [&, name = &wire](const Wire& w) { return w.name.text == *name; });
    if (!there)
      checks.error(where.mark, fmt::format("{}: lands: it has no wire '{}'", circuit_label(circuit), wire));
    const std::string& word = where.text;
    if (word != "none" && word != "neutral" && word != "ground" && !has_line(system, word))
      checks.error(where.mark, fmt::format("{}: lands: '{}' is not one of none, neutral, ground, {}",
                                           circuit_label(circuit), word, line_list(system)));
  }
}

/// The wires of a circuit's own that reach its panel, in order.
std::vector<const Wire*> wires_at_panel(const Checks& checks, const Circuit& circuit) {
  std::vector<const Wire*> wires;
  for (const Wire& wire : circuit.wires) {
    const int index = checks.wiring.find(circuit.name.text, wire.name.text);
    if (index >= 0 && wire.alias.empty() &&
        checks.reaches(checks.wiring.wires[static_cast<std::size_t>(index)], circuit.panel->text))
      wires.push_back(&wire);
  }
  return wires;
}

void check_landings(Checks& checks, const Circuit& circuit, const SystemType& system) {
  const std::vector<const Wire*> wires = wires_at_panel(checks, circuit);
  std::vector<std::string> names;
  for (const Wire* wire : wires) names.push_back(wire->name.text);
  const std::vector<std::string> where = landings(circuit, names);
  const std::string& panel = circuit.panel->text;
  std::size_t poles_used = 0;
  for (std::size_t i = 0; i < wires.size(); ++i) {
    const bool told = circuit.lands.contains(names[i]);
    if (where[i].starts_with("pole") || where[i].starts_with("line")) ++poles_used;
    if (where[i].empty() && !told)
      checks.error(
          wires[i]->name.mark,
          fmt::format("{}: wire '{}' reaches panel '{}' and lands on nothing: its breaker has {} pole{}, "
                      "taken by the wires before it; give the wire runs of its own or write 'lands: {{{}: "
                      "none}}'",
                      circuit_label(circuit), names[i], panel, circuit.poles.size(),
                      circuit.poles.size() == 1 ? "" : "s", names[i]));
    if (where[i] == "neutral" && !system.neutral)
      checks.error(
          wires[i]->name.mark,
          fmt::format("{}: wire '{}' lands on nothing: system '{}' of panel '{}' has no neutral; write "
                      "'lands: {{{}: none}}' if it is left loose",
                      circuit_label(circuit), names[i], system.name, panel, names[i]));
  }
  const bool doubtful =
      checks.circuit_doubtful[static_cast<std::size_t>(&circuit - checks.building.circuits.data())];
  if (!doubtful && !wires.empty() && poles_used < circuit.poles.size())
    checks.warn(circuit.poles[poles_used].mark,
                fmt::format("{}: {} of the {} poles of its breaker takes no wire", circuit_label(circuit),
                            circuit.poles.size() - poles_used, circuit.poles.size()));
}

bool any_run_reaches(const Checks& checks, const std::vector<Name>& runs, const std::string& place) {
  return std::any_of(runs.begin(), runs.end(), [&](const Name& name) {
    const int run = checks.runs.find(name.text);
    return run >= 0 && checks.touches(run, place);
  });
}

void check_reaches_panel(Checks& checks, const Circuit& circuit) {
  std::vector<std::string> ends;
  for (const Name& name : circuit.runs) {
    const int run = checks.runs.find(name.text);
    if (run < 0) return;  // reported where the name is
    const Run& it = checks.building.runs[static_cast<std::size_t>(run)];
    for (const Name* end : {&it.from, &it.to}) {
      if (end->text.empty() || end->text == circuit.panel->text) return;
      ends.push_back(end->text);
    }
  }
  if (!ends.empty())
    checks.error(circuit.panel->mark,
                 fmt::format("{}: none of its runs ends at its panel '{}'{}", circuit_label(circuit),
                             circuit.panel->text, checks.hint(circuit.panel->text, ends)));
}

void check_circuit_at_panel(Checks& checks, const Circuit& circuit) {
  if (!circuit.panel || !checks.panels.has(circuit.panel->text)) return;
  check_reaches_panel(checks, circuit);
  const Panel& panel =
      checks.building.panels[static_cast<std::size_t>(checks.panels.find(circuit.panel->text))];
  const Supply* supply = root_supply(checks.building, panel);
  const SystemType* system = supply != nullptr ? system_of(checks.building, *supply) : nullptr;
  if (system == nullptr) return;
  check_poles(checks, circuit, *system);
  check_lands(checks, circuit, *system);
  const bool poles_known = std::all_of(circuit.poles.begin(), circuit.poles.end(),
                                       [](const PolePosition& p) { return p.slot || !p.line.empty(); });
  if (poles_known && !circuit.poles.empty()) check_landings(checks, circuit, *system);
}

void check_feeder(Checks& checks, const Panel& panel) {
  if (!panel.feeder || !checks.panels.has(panel.feeder->from.text)) return;
  const std::string label = fmt::format("panel '{}': feeder", panel.name.text);
  for (const std::string& end : {panel.name.text, panel.feeder->from.text})
    if (!panel.feeder->runs.empty() && !any_run_reaches(checks, panel.feeder->runs, end))
      checks.error(panel.feeder->mark, fmt::format("{}: none of its runs ends at panel '{}'", label, end));
  const Supply* supply = root_supply(checks.building, panel);
  const SystemType* system = supply != nullptr ? system_of(checks.building, *supply) : nullptr;
  if (system == nullptr) return;
  std::size_t lines = 0;
  for (const Wire& wire : panel.feeder->wires) {
    if (names_ground(wire.name.text)) continue;
    if (names_neutral(wire.name.text)) {
      if (!system->neutral)
        checks.error(wire.name.mark, fmt::format("{}: wire '{}' lands on nothing: system '{}' has no neutral",
                                                 label, wire.name.text, system->name));
    } else if (++lines > system->lines.size()) {
      checks.error(wire.name.mark, fmt::format("{}: wire '{}' lands on nothing: system '{}' has {} line{}",
                                               label, wire.name.text, system->name, system->lines.size(),
                                               system->lines.size() == 1 ? "" : "s"));
    }
  }
}

}  // namespace

void check_panels(Checks& checks) {
  check_feeder_circles(checks);
  check_supply_circles(checks);
  check_slots(checks);
  for (const Panel& panel : checks.building.panels) check_feeder(checks, panel);
  for (const Circuit& circuit : checks.building.circuits) check_circuit_at_panel(checks, circuit);
}

}  // namespace netlists
