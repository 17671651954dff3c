#include "netlists/causes.h"

#include <algorithm>
#include <cmath>

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_smallest_share = 1e-3;  // of the largest contribution; less goes into "others"

std::string to_word(engine::Path path) {
  switch (path) {
    case engine::Path::electric:
      return "electric";
    case engine::Path::magnetic:
      return "magnetic";
    case engine::Path::conductive:
      return "conductive";
  }
  return "";
}

}  // namespace

Causes::Causes(const Building& building, const Lowered& lowered, const Conditions& conditions,
               const engine::SolvedNetwork& solved)
    : lowered_(lowered),
      conditions_(conditions),
      solved_(solved),
      ground_(static_cast<int>(lowered.conductors.size())) {
  for (const ConductorPath& path : lowered.conductors) names_.push_back(path.id);
  names_.emplace_back("ground");
  for (const Supply& supply : building.supplies) {
    supply_[supply.name.text] = static_cast<int>(names_.size());
    names_.push_back("supply:" + supply.name.text);
  }
  owner_ = owners();
}

std::vector<ContributionEntry> Causes::contributions(int node, int reference,
                                                     const std::string& isolated_supply) {
  auto& attribution = attributions_[isolated_supply];
  if (!attribution) attribution = std::make_unique<engine::Attribution>(solved_, aggressors(isolated_supply));
  const auto parts = attribution->contributions(node, reference);
  double largest = 0.0;
  for (const engine::Contribution& part : parts) largest = std::max(largest, std::abs(part.volts));
  std::vector<ContributionEntry> entries;
  std::map<engine::Path, Complex> others;
  for (const engine::Contribution& part : parts) {
    if (std::abs(part.volts) < k_smallest_share * largest) {
      others[part.path] += part.volts;
    } else {
      entries.push_back({names_[part.group], to_word(part.path), part.volts});
    }
  }
  for (const auto& [path, volts] : others) {
    if (volts != 0.0) entries.push_back({"others", to_word(path), volts});
  }
  return entries;
}

int Causes::supply_group(const std::string& name) const {
  const auto found = supply_.find(name);
  return found == supply_.end() ? ground_ : found->second;
}

engine::Aggressors Causes::aggressors(const std::string& frame) const {
  const engine::Network& network = lowered_.network;
  engine::Aggressors result;
  std::vector<bool> fixed;
  for (int n = 0; n < network.node_count; ++n) {
    const Condition condition = conditions_.of_node[n];
    const bool own = !frame.empty() && conditions_.floating_supply[n] == frame;
    fixed.push_back((condition == Condition::energised || condition == Condition::grounded) && !own);
    result.of_node.push_back(fixed.back() ? owner_[n] : -1);
  }
  for (std::size_t l = 0; l < network.lines.size(); ++l) {
    result.of_segment.emplace_back();
    for (const int node : network.lines[l].from) result.of_segment[l].push_back(fixed[node] ? 0 : -1);
  }
  for (std::size_t c = 0; c < lowered_.conductors.size(); ++c) {
    for (const auto& [line, row] : lowered_.conductors[c].segments) {
      int& group = result.of_segment[line][row];
      if (group >= 0) group = static_cast<int>(c);
    }
  }
  for (const std::string& name : lowered_.source_names)
    result.of_source.push_back(supply_group(name.substr(0, name.rfind(' '))));
  return result;
}

// A node belongs to ground where it is one, else to the first conductor that is reached there, else to
// the supply whose pole it is.
std::vector<int> Causes::owners() const {
  std::vector<int> owner(static_cast<std::size_t>(lowered_.network.node_count), ground_);
  for (const LivePole& pole : lowered_.poles) {
    if (!pole.grounded) owner[pole.node] = supply_group(pole.supply);
  }
  std::vector<bool> taken(owner.size(), false);
  for (const auto& [name, at] : lowered_.at) {
    if (name.rfind("ground@", 0) == 0) taken[at] = true;
  }
  for (std::size_t c = 0; c < lowered_.conductors.size(); ++c) {
    for (const Access& access : lowered_.conductors[c].access) {
      if (!taken[access.node] && owner[access.node] == ground_) owner[access.node] = static_cast<int>(c);
    }
  }
  return owner;
}

}  // namespace netlists
