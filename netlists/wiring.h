// The wires of a building as physical things: aliases resolved, each with the runs it lies in.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <vector>

#include "netlists/building.h"

namespace netlists {

/// One wire that was pulled: of its own, or a core of a factory cable, or a cable's armour.
struct PhysicalWire {
  std::string id;                  // CIRCUIT.wire of the circuit that owns it
  int circuit = -1;                // index into Building::circuits; -1: a feeder's
  int feeder_panel = -1;           // index into Building::panels of the panel it feeds; -1: a circuit's
  std::string name;                // "hot"
  const WireType* type = nullptr;  // nullptr: armour
  int core = -1;                   // index into the cable's cores; -1: loose or armour
  bool armour = false;
  bool ground = false;           // joined to the others named ground at every box
  bool isolated_ground = false;  // passes through to its panel's ground bar
  std::vector<int> runs;         // indices into Building::runs, the owner's first, without repeats
};

/// All wires, in model order, with the way from every name a user may write to the wire meant.
struct Wiring {
  std::vector<PhysicalWire> wires;
  std::map<std::string, int> by_name;  // CIRCUIT.wire, aliases included -> index into wires

  /// Index of the wire that `name` means inside circuit `circuit` ("" outside any), or -1.
  int find(const std::string& circuit, const std::string& name) const;
};

/// True for the names under which the trade keeps the protective conductor: ground, cpc, earth, pe.
bool names_ground(const std::string& wire);
/// True for "neutral" and "n".
bool names_neutral(const std::string& wire);

/// The wires of a valid building. Wires whose type is not in the catalogue, and names that lead
/// nowhere, are left out: validate() reports them.
Wiring wiring(const Building& building);

}  // namespace netlists
