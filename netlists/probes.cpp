#include "netlists/probes.h"

#include <cmath>
#include <utility>

#include "netlists/ranking.h"

namespace netlists {

Probes::Probes(const Lowered& lowered, const Conditions& conditions, const Places& places,
               const std::vector<bool>& determined)
    : lowered_(lowered), conditions_(conditions), places_(places), determined_(determined) {
  for (std::size_t i = 0; i < lowered.conductors.size(); ++i)
    pieces_[lowered.conductors[i].wire].push_back(static_cast<int>(i));
}

Probe Probes::to_ground(const Access& access) const {
  const auto ground = lowered_.at.find("ground@" + access.place);
  if (ground == lowered_.at.end()) return {access.node, 0, "earth", true};
  return {access.node, ground->second, "ground", true};
}

std::vector<Probe> Probes::to_neutral(std::size_t conductor, const Access& access) const {
  const std::string& neutral = lowered_.conductors[conductor].neutral;
  const auto pieces = pieces_.find(neutral);
  if (neutral.empty() || pieces == pieces_.end()) return {};
  // A cut neutral goes by another name beyond its cut: the piece that is reached here counts.
  for (const int piece : pieces->second) {
    for (const Access& reached : lowered_.conductors[piece].access) {
      if (reached.place != access.place || !determined_[reached.node]) continue;
      if (reached.node == access.node) return {};
      const bool of_the_neutral =
          conditions_.of_conductor[conductor] == Condition::grounded && fed(conditions_.of_conductor[piece]);
      return {{access.node, reached.node, lowered_.conductors[piece].id, !of_the_neutral}};
    }
  }
  return {};
}

std::vector<Probe> Probes::to_partners(std::size_t conductor, const Access& access) const {
  const ConductorPath& path = lowered_.conductors[conductor];
  if (path.circuit.empty()) return {};
  const std::vector<Probe> neutral = to_neutral(conductor, access);
  std::vector<Probe> probes;
  for (const AtPlace& other : places_.at(access.place)) {
    const ConductorPath& partner = lowered_.conductors[other.conductor];
    if (partner.circuit != path.circuit || partner.ground) continue;
    if (other.node == access.node || !determined_[other.node]) continue;
    if (!neutral.empty() && other.node == neutral.front().reference_node) continue;
    probes.push_back({access.node, other.node, partner.id, false});
  }
  return probes;
}

std::vector<Probe> Probes::to_neighbour(std::size_t conductor, const Access& access,
                                        const std::vector<ContributionEntry>& contributions,
                                        const std::vector<double>& volts) const {
  std::map<std::string, double> share;
  for (const ContributionEntry& entry : contributions) share[entry.from] += std::abs(entry.volts);
  const std::string& circuit = lowered_.conductors[conductor].circuit;
  const AtPlace* best = nullptr;
  std::pair<double, double> best_weight{-1.0, -1.0};
  for (const AtPlace& other : places_.at(access.place)) {
    const ConductorPath& neighbour = lowered_.conductors[other.conductor];
    if (other.node == access.node || neighbour.ground) continue;
    if (conditions_.of_conductor[other.conductor] != Condition::energised) continue;
    if (!neighbour.circuit.empty() && neighbour.circuit == circuit) continue;
    const auto part = share.find(neighbour.id);
    const std::pair<double, double> weight{part == share.end() ? 0.0 : part->second, volts[other.node]};
    if (weight > best_weight) {
      best_weight = weight;
      best = &other;
    }
  }
  if (!best) return {};
  return {{access.node, best->node, lowered_.conductors[best->conductor].id, false}};
}

}  // namespace netlists
