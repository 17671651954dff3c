// Supplies that are fed from a circuit of the model: their primaries and what lies between the windings.
#include <fmt/format.h>

#include <cmath>
#include <numbers>
#include <stdexcept>

#include "netlists/lowering.h"

namespace netlists {
namespace {

constexpr double k_default_winding_to_winding = 1e-9;  // F, of an unscreened transformer, in all
constexpr double k_magnetising_share = 0.05;  // no-load current of a small transformer over its rated one
constexpr double k_default_rating = 1000.0;   // VA, of a transformer that gives none

}  // namespace

double Lowering::secondary_angle(const Supply& supply, double primary) {
  if (supply.angle) return *supply.angle;
  const std::size_t digit = supply.vector_group.find_first_of("0123456789");
  if (digit == std::string::npos) return primary;
  return primary - std::stoi(supply.vector_group.substr(digit)) * std::numbers::pi / 6;
}

std::optional<engine::Complex> Lowering::primary_volts(std::size_t index) {
  const auto [a, b] = primary_points(building_.supplies[index]);
  const std::vector<int> group = galvanic_groups();
  std::optional<Complex> first;
  std::optional<Complex> second;
  for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
    if (!states_[s].alive) continue;
    const SystemType& system = *system_of(building_, building_.supplies[s]);
    for (const std::string& pole : poles(system)) {
      const int point = joints_.point(terminal(building_.supplies[s], pole));
      const auto at = [&](int end) { return group[end] == group[point]; };
      if (at(a)) first = pole_volts(s, system, pole);
      if (at(b)) second = pole_volts(s, system, pole);
    }
  }
  if (!first || !second || std::abs(*first - *second) < 1e-6) return std::nullopt;
  return *first - *second;
}

std::pair<int, int> Lowering::primary_points(const Supply& supply) {
  const FedFrom& fed = *supply.fed_from;
  const Circuit* circuit = find_circuit(building_, fed.circuit.text);
  if (!circuit)
    throw std::invalid_argument("supply '" + supply.name.text + "': circuit '" + fed.circuit.text +
                                "' is not in the model");
  std::string place = fed.at ? fed.at->text : "";
  if (place.empty() && !circuit->runs.empty()) place = far_place(*circuit);
  std::string a = "hot";
  std::string b = "neutral";
  if (fed.between) {
    a = fed.between->first.text;
    b = fed.between->second.text;
  } else {
    std::vector<std::string> names;
    for (const Wire& wire : circuit->wires) {
      if (!names_ground(wire.name.text)) names.push_back(wire.name.text);
    }
    if (names.size() >= 2) {
      a = names[0];
      b = names[1];
    }
  }
  return {point_of(circuit->name.text, a, place), point_of(circuit->name.text, b, place)};
}

std::string Lowering::far_place(const Circuit& circuit) const {
  const Run& last = building_.runs[run_index(circuit.runs.back().text)];
  std::set<std::string> seen;
  if (circuit.panel) seen.insert(circuit.panel->text);
  for (std::size_t i = 0; i + 1 < circuit.runs.size(); ++i) {
    const Run& run = building_.runs[run_index(circuit.runs[i].text)];
    seen.insert({run.from.text, run.to.text});
  }
  return seen.count(last.to.text) ? last.from.text : last.to.text;
}

std::vector<int> Lowering::galvanic_groups() const {
  Joints::Nodes nodes = joints_.nodes();
  std::vector<int> parent(nodes.names.size());
  for (std::size_t i = 0; i < parent.size(); ++i) parent[i] = static_cast<int>(i);
  const auto root = [&](int i) {
    while (parent[i] != i) i = parent[i] = parent[parent[i]];
    return i;
  };
  for (const engine::Line& line : out_.network.lines) {
    for (std::size_t i = 0; i < line.from.size(); ++i) {
      parent[root(nodes.of_point[line.from[i]])] = root(nodes.of_point[line.to[i]]);
    }
  }
  for (const Connection& connection : out_.connections) {
    if (connection.join == Join::wire) {
      parent[root(nodes.of_point[connection.a])] = root(nodes.of_point[connection.b]);
    }
  }
  std::vector<int> group(nodes.of_point.size());
  for (std::size_t p = 0; p < group.size(); ++p) group[p] = root(nodes.of_point[p]);
  return group;
}

void Lowering::add_transformer(const Supply& supply, const SystemType& system) {
  const auto [a, b] = primary_points(supply);
  const double omega = 2 * std::numbers::pi * building_.frequency;
  if (!supply.stray_primary_to_secondary) {
    assumptions_.insert(
        fmt::format("supply '{}': {:.3g} nF between its windings, no screen (common practice)",
                    supply.name.text, k_default_winding_to_winding * 1e9));
  }
  const double between = supply.stray_primary_to_secondary.value_or(k_default_winding_to_winding);
  const std::vector<std::string> names = poles(system);
  for (const std::string& pole : names) {
    // Half of the winding capacitance sits at each end of the primary, an equal share at each pole.
    const Complex share(0.0, omega * between / (2.0 * static_cast<double>(names.size())));
    if (share == 0.0) continue;
    const int point = joints_.point(terminal(supply, pole));
    add_element("windings " + supply.name.text + " " + pole, a, point, share);
    add_element("windings " + supply.name.text + " " + pole, b, point, share);
  }
  const double rating = supply.rating > 0 ? supply.rating : k_default_rating;
  const double volts = primary_nominal(supply);
  if (volts == 0.0) return;
  const Complex winding(0.0, volts * volts / (k_magnetising_share * rating));
  assumptions_.insert(
      fmt::format("supply '{}': its primary draws {:.0f} % of the rated current of {:.0f} VA at no load",
                  supply.name.text, 100 * k_magnetising_share, rating));
  add_element("primary " + supply.name.text, a, b, 1.0 / winding);
  out_.connections.push_back({a, b, Join::load, winding, "primary of " + supply.name.text});
}

double Lowering::primary_nominal(const Supply& supply) const {
  const Circuit* circuit = find_circuit(building_, supply.fed_from->circuit.text);
  return circuit ? nominal_volts(building_, *circuit,
                                 supply.fed_from->between ? supply.fed_from->between->second.text : "neutral")
                 : 0.0;
}

}  // namespace netlists
