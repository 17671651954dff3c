// What lies in each run: whether it fits, how full the raceway is, whether a given layout can be.
#include <fmt/format.h>

#include <cmath>
#include <map>
#include <numbers>
#include <random>
#include <stdexcept>
#include <unordered_set>

#include "engine/layout.h"
#include "netlists/checks.h"

namespace netlists {
namespace {

/// A loose wire or a whole factory cable, as one thing in a raceway.
struct Thing {
  std::string name;       // CIRCUIT.wire, or CIRCUIT for a cable
  double diameter = 0.0;  // m, the largest width
};

std::vector<std::vector<Thing>> things_by_run(const Checks& checks) {
  std::vector<std::vector<Thing>> things(checks.building.runs.size());
  for (const PhysicalWire& wire : checks.wiring.wires) {
    const bool of_cable = wire.core >= 0 || wire.armour;
    if (of_cable && wire.core != 0) continue;  // a cable is counted once, by its first core
    for (const int run : wire.runs) {
      auto& list = things[static_cast<std::size_t>(run)];
      if (!of_cable) {
        list.push_back({wire.id, wire.type->outer_diameter()});
        continue;
      }
      const Circuit& circuit = checks.building.circuits[static_cast<std::size_t>(wire.circuit)];
      const CableType& cable = checks.building.catalogue.cables.at(circuit.cable->text);
      list.push_back({circuit.name.text, std::max(cable.width, cable.height)});
    }
  }
  return things;
}

constexpr std::size_t k_most_things = 1000;  // in one run
constexpr double k_densest = 0.9069;         // of a plane filled with equal circles, pi / sqrt(12)

constexpr double circle_area(double diameter) { return std::numbers::pi / 4 * diameter * diameter; }

/// The share of a raceway that may be filled: NEC Chapter 9 Table 1 for conduit and tubing, 376.22(A)
/// for a wireway, both from memory. Trays have rules of their own and none here.
double allowed_fill(RacewayKind kind, std::size_t count) {
  if (kind == RacewayKind::wireway) return 0.20;
  return count == 1 ? 0.53 : count == 2 ? 0.31 : 0.40;
}

double inner_area(const RacewayType& type) {
  return type.kind == RacewayKind::wireway ? type.width * type.height : circle_area(type.inner_diameter);
}

/// Whether things can lie in a raceway at all: by the routine that will lay them.
bool can_be_packed(const std::vector<Thing>& things, const RacewayType& type) {
  std::vector<double> radii;
  for (const Thing& thing : things) radii.push_back(thing.diameter / 2);
  std::mt19937_64 random(1);
  try {
    if (type.kind == RacewayKind::wireway)
      engine::resting_layout(radii, Eigen::Vector2d(type.width / 2, type.height / 2), random);
    else
      engine::resting_layout(radii, type.inner_diameter / 2, random);
    return true;
  } catch (const std::invalid_argument&) {
    return false;
  }
}

void check_run_fill(Checks& checks, const Run& run, const std::vector<Thing>& things) {
  const auto found = checks.building.catalogue.raceways.find(run.raceway.text);
  if (found == checks.building.catalogue.raceways.end() || things.empty()) return;
  const RacewayType& type = found->second;
  if (type.kind == RacewayKind::none || type.kind == RacewayKind::tray) return;
  double taken = 0.0;
  for (const Thing& thing : things) taken += circle_area(thing.diameter);
  const double fill = taken / inner_area(type);
  const double allowed = allowed_fill(type.kind, things.size());
  constexpr double k_certain_to_fit = 0.45;  // below this a packing of round things is found at once
  constexpr std::size_t k_most_tried = 60;
  const bool try_it = things.size() <= k_most_tried && fill > k_certain_to_fit && run.layout.empty();
  const bool overfull = fill >= 1.0 || (things.size() > k_most_tried && fill >= k_densest) ||
                        (try_it && !can_be_packed(things, type));
  const std::string what =
      fmt::format("run '{}': {} {} fill {:.0f} % of its '{}'", run.name.text, things.size(),
                  things.size() == 1 ? "conductor or cable" : "conductors and cables", 100 * fill, type.name);
  if (things.size() > k_most_things)
    checks.error(run.name.mark, fmt::format("run '{}' holds {} conductors and cables; at most {} are taken",
                                            run.name.text, things.size(), k_most_things));
  else if (overfull)
    checks.error(run.raceway.mark, what + ": they do not go in");
  else if (fill > allowed * (1 + 1e-9))
    checks.warn(run.raceway.mark, fmt::format("{}; at most {:.0f} % is usual", what, 100 * allowed));
}

void check_layout_names(Checks& checks, const Run& run, const std::vector<Thing>& things) {
  std::vector<std::string> names;
  for (const Thing& thing : things) {
    names.push_back(thing.name);
    if (!run.layout.contains(thing.name))
      checks.error(run.name.mark,
                   fmt::format("run '{}': layout has no position for '{}'", run.name.text, thing.name));
  }
  const std::unordered_set<std::string> there(names.begin(), names.end());
  for (const auto& entry : run.layout)
    if (!there.contains(entry.first))
      checks.error(run.name.mark, fmt::format("run '{}': layout: '{}' does not lie in it{}", run.name.text,
                                              entry.first, checks.hint(entry.first, names)));
}

void check_layout_room(Checks& checks, const Run& run, const std::vector<Thing>& things) {
  constexpr double k_slack = 1e-9;  // m, for rounding of what the user wrote
  const auto type = checks.building.catalogue.raceways.find(run.raceway.text);
  const bool tube = type != checks.building.catalogue.raceways.end() && type->second.inner_diameter > 0;
  for (std::size_t i = 0; i < things.size(); ++i) {
    const auto at = run.layout.find(things[i].name);
    if (at == run.layout.end()) continue;
    const double radius = things[i].diameter / 2;
    if (tube && at->second.norm() + radius > type->second.inner_diameter / 2 + k_slack)
      checks.error(run.name.mark,
                   fmt::format("run '{}': layout: '{}' sticks out of the raceway, whose inner radius is "
                               "{:.4g} mm",
                               run.name.text, things[i].name, 500 * type->second.inner_diameter));
    if (run.raceway.text == "none" && at->second.y() < radius - k_slack)
      checks.error(run.name.mark, fmt::format("run '{}': layout: '{}' reaches below y = 0, the earthed plane",
                                              run.name.text, things[i].name));
    for (std::size_t j = 0; j < i; ++j) {
      const auto other = run.layout.find(things[j].name);
      if (other == run.layout.end()) continue;
      const double apart = (at->second - other->second).norm();
      const double needed = radius + things[j].diameter / 2;
      if (apart < needed - k_slack)
        checks.error(
            run.name.mark,
            fmt::format(
                "run '{}': layout: '{}' and '{}' overlap: centres {:.4g} mm apart, radii sum to {:.4g} mm",
                run.name.text, things[j].name, things[i].name, 1e3 * apart, 1e3 * needed));
    }
  }
}

}  // namespace

void check_fill(Checks& checks) {
  const auto things = things_by_run(checks);
  for (std::size_t i = 0; i < things.size(); ++i) {
    const Run& run = checks.building.runs[i];
    check_run_fill(checks, run, things[i]);
    if (run.layout.empty() || things[i].size() > k_most_things) continue;
    check_layout_names(checks, run, things[i]);
    check_layout_room(checks, run, things[i]);
  }
}

}  // namespace netlists
