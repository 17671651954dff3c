// What the model makes of each conductor: by wires, contacts, bonds, windings and loads alone.
#pragma once

#include <string>
#include <vector>

#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

struct Conditions {
  std::vector<Condition> of_conductor;       // size lowered.conductors
  std::vector<std::string> supply;           // of an energised one: the supply; else ""
  std::vector<std::string> through;          // of a through_load one: the load, "load LP2-7"; else ""
  std::vector<Condition> of_node;            // size node_count
  std::vector<std::string> floating_supply;  // of a node wired to a pole of a floating supply; else ""
  std::vector<std::string> warnings;         // a live pole that is joined to ground
};

/// Conditions after the definitions in netlists/README.md, "Condition": cable capacitance, leakage,
/// filter capacitors and instruments count for nothing. Pieces of wire are found by Boost.Graph.
Conditions conditions(const Lowered& lowered);

}  // namespace netlists
