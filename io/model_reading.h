// The parts of reading a model file, one function a section of the file. Private to io.
#pragma once

#include <optional>
#include <string>
#include <unordered_map>
#include <unordered_set>
#include <utility>
#include <vector>

#include "io/yaml_reader.h"
#include "netlists/building.h"

namespace io {

/// What a model file is read with and into.
struct ModelReading {
  YamlReader& reader;
  netlists::Building& building;
  std::unordered_set<std::string> owners;  // circuits, and panels with feeders: who has wires
  std::unordered_map<std::string, const netlists::SystemType*> systems = {};  // by panel
};

// Bounds that no building passes: they catch slips of unit and sign, and keep the arithmetic sound.
inline constexpr Range k_run_length{1e-3, 1e5, "1 mm to 100 km"};
inline constexpr Range k_distance{1e-5, 100, "0.01 mm to 100 m"};
inline constexpr Range k_coordinate{-10, 10, "-10 m to 10 m"};
inline constexpr Range k_contact{0, 1e9, "0 ohm to 1000 Mohm"};
inline constexpr Range k_resistance{1e-3, 1e15, "1 mohm to 1000000 Gohm"};
inline constexpr Range k_reactance{-1e6, 1e6, "-1 Mohm to 1 Mohm"};
inline constexpr Range k_capacitance{0, 1, "0 pF to 1000000 uF"};
inline constexpr Range k_power{1e-3, 1e9, "1 mW to 1000000 kW"};
inline constexpr Range k_apparent{1e-3, 1e9, "0.001 VA to 1000 MVA"};
inline constexpr Range k_current{1e-6, 1e6, "1 uA to 1000000 A"};
inline constexpr Range k_voltage{1e-3, 1e6, "1 mV to 1000 kV"};
inline constexpr Range k_angle{-6.283185307179587, 6.283185307179587, "-360 deg to 360 deg"};
inline constexpr Range k_probability{0, 1, "0 to 1"};

void read_settings(ModelReading& reading, const YamlMap& top);     // frequency, limits, instruments, ...
void read_supplies(ModelReading& reading, const YamlMap& top);     // supplies and panels
void read_runs(ModelReading& reading, const YamlMap& top);         // places, runs, alongside
void read_circuits(ModelReading& reading, const YamlMap& top);     // circuits
void read_connections(ModelReading& reading, const YamlMap& top);  // bonds, cuts, leaks
void read_stages(ModelReading& reading, const YamlMap& top);       // stages

/// Fills Building::defaults with what the top of the file leaves open.
void tell_defaults(netlists::Building& building, const YamlMap& top);

// Helpers of several sections.

/// A required or optional name, its text empty after a fault (which has been reported).
netlists::Name required_name(const YamlMap& map, std::string_view key);
std::optional<netlists::Name> optional_name(const YamlMap& map, std::string_view key);
std::vector<netlists::Name> names(const YamlMap& map, std::string_view key, std::string_view form);
/// `between: [a, b]`; both empty after a fault.
std::pair<netlists::Name, netlists::Name> required_pair(const YamlMap& map, std::string_view key);

/// Reports a name that will not do as part of CIRCUIT.wire@place: one with a dot or an @.
void check_id(YamlReader& reader, const YamlNode& key, const std::string& owner);

std::vector<netlists::Wire> read_wires(ModelReading& reading, const YamlMap& owner);
void read_loads(ModelReading& reading, const YamlMap& circuit_map, netlists::Circuit& circuit);
void read_switches(ModelReading& reading, const YamlMap& circuit_map, netlists::Circuit& circuit);
std::vector<netlists::Bond> read_bonds(ModelReading& reading, const YamlMap& owner);
std::vector<netlists::Cut> read_cuts(ModelReading& reading, const YamlMap& owner);

/// Reports a name that is not among the keys of a catalogue's part; true if it is.
template <class Map>
bool in_catalogue(const YamlMap& map, const YamlNode& at, const std::string& name, const Map& part,
                  const std::string& what) {
  if (part.contains(name)) return true;
  std::vector<std::string> known;
  for (const auto& entry : part) known.push_back(entry.first);
  const std::string hint = netlists::nearest_hint(name, known);
  map.error(at, what + " '" + name + "' is not in the catalogue" +
                    (hint.empty() ? "; 'idlewire catalogue' lists what is" : hint));
  return false;
}

}  // namespace io
