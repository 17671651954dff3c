// Which conductor, bar or supply puts a voltage on another, in the names of the model.
#pragma once

#include <map>
#include <memory>
#include <string>
#include <vector>

#include "engine/attribution.h"
#include "netlists/building.h"
#include "netlists/condition.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

/// All that it is built from must outlive it.
class Causes {
 public:
  Causes(const Building& building, const Lowered& lowered, const Conditions& conditions,
         const engine::SolvedNetwork& solved);

  /// What adds up to the volts between a victim's node and `reference`, largest first; parts under 1e-3
  /// of the largest are merged into "others", one for each path. `isolated_supply` names the floating
  /// supply whose own conductor is asked about, "" for any other conductor: what sets its potential is
  /// asked then, so the whole supply is a victim and its EMF is "supply:NAME".
  std::vector<ContributionEntry> contributions(int node, int reference, const std::string& isolated_supply);

 private:
  engine::Aggressors aggressors(const std::string& frame) const;
  std::vector<int> owners() const;
  int supply_group(const std::string& name) const;

  const Lowered& lowered_;
  const Conditions& conditions_;
  const engine::SolvedNetwork& solved_;
  std::vector<std::string> names_;     // of groups: conductors, ground, supplies
  std::map<std::string, int> supply_;  // name -> group
  int ground_ = 0;                     // group
  std::vector<int> owner_;             // group, by node
  std::map<std::string, std::unique_ptr<engine::Attribution>> attributions_;  // by isolated supply
};

}  // namespace netlists
