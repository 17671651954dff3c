// Questions about a building that both its checks and its lowering ask.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "netlists/building.h"

namespace netlists {

const Panel* find_panel(const Building& building, const std::string& name);
const Supply* find_supply(const Building& building, const std::string& name);
const Circuit* find_circuit(const Building& building, const std::string& name);

/// The supply a panel hangs on, through its feeders; nullptr where they lead nowhere or in a circle.
const Supply* root_supply(const Building& building, const Panel& panel);

/// The same for every panel, in their order, in one walk: each panel is visited once, however many
/// hang on each other.
std::vector<const Supply*> root_supplies(const Building& building);

/// The catalogue entry of a supply's system; nullptr if it is not there.
const SystemType* system_of(const Building& building, const Supply& supply);

/// True if no pole of the supply is joined to ground, nor tied to it through a resistance.
bool floats(const Building& building, const Supply& supply);

/// The pole that is joined to ground: "neutral", "B"; "" where none is.
std::string grounded_pole(const Building& building, const Supply& supply);

/// The line on which pole `index` of a circuit sits: by `line:`, or by its slot, floor((n - 1) / 2)
/// modulo the number of lines. "" if it has neither.
std::string line_of_pole(const SystemType& system, const Circuit& circuit, std::size_t index);

/// What the wires of a circuit land on at its panel, in order: "" for nothing, "neutral", "ground",
/// "pole N" (N from 0), or "line NAME" where the circuit's `lands` names a line. `wires` are the names
/// of those that reach the panel.
std::vector<std::string> landings(const Circuit& circuit, const std::vector<std::string>& wires);

/// True if the box at a place is metal: as the model says, else a panel's, else where a metal raceway
/// or an armoured cable ends.
bool metal_box(const Building& building, const std::string& place);

/// Nominal voltages of a system, V: the least a person would call its line voltage (line to neutral
/// where there is one, else line to line), and the most from a line to ground.
double line_voltage(const SystemType& system);
double most_to_ground(const Building& building, const Supply& supply);

}  // namespace netlists
