// Between which points a person measures: a conductor at a place, and what the other lead touches.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "netlists/condition.h"
#include "netlists/findings.h"
#include "netlists/lower.h"
#include "netlists/places.h"

namespace netlists {

struct Probe {
  int node = 0;
  int reference_node = 0;
  std::string reference;  // "ground", "earth" or CIRCUIT.wire
  bool judged = false;    // a reading between the two can mislead
};

/// All that it is built from must outlive it.
class Probes {
 public:
  /// `determined` by node: whether its potential is known at all.
  Probes(const Lowered& lowered, const Conditions& conditions, const Places& places,
         const std::vector<bool>& determined);

  /// To ground, or to earth where the place has no ground.
  Probe to_ground(const Access& access) const;

  /// To the own circuit's neutral, where it is reached there: none or one. What a grounded conductor
  /// reads to a neutral that is fed speaks of the neutral and is not judged.
  std::vector<Probe> to_neutral(std::size_t conductor, const Access& access) const;

  /// To the other wires of its circuit, ground wires left out; shown, not judged.
  std::vector<Probe> to_partners(std::size_t conductor, const Access& access) const;

  /// To the live conductor of another circuit there that puts most on it, else to the one of the
  /// highest voltage (`volts` from earth, by node): none or one; shown, not judged.
  std::vector<Probe> to_neighbour(std::size_t conductor, const Access& access,
                                  const std::vector<ContributionEntry>& contributions,
                                  const std::vector<double>& volts) const;

 private:
  const Lowered& lowered_;
  const Conditions& conditions_;
  const Places& places_;
  const std::vector<bool>& determined_;
  std::map<std::string, std::vector<int>> pieces_;  // of each wire, indices of conductors
};

}  // namespace netlists
