#include "netlists/plan.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <unordered_map>

#include "netlists/wiring.h"

namespace netlists {
namespace {

template <typename Thing>
const Thing* find_named(const std::vector<Thing>& things, const std::string& name) {
  for (const Thing& thing : things) {
    if (thing.name.text == name) return &thing;
  }
  return nullptr;
}

std::complex<double> phasor(const Pole& pole) { return std::polar(pole.volts, pole.angle); }

std::string grounding_of(const SystemType& system, const Supply& supply) {
  return supply.grounding.value_or(system.default_grounding);
}

}  // namespace

const Panel* find_panel(const Building& building, const std::string& name) {
  return find_named(building.panels, name);
}

const Supply* find_supply(const Building& building, const std::string& name) {
  return find_named(building.supplies, name);
}

const Circuit* find_circuit(const Building& building, const std::string& name) {
  return find_named(building.circuits, name);
}

const Supply* root_supply(const Building& building, const Panel& panel) {
  const Panel* at = &panel;
  for (std::size_t steps = 0; at && steps <= building.panels.size(); ++steps) {
    if (at->supply) return find_supply(building, at->supply->text);
    if (!at->feeder) return nullptr;
    at = find_panel(building, at->feeder->from.text);
  }
  return nullptr;
}

std::vector<const Supply*> root_supplies(const Building& building) {
  enum class State : unsigned char { fresh, met, known };
  const std::size_t n = building.panels.size();
  std::unordered_map<std::string, std::size_t> index;
  for (std::size_t i = 0; i < n; ++i) index.emplace(building.panels[i].name.text, i);
  std::unordered_map<std::string, const Supply*> supplies;
  for (const Supply& supply : building.supplies) supplies.emplace(supply.name.text, &supply);
  std::vector<State> states(n, State::fresh);
  std::vector<const Supply*> roots(n, nullptr);
  for (std::size_t start = 0; start < n; ++start) {
    std::vector<std::size_t> way;
    const Supply* root = nullptr;
    for (std::size_t at = start; at < n;) {
      if (states[at] == State::known) root = roots[at];
      if (states[at] != State::fresh) break;
      states[at] = State::met;
      way.push_back(at);
      const Panel& panel = building.panels[at];
      if (panel.supply) {
        const auto found = supplies.find(panel.supply->text);
        root = found == supplies.end() ? nullptr : found->second;
      }
      const auto from = panel.supply || !panel.feeder ? index.end() : index.find(panel.feeder->from.text);
      at = from == index.end() ? n : from->second;
    }
    for (const std::size_t panel : way) {
      states[panel] = State::known;
      roots[panel] = root;
    }
  }
  return roots;
}

const SystemType* system_of(const Building& building, const Supply& supply) {
  const auto found = building.catalogue.systems.find(supply.system.text);
  return found == building.catalogue.systems.end() ? nullptr : &found->second;
}

bool floats(const Building& building, const Supply& supply) {
  const SystemType* system = system_of(building, supply);
  if (!system) return false;
  const std::string grounding = grounding_of(*system, supply);
  return grounding == "isolated" || grounding == "none";
}

std::string grounded_pole(const Building& building, const Supply& supply) {
  const SystemType* system = system_of(building, supply);
  if (!system) return "";
  const std::string grounding = grounding_of(*system, supply);
  if (grounding != "solid" && grounding != "corner") return "";
  if (!system->grounded_pole.empty()) return system->grounded_pole;
  if (system->neutral) return "neutral";
  return system->lines.empty() ? "" : system->lines.back().name;
}

std::string line_of_pole(const SystemType& system, const Circuit& circuit, std::size_t index) {
  if (index >= circuit.poles.size() || system.lines.empty()) return "";
  const PolePosition& position = circuit.poles[index];
  if (!position.line.empty()) return position.line;
  if (!position.slot || *position.slot < 1) return "";
  return system.lines[static_cast<std::size_t>((*position.slot - 1) / 2) % system.lines.size()].name;
}

std::vector<std::string> landings(const Circuit& circuit, const std::vector<std::string>& wires) {
  std::vector<std::string> result;
  int next_pole = 0;
  const int poles = static_cast<int>(circuit.poles.size());
  for (const std::string& wire : wires) {
    const auto given = circuit.lands.find(wire);
    if (given != circuit.lands.end()) {
      const std::string& word = given->second.text;
      if (word == "none") {
        result.emplace_back("");
      } else if (word == "neutral" || word == "ground") {
        result.push_back(word);
      } else {
        result.push_back("line " + word);
      }
    } else if (names_neutral(wire)) {
      result.emplace_back("neutral");
    } else if (names_ground(wire)) {
      result.emplace_back("ground");
    } else if (next_pole < poles) {
      result.push_back("pole " + std::to_string(next_pole++));
    } else {
      result.emplace_back("");
    }
  }
  return result;
}

bool metal_box(const Building& building, const std::string& place) {
  for (const Place& entry : building.places) {
    if (entry.name.text == place && entry.box != Box::by_raceway) return entry.box == Box::metal;
  }
  if (find_panel(building, place)) return true;
  for (const Run& run : building.runs) {
    if (run.from.text != place && run.to.text != place) continue;
    const auto raceway = building.catalogue.raceways.find(run.raceway.text);
    if (raceway != building.catalogue.raceways.end() && raceway->second.metal()) return true;
    for (const Circuit& circuit : building.circuits) {
      if (!circuit.cable) continue;
      const auto cable = building.catalogue.cables.find(circuit.cable->text);
      if (cable == building.catalogue.cables.end() || !cable->second.armour) continue;
      if (std::any_of(circuit.runs.begin(), circuit.runs.end(),
                      [&](const Name& name) { return name.text == run.name.text; })) {
        return true;
      }
    }
  }
  return false;
}

double line_voltage(const SystemType& system) {
  double least = 0.0;
  const auto consider = [&](double volts) {
    if (volts > 1e-9 && (least == 0.0 || volts < least)) least = volts;
  };
  for (std::size_t i = 0; i < system.lines.size(); ++i) {
    if (system.neutral) consider(std::abs(phasor(system.lines[i]) - system.neutral_volts));
    for (std::size_t j = 0; !system.neutral && j < i; ++j) {
      consider(std::abs(phasor(system.lines[i]) - phasor(system.lines[j])));
    }
  }
  return least;
}

double most_to_ground(const Building& building, const Supply& supply) {
  const SystemType* system = system_of(building, supply);
  if (!system) return 0.0;
  const std::string grounded = grounded_pole(building, supply);
  double most = 0.0;
  for (const Pole& line : system->lines) {
    if (!grounded.empty()) {
      std::complex<double> base = system->neutral_volts;
      for (const Pole& pole : system->lines) {
        if (pole.name == grounded) base = phasor(pole);
      }
      most = std::max(most, std::abs(phasor(line) - base));
      continue;
    }
    // With one leg at ground, by a fault, a meter or a person, another stands at full line voltage.
    for (const Pole& other : system->lines) most = std::max(most, std::abs(phasor(line) - phasor(other)));
    if (system->neutral) most = std::max(most, std::abs(phasor(line) - system->neutral_volts));
  }
  return most;
}

}  // namespace netlists
