// Loads and switches of a circuit.
#include <fmt/format.h>

#include <algorithm>

#include "io/model_reading.h"

namespace io {
namespace {

using netlists::Circuit;
using netlists::Load;
using netlists::LoadState;
using netlists::Switch;
using netlists::SwitchKind;

void read_size(const YamlMap& map, Load& load) {
  load.power = map.quantity("power", Dimension::power, k_power);
  load.apparent = map.quantity("apparent", Dimension::apparent, k_apparent);
  load.current = map.quantity("current", Dimension::current, k_current);
  load.resistance = map.quantity("resistance", Dimension::resistance, k_resistance);
  load.capacitance = map.quantity("capacitance", Dimension::capacitance, k_capacitance);
  load.power_factor = map.quantity("power_factor", Dimension::ratio, {0.01, 1, "0.01 to 1"});
  int ways = 0;
  for (const char* key : {"power", "apparent", "current", "resistance"}) {
    if (!map.has(key)) continue;
    if (++ways == 2)
      map.error(*map.key_node(key), "give one of power, apparent, current and resistance: they say the same");
  }
}

Load read_load(ModelReading& reading, const std::string& circuit, const YamlNode& node) {
  const YamlMap map(reading.reader, node, circuit + ": load",
                    {"name", "at", "between", "kind", "power", "apparent", "current", "resistance",
                     "capacitance", "power_factor", "state"});
  Load load;
  load.mark = reading.reader.mark(node);
  if (!map.is_map()) return load;
  if (map.has("name")) {
    load.name = map.text("name").value_or("");
    if (const YamlNode* name = map.find("name")) check_id(reading.reader, *name, map.owner());
  }
  load.at = required_name(map, "at");
  load.between = required_pair(map, "between");
  map.require("kind");
  if (const auto kind = map.text("kind"))
    if (in_catalogue(map, *map.find("kind"), *kind, reading.building.catalogue.loads, "load kind"))
      load.kind = *kind;
  read_size(map, load);
  load.state =
      map.choice<LoadState>("state",
                            {{"on", LoadState::on}, {"off", LoadState::off}, {"standby", LoadState::standby}})
          .value_or(LoadState::on);
  return load;
}

void read_contact(const YamlMap& map, Switch& item) {
  map.require("joins");
  item.wires = names(map, "joins", "[hot, switched]");
  if (const YamlNode* joins = map.find("joins");
      joins != nullptr && joins->kind == YamlKind::sequence && joins->items.size() != 2)
    map.error(*joins, "joins must name two wires, as in [hot, switched]");
  item.closed = map.choice<bool>("state", {{"open", false}, {"closed", true}, {"off", false}, {"on", true}})
                    .value_or(false);
  if (map.is_map() && !map.has("state")) map.error(map.place(), "state is missing; write open or closed");
}

void read_three_way(const YamlMap& map, Switch& item) {
  item.wires.push_back(required_name(map, "common"));
  map.require("throws");
  const auto throws = names(map, "throws", "[t1, t2]");
  if (const YamlNode* node = map.find("throws");
      node != nullptr && node->kind == YamlKind::sequence && (throws.size() < 2 || throws.size() > 9))
    map.error(*node, "throws must name 2 to 9 wires");
  item.wires.insert(item.wires.end(), throws.begin(), throws.end());
  item.position = map.whole("position", 1, std::max<int>(2, static_cast<int>(throws.size()))).value_or(1);
}

void read_four_way(const YamlMap& map, Switch& item) {
  const auto* sides = map.require("sides") != nullptr ? map.list("sides", "[[t1, t2], [t3, t4]]") : nullptr;
  if (sides == nullptr) return;
  for (const YamlNode& side : *sides)
    for (auto& [text, mark] : map.reader().texts(side, "[t1, t2]", {map.owner(), "sides"}))
      item.wires.push_back({std::move(text), std::move(mark)});
  const bool two_by_two =
      sides->size() == 2 && (*sides)[0].items.size() == 2 && (*sides)[1].items.size() == 2;
  if (!two_by_two) map.error(*map.find("sides"), "sides must be two pairs, as in [[t1, t2], [t3, t4]]");
  item.position = map.whole("position", 1, 2).value_or(1);
}

/// Keys that belong to another kind of switch.
void refuse_other_keys(const YamlMap& map, std::string_view kind, std::initializer_list<const char*> keys) {
  for (const char* key : keys)
    if (map.has(key)) map.error(*map.key_node(key), fmt::format("a {} takes no {}", kind, key));
}

void check_twice(const YamlMap& map, const Switch& item) {
  for (std::size_t i = 0; i < item.wires.size(); ++i)
    for (std::size_t j = 0; j < i; ++j)
      if (!item.wires[i].text.empty() && item.wires[i].text == item.wires[j].text) {
        map.error(map.place(), fmt::format("names wire '{}' twice", item.wires[i].text));
        return;
      }
}

std::optional<Switch> read_switch(ModelReading& reading, const std::string& circuit, const YamlNode& node) {
  const YamlMap map(reading.reader, node, circuit + ": switch",
                    {"name", "at", "kind", "joins", "state", "common", "throws", "sides", "position"});
  if (!map.is_map()) return std::nullopt;
  Switch item;
  item.mark = reading.reader.mark(node);
  item.name = map.text("name").value_or("");
  if (const YamlNode* name = map.key_node("name")) check_id(reading.reader, name[1], map.owner());
  item.at = required_name(map, "at");
  const auto kind = map.choice<SwitchKind>("kind", {{"contact", SwitchKind::contact},
                                                    {"three_way", SwitchKind::three_way},
                                                    {"four_way", SwitchKind::four_way}});
  if (map.has("kind") && !kind) return std::nullopt;
  item.kind = kind.value_or(SwitchKind::contact);
  switch (item.kind) {
    case SwitchKind::contact:
      refuse_other_keys(map, "contact", {"common", "throws", "sides", "position"});
      read_contact(map, item);
      break;
    case SwitchKind::three_way:
      refuse_other_keys(map, "three_way", {"joins", "state", "sides"});
      read_three_way(map, item);
      break;
    case SwitchKind::four_way:
      refuse_other_keys(map, "four_way", {"joins", "state", "common", "throws"});
      read_four_way(map, item);
      break;
  }
  check_twice(map, item);
  return item;
}

}  // namespace

void read_loads(ModelReading& reading, const YamlMap& map, Circuit& circuit) {
  const auto* list = map.list("loads", "[{at: Room 210, between: [hot, neutral], kind: resistive}]");
  if (list == nullptr) return;
  circuit.loads.emplace();
  for (const YamlNode& node : *list) circuit.loads->push_back(read_load(reading, map.owner(), node));
}

void read_switches(ModelReading& reading, const YamlMap& map, Circuit& circuit) {
  const auto* list = map.list("switches", "[{name: S1, at: JB-4, joins: [hot, switched], state: open}]");
  if (list == nullptr) return;
  for (const YamlNode& node : *list)
    if (auto item = read_switch(reading, map.owner(), node)) circuit.switches.push_back(std::move(*item));
}

}  // namespace io
