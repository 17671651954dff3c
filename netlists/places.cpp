#include "netlists/places.h"

#include <algorithm>
#include <limits>

#include "netlists/plan.h"

namespace netlists {
namespace {

constexpr double k_live_like_most = 50.0;  // V
constexpr double k_live_like_share = 0.4;  // of the lowest line voltage at the place
constexpr double k_dead_like = 3.0;        // V

}  // namespace

Places::Places(const Building& building, const Lowered& lowered, const Conditions& conditions)
    : building_(building), lowered_(lowered), conditions_(conditions) {
  for (std::size_t i = 0; i < lowered.conductors.size(); ++i) {
    for (const Access& access : lowered.conductors[i].access)
      at_[access.place].push_back({static_cast<int>(i), access.node});
  }
  for (const auto& [place, here] : at_) {
    std::set<std::string> names = supplies_at(place);
    if (names.empty()) {
      for (const Supply& supply : building.supplies) names.insert(supply.name.text);
    }
    NominalVolts volts{std::numeric_limits<double>::infinity(), std::numeric_limits<double>::infinity(), 0};
    for (const std::string& name : names) {
      const Supply* supply = find_supply(building, name);
      const SystemType* system = supply ? system_of(building, *supply) : nullptr;
      if (!system) continue;
      const double to_ground = netlists::most_to_ground(building, *supply);
      volts.least_line = std::min(volts.least_line, line_voltage(*system));
      volts.least_to_ground = std::min(volts.least_to_ground, to_ground);
      volts.most_to_ground = std::max(volts.most_to_ground, to_ground);
    }
    nominal_[place] = volts;
  }
}

const std::vector<AtPlace>& Places::at(const std::string& place) const {
  static const std::vector<AtPlace> nothing;
  const auto found = at_.find(place);
  return found == at_.end() ? nothing : found->second;
}

NominalVolts Places::nominal(const std::string& place) const { return nominal_.at(place); }

double Places::live_like(const std::string& place) const {
  if (building_.limits.live_like) return *building_.limits.live_like;
  return std::min(k_live_like_most, k_live_like_share * nominal(place).least_line);
}

Appearance Places::appearance(double volts, const std::string& place) const {
  if (volts >= live_like(place)) return Appearance::live_like;
  return volts < dead_like() ? Appearance::dead_like : Appearance::unclear;
}

double Places::dead_like() const { return building_.limits.dead_like.value_or(k_dead_like); }

std::set<std::string> Places::supplies_at(const std::string& place) const {
  std::set<std::string> names;
  for (const AtPlace& here : at(place)) {
    const std::string& drawn = lowered_.conductors[here.conductor].supply;
    const std::string& solved = conditions_.supply[here.conductor];
    if (!drawn.empty()) names.insert(drawn);
    if (!solved.empty()) names.insert(solved);
  }
  return names;
}

}  // namespace netlists
