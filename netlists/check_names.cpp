// References between the entries of a building: each must be there, and reach where it is used.
#include <fmt/format.h>

#include <algorithm>
#include <set>
#include <unordered_set>

#include "netlists/checks.h"
#include "netlists/plan.h"

namespace netlists {
namespace {

void check_runs_listed(Checks& checks, const std::vector<Name>& runs, const std::string& owner) {
  std::unordered_set<std::string> seen;
  for (const Name& run : runs) {
    if (!checks.known(checks.runs, run, owner, "run")) continue;
    if (!seen.insert(run.text).second)
      checks.error(run.mark, fmt::format("{}: run '{}' is listed twice", owner, run.text));
  }
}

void check_wires_runs(Checks& checks, const std::vector<Wire>& wires, const std::vector<Name>& runs,
                      const std::string& owner) {
  std::unordered_set<std::string> own;
  for (const Name& run : runs) own.insert(run.text);
  for (const Wire& wire : wires) {
    if (wire.runs.empty()) continue;
    const std::string label = fmt::format("{}: wire '{}'", owner, wire.name.text);
    check_runs_listed(checks, wire.runs, label);
    for (const Name& run : wire.runs)
      if (checks.runs.has(run.text) && !own.contains(run.text))
        checks.error(run.mark,
                     fmt::format("{}: run '{}' is not among the runs of its circuit", label, run.text));
  }
}

/// Aliases have been resolved as far as they go: one that leads to no wire points to nothing, or in a
/// circle.
void check_aliases(Checks& checks, const Circuit& circuit) {
  for (const Wire& wire : circuit.wires) {
    if (wire.alias.empty() || checks.wiring.find(circuit.name.text, wire.name.text) >= 0) continue;
    const auto dot = wire.alias.rfind('.');
    const std::string target = wire.alias.substr(0, dot);
    const int other = checks.circuits.find(target);
    const std::string label = fmt::format("{}: wire '{}'", circuit_label(circuit), wire.name.text);
    std::vector<std::string> names;
    bool there = false;
    if (other >= 0)
      for (const Wire& candidate : checks.building.circuits[static_cast<std::size_t>(other)].wires) {
        names.push_back(target + "." + candidate.name.text);
        there = there || names.back() == wire.alias;
      }
    if (there)
      checks.error(wire.mark, fmt::format("{} is '{}', which leads back to it or to a wire with a fault",
                                          label, wire.alias));
    else
      checks.error(wire.mark, fmt::format("{}: there is no wire '{}'{}", label, wire.alias,
                                          checks.hint(wire.alias, names)));
  }
}

void check_device_names(Checks& checks, const Circuit& circuit) {
  std::unordered_set<std::string> seen{"breaker"};
  const auto take = [&](const std::string& name, const Mark& mark) {
    if (name.empty() || seen.insert(name).second) return;
    checks.error(
        mark, name == "breaker"
                  ? fmt::format("{}: no switch or load can be called 'breaker'", circuit_label(circuit))
                  : fmt::format("{}: two switches or loads are called '{}'", circuit_label(circuit), name));
  };
  for (const Switch& item : circuit.switches) take(item.name, item.mark);
  if (circuit.loads)
    for (const Load& load : *circuit.loads) take(load.name, load.mark);
}

std::string with_name(const std::string& what, const std::string& name) {
  return name.empty() ? what : fmt::format("{} '{}'", what, name);
}

void check_devices(Checks& checks, const Circuit& circuit) {
  const std::string& id = circuit.name.text;
  for (const Switch& item : circuit.switches) {
    const std::string label = circuit_label(circuit) + ": " + with_name("switch", item.name);
    checks.known(checks.places, item.at, label, "place");
    for (const Name& wire : item.wires) checks.wire_at(id, wire, item.at, label);
  }
  if (!circuit.loads) return;
  for (const Load& load : *circuit.loads) {
    const std::string label = circuit_label(circuit) + ": " + with_name("load", load.name);
    checks.known(checks.places, load.at, label, "place");
    const int a = checks.wire_at(id, load.between.first, load.at, label);
    const int b = checks.wire_at(id, load.between.second, load.at, label);
    if (a >= 0 && a == b && load.between.first.text != load.between.second.text)
      checks.error(load.between.second.mark, fmt::format("{}: '{}' and '{}' are the same wire", label,
                                                         load.between.first.text, load.between.second.text));
  }
}

void check_circuit(Checks& checks, const Circuit& circuit) {
  const std::string label = circuit_label(circuit);
  if (circuit.panel) checks.known(checks.panels, *circuit.panel, label, "panel");
  check_runs_listed(checks, circuit.runs, label);
  check_wires_runs(checks, circuit.wires, circuit.runs, label);
  check_aliases(checks, circuit);
  check_device_names(checks, circuit);
  check_devices(checks, circuit);
}

void check_panel(Checks& checks, const Panel& panel) {
  const std::string label = fmt::format("panel '{}'", panel.name.text);
  if (panel.supply) checks.known(checks.supplies, *panel.supply, label, "supply");
  if (!panel.feeder) return;
  checks.known(checks.panels, panel.feeder->from, label + ": feeder", "panel");
  check_runs_listed(checks, panel.feeder->runs, label + ": feeder");
  check_wires_runs(checks, panel.feeder->wires, panel.feeder->runs, label + ": feeder");
  for (const Wire& wire : panel.feeder->wires)
    if (!wire.alias.empty())
      checks.error(wire.mark, fmt::format("{}: feeder: wire '{}' must be of its own, not '{}'", label,
                                          wire.name.text, wire.alias));
  if (checks.circuits.has(panel.name.text))
    checks.error(
        panel.name.mark,
        fmt::format("{} has a feeder and a circuit has the same name; their wires could not be told apart",
                    label));
}

void check_supply(Checks& checks, const Supply& supply) {
  if (!supply.fed_from) return;
  const FedFrom& fed = *supply.fed_from;
  const std::string label = fmt::format("supply '{}': fed_from", supply.name.text);
  if (!checks.known(checks.circuits, fed.circuit, label, "circuit")) return;
  if (fed.at) checks.known(checks.places, *fed.at, label, "place");
  if (!fed.between) return;
  for (const Name* wire : {&fed.between->first, &fed.between->second}) {
    if (fed.at)
      checks.wire_at(fed.circuit.text, *wire, *fed.at, label);
    else if (!wire->text.empty() && checks.wiring.find(fed.circuit.text, wire->text) < 0)
      checks.error(wire->mark, fmt::format("{}: there is no wire '{}'", label, wire->text));
  }
}

void check_alongside(Checks& checks, const Alongside& alongside) {
  check_runs_listed(checks, alongside.runs, "alongside");
  if (!alongside.over) return;
  for (const Name& name : alongside.runs) {
    const int index = checks.runs.find(name.text);
    if (index < 0) continue;
    const double length = checks.building.runs[static_cast<std::size_t>(index)].length;
    if (length > 0 && *alongside.over > length * (1 + 1e-9))
      checks.error(name.mark, fmt::format("alongside: over {:g} m, but run '{}' is only {:g} m long",
                                          *alongside.over, name.text, length));
  }
}

void check_bond(Checks& checks, const Bond& bond) {
  const std::string label = with_name("bond", bond.name);
  checks.known(checks.places, bond.at, label, "place");
  std::set<int> seen;
  for (const Name& end : bond.joins) {
    const int wire = checks.wire_at("", end, bond.at, label);
    if (wire >= 0 && !seen.insert(wire).second)
      checks.error(end.mark, fmt::format("{}: joins '{}' with itself", label, end.text));
  }
}

void check_cut(Checks& checks, const Cut& cut) {
  checks.known(checks.places, cut.at, "cut", "place");
  if (!checks.known(checks.runs, cut.side, "cut", "run")) return;
  const int wire = checks.wire_at("", cut.wire, cut.at, "cut");
  const int run = checks.runs.find(cut.side.text);
  if (!checks.touches(run, cut.at.text))
    checks.error(cut.side.mark, fmt::format("cut: run '{}' does not reach '{}'", cut.side.text, cut.at.text));
  if (wire < 0) return;
  const auto& runs = checks.wiring.wires[static_cast<std::size_t>(wire)].runs;
  if (std::find(runs.begin(), runs.end(), run) == runs.end())
    checks.error(cut.side.mark,
                 fmt::format("cut: wire '{}' does not lie in run '{}'", cut.wire.text, cut.side.text));
}

void check_leak(Checks& checks, const Leak& leak) {
  checks.known(checks.places, leak.at, "leak", "place");
  const int a = checks.wire_at("", leak.between.first, leak.at, "leak");
  const int b = checks.wire_at("", leak.between.second, leak.at, "leak");
  if (a >= 0 && a == b && leak.between.first.text != leak.between.second.text)
    checks.error(leak.mark, "leak: both ends are the same wire");
}

}  // namespace

void check_names(Checks& checks) {
  const Building& building = checks.building;
  for (const Supply& supply : building.supplies) check_supply(checks, supply);
  for (const Panel& panel : building.panels) check_panel(checks, panel);
  for (const Place& place : building.places)
    if (!checks.places.has(place.name.text) && !checks.places_doubtful)
      checks.warn(place.name.mark, fmt::format("place '{}' is at the end of no run{}", place.name.text,
                                               checks.hint(place.name.text, checks.places.all())));
  for (const Alongside& alongside : building.alongside) check_alongside(checks, alongside);
  for (const Circuit& circuit : building.circuits) check_circuit(checks, circuit);
  for (const Bond& bond : building.bonds) check_bond(checks, bond);
  for (const Cut& cut : building.cuts) check_cut(checks, cut);
  for (const Leak& leak : building.leaks) check_leak(checks, leak);
  for (const Stage& stage : building.stages) {
    for (const Bond& bond : stage.bonds) check_bond(checks, bond);
    for (const Cut& cut : stage.cuts) check_cut(checks, cut);
  }
}

}  // namespace netlists
