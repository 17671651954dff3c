// Panels: what feeds them, who sits in which slot, and what every wire lands on.
#include <fmt/format.h>

#include <algorithm>
#include <map>
#include <set>

#include "netlists/checks.h"
#include "netlists/plan.h"

namespace netlists {
namespace {

/// Follows `up` (an index, or -1) from each of n things; every circle is given to `tell` once, from its
/// first member in the file. Each thing is walked over once.
template <class Up, class Tell>
void find_circles(std::size_t n, Up up, Tell tell) {
  std::vector<std::size_t> walk(n, 0);  // the walk, from 1, that first came by
  for (std::size_t start = 0; start < n; ++start) {
    int at = static_cast<int>(start);
    while (at >= 0 && walk[static_cast<std::size_t>(at)] == 0) {
      walk[static_cast<std::size_t>(at)] = start + 1;
      at = up(static_cast<std::size_t>(at));
    }
    if (at < 0 || walk[static_cast<std::size_t>(at)] != start + 1) continue;
    std::vector<std::size_t> circle;
    const auto first = static_cast<std::size_t>(at);
    do {
      circle.push_back(static_cast<std::size_t>(at));
      at = up(static_cast<std::size_t>(at));
    } while (static_cast<std::size_t>(at) != first);
    std::rotate(circle.begin(), std::min_element(circle.begin(), circle.end()), circle.end());
    tell(circle);
  }
}

/// "A from B from A", the middle of a long one left out.
template <class Thing>
std::string circle_words(const std::vector<Thing>& things, const std::vector<std::size_t>& circle) {
  std::string words;
  for (std::size_t i = 0; i < circle.size(); ++i) {
    if (i == 8 && circle.size() > 10) words += "... from ";
    if (i < 8 || i + 1 == circle.size() || circle.size() <= 10)
      words += things[circle[i]].name.text + " from ";
  }
  return words + things[circle[0]].name.text;
}

void check_feeder_circles(Checks& checks) {
  const auto& panels = checks.building.panels;
  const auto up = [&](std::size_t p) {
    return panels[p].feeder && !panels[p].supply ? checks.panels.find(panels[p].feeder->from.text) : -1;
  };
  find_circles(panels.size(), up, [&](const std::vector<std::size_t>& circle) {
    const Panel& panel = panels[circle[0]];
    checks.error(panel.feeder->from.mark, fmt::format("panel '{}' is fed in a circle: {}", panel.name.text,
                                                      circle_words(panels, circle)));
  });
}

/// From a transformer to the supply behind its primary.
void check_supply_circles(Checks& checks) {
  const auto& supplies = checks.building.supplies;
  const auto up = [&](std::size_t s) {
    if (!supplies[s].fed_from) return -1;
    const int circuit = checks.circuits.find(supplies[s].fed_from->circuit.text);
    if (circuit < 0) return -1;
    const auto& panel = checks.building.circuits[static_cast<std::size_t>(circuit)].panel;
    const Supply* supply = panel ? checks.supply_of_panel(panel->text) : nullptr;
    return supply != nullptr ? static_cast<int>(supply - supplies.data()) : -1;
  };
  find_circles(supplies.size(), up, [&](const std::vector<std::size_t>& circle) {
    const Supply& supply = supplies[circle[0]];
    checks.error(
        supply.fed_from->circuit.mark,
        fmt::format("supply '{}' is fed in a circle: {}", supply.name.text, circle_words(supplies, circle)));
  });
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
  const Supply* supply = checks.supply_of_panel(circuit.panel->text);
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
  const Supply* supply = checks.supply_of_panel(panel.name.text);
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
