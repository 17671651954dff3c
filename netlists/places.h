// What can be reached at each place of a building, and what voltages stand there by its drawings.
#pragma once

#include <map>
#include <set>
#include <string>
#include <vector>

#include "netlists/building.h"
#include "netlists/condition.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

/// A conductor as it is reached at a place.
struct AtPlace {
  int conductor = 0;  // index into Lowered::conductors
  int node = 0;
};

/// Nominal voltages of the supplies at a place, V; of all of the model where none is there.
struct NominalVolts {
  double least_line = 0.0;       // the lowest that a person would call a line voltage
  double least_to_ground = 0.0;  // the highest to ground of the supply where that is lowest
  double most_to_ground = 0.0;
};

/// All that it is built from must outlive it.
class Places {
 public:
  Places(const Building& building, const Lowered& lowered, const Conditions& conditions);

  /// In the order of Lowered::conductors; empty for a place where nothing is reached.
  const std::vector<AtPlace>& at(const std::string& place) const;

  NominalVolts nominal(const std::string& place) const;

  /// From here on a reading looks live, V: the model's limit, or the lesser of 50 V and 40 % of the
  /// lowest line voltage there.
  double live_like(const std::string& place) const;

  /// Below it a reading looks dead, V.
  double dead_like() const;

  /// What a reading of so many volts looks like there (netlists/README.md, "Misleading").
  Appearance appearance(double volts, const std::string& place) const;

 private:
  std::set<std::string> supplies_at(const std::string& place) const;

  const Building& building_;
  const Lowered& lowered_;
  const Conditions& conditions_;
  std::map<std::string, std::vector<AtPlace>> at_;
  std::map<std::string, NominalVolts> nominal_;
};

}  // namespace netlists
