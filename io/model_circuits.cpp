#include <fmt/format.h>

#include <algorithm>

#include "io/model_reading.h"
#include "netlists/plan.h"

namespace io {
namespace {

using netlists::CableType;
using netlists::Circuit;
using netlists::Name;
using netlists::PolePosition;
using netlists::Wire;

// What no circuit comes near, and what keeps a check that compares each with each from taking minutes.
constexpr std::size_t k_most_wires = 1000;
constexpr std::size_t k_most_runs = 10000;

std::string nearest_owner(const ModelReading& reading, const std::string& word) {
  if (reading.owners.size() > 1000) return "";  // a large model full of slips must not take minutes
  std::vector<std::string> names(reading.owners.begin(), reading.owners.end());
  std::sort(names.begin(), names.end());
  return netlists::nearest_hint(word, names);
}

void take_type_or_alias(ModelReading& reading, const YamlMap& owner, const YamlNode& node,
                        const std::string& text, Wire& wire) {
  const auto& types = reading.building.catalogue.wires;
  if (types.contains(text)) {
    wire.type = text;
    return;
  }
  const auto dot = text.rfind('.');
  if (dot != std::string::npos && reading.owners.contains(text.substr(0, dot))) {
    wire.alias = text;
    return;
  }
  std::vector<std::string> known;
  for (const auto& entry : types) known.push_back(entry.first);
  if (dot != std::string::npos && netlists::nearest(text, known).empty()) {
    const std::string circuit = text.substr(0, dot);
    owner.error(node, fmt::format("wire '{}': there is no circuit '{}'{}", wire.name.text, circuit,
                                  nearest_owner(reading, circuit)));
    return;
  }
  owner.error(node, fmt::format("wire '{}': wire type '{}' is not in the catalogue{}", wire.name.text, text,
                                netlists::nearest_hint(text, known)));
}

Wire read_wire(ModelReading& reading, const YamlMap& owner, const YamlNode& key, const YamlNode& value) {
  Wire wire;
  wire.name = {key.text, reading.reader.mark(key)};
  wire.mark = reading.reader.mark(value);
  check_id(reading.reader, key, owner.owner());
  for (const char* word : {"breaker", "raceway", "armour"})
    if (key.text == word)
      owner.error(key, fmt::format("no wire can be called '{}': the word has a meaning of its own", word));
  if (value.kind == YamlKind::scalar) {
    if (const auto text = reading.reader.text(value, {owner.owner(), "wire '" + key.text + "'"}))
      take_type_or_alias(reading, owner, value, *text, wire);
    return wire;
  }
  const YamlMap map(reading.reader, value, fmt::format("{}: wire '{}'", owner.owner(), key.text),
                    {"type", "runs", "isolated_ground"}, &key);
  if (!map.is_map()) return wire;
  map.require("type");
  if (const auto text = map.text("type")) take_type_or_alias(reading, owner, *map.find("type"), *text, wire);
  wire.runs = names(map, "runs", "[C1, C2]");
  if (wire.runs.size() > k_most_runs) {
    map.error(*map.find("runs"),
              fmt::format("lies in {} runs; at most {} are taken", wire.runs.size(), k_most_runs));
    wire.runs.clear();
  }
  wire.isolated_ground = map.flag("isolated_ground").value_or(false);
  return wire;
}

void read_poles(ModelReading& reading, const YamlMap& map, Circuit& circuit) {
  const auto each = [&](const char* key, auto take) {
    const YamlNode* node = map.find(key);
    if (node == nullptr) return;
    const bool many = node->kind == YamlKind::sequence;
    const std::size_t count = many ? node->items.size() : 1;
    if (count == 0 || count > 4) map.error(*node, fmt::format("{} must name 1 to 4 poles", key));
    for (std::size_t i = 0; i < std::min<std::size_t>(count, 4); ++i) {
      const YamlNode& item = many ? node->items[i] : *node;
      if (circuit.poles.size() <= i) circuit.poles.push_back({std::nullopt, "", reading.reader.mark(item)});
      take(item, circuit.poles[i]);
    }
  };
  each("slot", [&](const YamlNode& item, PolePosition& pole) {
    pole.slot = reading.reader.whole(item, 1, 200, {map.owner(), "slot"});
  });
  const std::size_t slots = circuit.poles.size();
  each("line", [&](const YamlNode& item, PolePosition& pole) {
    pole.line = reading.reader.text(item, {map.owner(), "line"}).value_or("");
  });
  if (slots > 0 && map.has("line") && slots != circuit.poles.size())
    map.error(*map.find("line"), "slot and line name different numbers of poles");
  if (!circuit.panel && map.has("slot")) map.error(*map.key_node("slot"), "a slot without a panel");
  if (!circuit.panel && map.has("line")) map.error(*map.key_node("line"), "a line without a panel");
  if (circuit.panel && !map.has("slot") && !map.has("line"))
    map.error(map.place(), "needs a slot or a line at its panel, as in 'slot: 7' or 'line: A'");
}

/// The pole that a key of `breaker: {A: on, B: off}` means: by its line or its slot.
std::optional<std::size_t> pole_named(const ModelReading& reading, const Circuit& circuit,
                                      const std::string& key) {
  const auto found = reading.systems.find(circuit.panel ? circuit.panel->text : "");
  const auto* system = found != reading.systems.end() ? found->second : nullptr;
  for (std::size_t i = 0; i < circuit.poles.size(); ++i) {
    const PolePosition& pole = circuit.poles[i];
    if (pole.slot && std::to_string(*pole.slot) == key) return i;
    if (pole.line == key || (system != nullptr && line_of_pole(*system, circuit, i) == key)) return i;
  }
  return std::nullopt;
}

void read_breaker(ModelReading& reading, const YamlMap& map, Circuit& circuit) {
  circuit.breaker.assign(circuit.poles.size(), true);
  const YamlNode* node = map.find("breaker");
  if (node == nullptr) return;
  if (!circuit.panel) map.error(*map.key_node("breaker"), "a breaker without a panel");
  if (node->kind == YamlKind::scalar) {
    const bool on = map.flag("breaker").value_or(true);
    std::fill(circuit.breaker.begin(), circuit.breaker.end(), on);
    return;
  }
  for_each_entry(
      reading.reader, *node, map.owner() + ": breaker", [&](const YamlNode& key, const YamlNode& value) {
        const auto on = reading.reader.flag(value, {map.owner(), "breaker of pole '" + key.text + "'"});
        const auto pole = pole_named(reading, circuit, key.text);
        if (!pole) map.error(key, fmt::format("its breaker has no pole '{}'", key.text));
        if (pole && on) circuit.breaker[*pole] = *on;
      });
}

void add_cores(const YamlMap& map, const CableType& cable, Circuit& circuit) {
  for (const auto& core : cable.cores) {
    const auto renamed = circuit.rename.find(core.role);
    Wire wire;
    wire.name =
        renamed != circuit.rename.end() ? renamed->second : Name{core.role, map.reader().mark(map.place())};
    wire.type = core.wire.name;
    wire.mark = map.reader().mark(map.place());
    circuit.wires.push_back(std::move(wire));
  }
}

void read_cable(ModelReading& reading, const YamlMap& map, Circuit& circuit) {
  circuit.cable = optional_name(map, "cable");
  const auto& cables = reading.building.catalogue.cables;
  const CableType* cable = nullptr;
  if (circuit.cable && in_catalogue(map, *map.find("cable"), circuit.cable->text, cables, "cable"))
    cable = &cables.at(circuit.cable->text);
  if (const YamlNode* node = map.find("rename")) {
    if (!circuit.cable) map.error(*map.key_node("rename"), "rename goes with a factory cable only");
    const std::string what = map.owner() + ": rename";
    for_each_entry(reading.reader, *node, what, [&](const YamlNode& key, const YamlNode& value) {
      const auto name = reading.reader.text(value, {what, key.text});
      if (!name) return;
      check_id(reading.reader, value, what);
      circuit.rename[key.text] = {*name, reading.reader.mark(value)};
      if (cable == nullptr) return;
      std::vector<std::string> roles;
      for (const auto& core : cable->cores) roles.push_back(core.role);
      if (std::find(roles.begin(), roles.end(), key.text) == roles.end())
        reading.reader.error(key, what,
                             fmt::format("'{}' has no core '{}'; it has {}", cable->name, key.text,
                                         fmt::format("{}", fmt::join(roles, ", "))));
    });
  }
  if (cable != nullptr) add_cores(map, *cable, circuit);
}

void check_wire_names(const YamlMap& map, const Circuit& circuit) {
  std::unordered_set<std::string> seen;
  for (const Wire& wire : circuit.wires)
    if (!seen.insert(wire.name.text).second) {
      YamlNode at;
      at.line = wire.name.mark.line;
      at.column = wire.name.mark.column;
      map.error(at, fmt::format("has two wires called '{}'", wire.name.text));
    }
}

void read_lands(ModelReading& reading, const YamlMap& map, Circuit& circuit) {
  const YamlNode* node = map.find("lands");
  if (node == nullptr) return;
  if (!circuit.panel) map.error(*map.key_node("lands"), "lands without a panel");
  const std::string what = map.owner() + ": lands";
  for_each_entry(reading.reader, *node, what, [&](const YamlNode& key, const YamlNode& value) {
    if (const auto text = reading.reader.text(value, {what, key.text}))
      circuit.lands[key.text] = {*text, reading.reader.mark(value)};
  });
}

void read_circuit(ModelReading& reading, const YamlNode& key, const YamlNode& value) {
  const YamlMap map(reading.reader, value, fmt::format("circuit '{}'", key.text),
                    {"panel", "slot", "line", "breaker", "cable", "rename", "wires", "runs", "ring", "lands",
                     "loads", "switches"},
                    &key);
  check_id(reading.reader, key, map.owner());
  for (const char* word : {"ground", "earth", "neutral", "supply", "others"})
    if (key.text == word)
      map.error(key, fmt::format("no circuit can be called '{}': the word has a meaning of its own", word));
  Circuit circuit;
  circuit.name = {key.text, reading.reader.mark(key)};
  circuit.panel = optional_name(map, "panel");
  read_poles(reading, map, circuit);
  read_breaker(reading, map, circuit);
  read_cable(reading, map, circuit);
  for (Wire& wire : read_wires(reading, map)) circuit.wires.push_back(std::move(wire));
  check_wire_names(map, circuit);
  if (circuit.wires.size() > k_most_wires)
    map.error(key, fmt::format("has {} wires; at most {} are taken", circuit.wires.size(), k_most_wires));
  if (map.is_map() && !map.has("cable") && !map.has("wires")) map.error(key, "needs wires or a cable");
  map.require("runs");
  circuit.runs = names(map, "runs", "[C1, C2]");
  if (const YamlNode* runs = map.find("runs");
      runs != nullptr && runs->kind == YamlKind::sequence && runs->items.empty())
    map.error(*runs, "runs is empty: a circuit lies in one run at least");
  if (circuit.runs.size() > k_most_runs) {
    map.error(*map.find("runs"),
              fmt::format("lies in {} runs; at most {} are taken", circuit.runs.size(), k_most_runs));
    circuit.runs.clear();
  }
  circuit.ring = map.flag("ring").value_or(false);
  read_lands(reading, map, circuit);
  read_loads(reading, map, circuit);
  read_switches(reading, map, circuit);
  reading.building.circuits.push_back(std::move(circuit));
}

}  // namespace

std::vector<Wire> read_wires(ModelReading& reading, const YamlMap& owner) {
  std::vector<Wire> wires;
  if (const YamlNode* node = owner.find("wires"))
    for_each_entry(reading.reader, *node, owner.owner() + ": wires",
                   [&](const YamlNode& key, const YamlNode& value) {
                     wires.push_back(read_wire(reading, owner, key, value));
                   });
  return wires;
}

void read_circuits(ModelReading& reading, const YamlMap& top) {
  const auto supplies = root_supplies(reading.building);
  for (std::size_t i = 0; i < supplies.size(); ++i)
    if (supplies[i] != nullptr)
      reading.systems.emplace(reading.building.panels[i].name.text,
                              system_of(reading.building, *supplies[i]));
  if (const YamlNode* node = top.find("circuits"))
    for_each_entry(reading.reader, *node, "circuits",
                   [&](const YamlNode& key, const YamlNode& value) { read_circuit(reading, key, value); });
}

}  // namespace io
