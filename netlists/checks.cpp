#include "netlists/checks.h"

#include <fmt/format.h>

#include <algorithm>

#include "netlists/plan.h"

namespace netlists {

void Names::add(const std::string& name, int index) {
  if (index_.emplace(name, index).second) all_.push_back(name);
}

int Names::find(const std::string& name) const {
  const auto found = index_.find(name);
  return found == index_.end() ? -1 : found->second;
}

Checks::Checks(const Building& checked) : building(checked), wiring(netlists::wiring(checked)) {
  const auto index = [](Names& names, const auto& things) {
    for (std::size_t i = 0; i < things.size(); ++i) names.add(things[i].name.text, static_cast<int>(i));
  };
  index(supplies, building.supplies);
  index(panels, building.panels);
  index(runs, building.runs);
  index(circuits, building.circuits);
  for (const Panel& panel : building.panels) places.add(panel.name.text, 0);
  for (const Run& run : building.runs)
    for (const Name* end : {&run.from, &run.to})
      if (!end->text.empty()) places.add(end->text, 0);
  supply_of_panel_ = root_supplies(building);
  find_doubts();
}

const Supply* Checks::supply_of_panel(const std::string& panel) const {
  const int index = panels.find(panel);
  return index < 0 ? nullptr : supply_of_panel_[static_cast<std::size_t>(index)];
}

void Checks::find_doubts() {
  const auto run_doubtful = [&](const Name& name) {
    const int index = runs.find(name.text);
    if (index < 0) return true;
    const Run& run = building.runs[static_cast<std::size_t>(index)];
    return run.from.text.empty() || run.to.text.empty();
  };
  for (const Run& run : building.runs) places_doubtful |= run.from.text.empty() || run.to.text.empty();
  for (const Circuit& circuit : building.circuits) {
    const auto wire_doubtful = [&](const Wire& wire) {
      return wiring.find(circuit.name.text, wire.name.text) < 0 ||
             std::any_of(wire.runs.begin(), wire.runs.end(), run_doubtful);
    };
    circuit_doubtful.push_back(circuit.runs.empty() || circuit.wires.empty() ||
                               std::any_of(circuit.runs.begin(), circuit.runs.end(), run_doubtful) ||
                               std::any_of(circuit.wires.begin(), circuit.wires.end(), wire_doubtful));
  }
}

/// Whether a name that leads to no wire, or one that does not reach, may be so only because of a
/// fault in the circuits it goes through.
bool Checks::is_doubtful(const std::string& circuit, const std::string& name) const {
  const int own = circuits.find(circuit.empty() ? name.substr(0, name.find('.')) : circuit);
  if (own >= 0 && circuit_doubtful[static_cast<std::size_t>(own)]) return true;
  const int wire = wiring.find(circuit, name);
  const int owner = wire < 0 ? -1 : wiring.wires[static_cast<std::size_t>(wire)].circuit;
  return owner >= 0 && circuit_doubtful[static_cast<std::size_t>(owner)];
}

void Checks::error(const Mark& mark, std::string what) {
  faults.push_back({Severity::error, mark, std::move(what)});
}

void Checks::warn(const Mark& mark, std::string what) {
  faults.push_back({Severity::warning, mark, std::move(what)});
}

std::string Checks::hint(const std::string& word, const std::vector<std::string>& candidates) {
  if (candidates.size() > hint_work_) return "";
  hint_work_ -= candidates.size();
  return nearest_hint(word, candidates);
}

bool Checks::known(const Names& names, const Name& name, const std::string& owner, const std::string& kind) {
  if (name.text.empty()) return false;
  if (names.has(name.text)) return true;
  if (&names == &places && places_doubtful) return false;
  error(name.mark,
        fmt::format("{}: there is no {} '{}'{}", owner, kind, name.text, hint(name.text, names.all())));
  return false;
}

bool Checks::touches(int run, const std::string& place) const {
  const Run& it = building.runs[static_cast<std::size_t>(run)];
  return it.from.text == place || it.to.text == place;
}

bool Checks::reaches(const PhysicalWire& wire, const std::string& place) const {
  return std::any_of(wire.runs.begin(), wire.runs.end(), [&](int run) { return touches(run, place); });
}

/// Points that are no wire: ground and earth anywhere, the neutral bar of a panel, a metal raceway.
bool Checks::is_bar_or_raceway(const std::string& name, const Name& at, const std::string& owner,
                               bool& good) {
  if (name == "ground" || name == "earth") return good = true;
  if (name == "neutral") {
    good = panels.has(at.text);
    if (!good) error(at.mark, fmt::format("{}: '{}' is no panel and has no neutral bar", owner, at.text));
    return true;
  }
  if (!name.ends_with(".raceway")) return false;
  const std::string run_name = name.substr(0, name.size() - std::string_view(".raceway").size());
  const int run = runs.find(run_name);
  good = run >= 0;
  if (!good)
    error(at.mark, fmt::format("{}: there is no run '{}'{}", owner, run_name, hint(run_name, runs.all())));
  else if (!(good = touches(run, at.text)))
    error(at.mark, fmt::format("{}: run '{}' does not reach '{}'", owner, run_name, at.text));
  if (good) {
    const std::string& raceway = building.runs[static_cast<std::size_t>(run)].raceway.text;
    const auto type = building.catalogue.raceways.find(raceway);
    good = type == building.catalogue.raceways.end() || type->second.metal();
    if (raceway == "none" || !good)
      error(at.mark, fmt::format("{}: the raceway of run '{}' is no metal", owner, run_name));
  }
  return true;
}

int Checks::wire_at(const std::string& circuit, const Name& name, const Name& at, const std::string& owner) {
  if (name.text.empty() || at.text.empty()) return -1;
  const int wire = wiring.find(circuit, name.text);
  if (wire >= 0) {
    if (places.has(at.text) && !reaches(wiring.wires[static_cast<std::size_t>(wire)], at.text) &&
        !is_doubtful(circuit, name.text))
      error(name.mark, fmt::format("{}: wire '{}' does not reach '{}'", owner, name.text, at.text));
    return wire;
  }
  bool good = false;
  if (is_bar_or_raceway(name.text, at, owner, good)) return -1;
  std::vector<std::string> candidates;
  const int index = circuits.find(circuit.empty() ? name.text.substr(0, name.text.find('.')) : circuit);
  if (index >= 0)
    for (const Wire& wire_of : building.circuits[static_cast<std::size_t>(index)].wires)
      candidates.push_back(
          circuit.empty() ? fmt::format("{}.{}", name.text.substr(0, name.text.find('.')), wire_of.name.text)
                          : wire_of.name.text);
  if (std::find(candidates.begin(), candidates.end(), name.text) != candidates.end()) return -1;
  error(name.mark, fmt::format("{}: there is no wire '{}'{}", owner, name.text,
                               hint(name.text, index >= 0 ? candidates : circuits.all())));
  return -1;
}

std::string circuit_label(const Circuit& circuit) { return fmt::format("circuit '{}'", circuit.name.text); }

}  // namespace netlists
