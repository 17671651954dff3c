// Bonds, cuts, leaks and stages.
#include <fmt/format.h>

#include "io/model_reading.h"

namespace io {
namespace {

using netlists::Bond;
using netlists::Cut;
using netlists::Leak;
using netlists::Stage;

Bond read_bond(const YamlMap& map) {
  Bond bond;
  bond.mark = map.reader().mark(map.place());
  bond.name = map.text("name").value_or("");
  bond.at = required_name(map, "at");
  map.require("joins");
  bond.joins = names(map, "joins", "[spare-1.b, ground]");
  if (const YamlNode* joins = map.find("joins");
      joins != nullptr && joins->kind == YamlKind::sequence && joins->items.size() < 2)
    map.error(*joins, "joins must name two or more, as in [spare-1.b, ground]");
  const auto ohms = map.quantity("resistance", Dimension::resistance, k_contact);
  bond.resistance = ohms.value_or(0.0);
  if (ohms && *ohms > 10.0)
    map.warn(
        *map.find("resistance"),
        fmt::format("a bond of {} is no bond; is it mohm that is meant, not Mohm?", *map.text("resistance")));
  return bond;
}

Cut read_cut(const YamlMap& map) {
  return {required_name(map, "at"), required_name(map, "wire"), required_name(map, "side")};
}

Leak read_leak(const YamlMap& map) {
  Leak leak;
  leak.mark = map.reader().mark(map.place());
  leak.at = required_name(map, "at");
  leak.between = required_pair(map, "between");
  map.require("resistance");
  leak.resistance = map.quantity("resistance", Dimension::resistance, k_resistance).value_or(0.0);
  return leak;
}

void read_set(ModelReading& reading, const YamlMap& owner, Stage& stage) {
  const YamlNode* node = owner.find("set");
  if (node == nullptr) return;
  const std::string what = owner.owner() + ": set";
  for_each_entry(reading.reader, *node, what, [&](const YamlNode& key, const YamlNode& value) {
    if (auto text = reading.reader.text(value, {what, key.text}))
      stage.set.push_back({{key.text, reading.reader.mark(key)}, {*text, reading.reader.mark(value)}});
  });
}

Stage read_stage(ModelReading& reading, const YamlNode& node) {
  const YamlMap unnamed(reading.reader, node, "stage", {"name", "set", "bonds", "cuts", "remove"});
  Stage stage;
  stage.name = {"", reading.reader.mark(node)};
  if (!unnamed.is_map()) return stage;
  stage.name = required_name(unnamed, "name");
  const YamlMap map(reading.reader, node, fmt::format("stage '{}'", stage.name.text),
                    {"name", "set", "bonds", "cuts", "remove"});
  read_set(reading, map, stage);
  stage.bonds = read_bonds(reading, map);
  stage.cuts = read_cuts(reading, map);
  stage.remove = names(map, "remove", "[old-14]");
  return stage;
}

}  // namespace

std::vector<Bond> read_bonds(ModelReading& reading, const YamlMap& owner) {
  std::vector<Bond> bonds;
  const auto* list = owner.list("bonds", "[{at: JB-4, joins: [spare-1.b, ground]}]");
  if (list == nullptr) return bonds;
  const std::string what = owner.owner().empty() ? "bond" : owner.owner() + ": bond";
  for (const YamlNode& node : *list) {
    const YamlMap map(reading.reader, node, what, {"name", "at", "joins", "resistance"});
    if (map.is_map()) bonds.push_back(read_bond(map));
  }
  return bonds;
}

std::vector<Cut> read_cuts(ModelReading& reading, const YamlMap& owner) {
  std::vector<Cut> cuts;
  const auto* list = owner.list("cuts", "[{at: JB-4, wire: old-14.hot, side: C3}]");
  if (list == nullptr) return cuts;
  const std::string what = owner.owner().empty() ? "cut" : owner.owner() + ": cut";
  for (const YamlNode& node : *list) {
    const YamlMap map(reading.reader, node, what, {"at", "wire", "side"});
    if (map.is_map()) cuts.push_back(read_cut(map));
  }
  return cuts;
}

void read_connections(ModelReading& reading, const YamlMap& top) {
  reading.building.bonds = read_bonds(reading, top);
  reading.building.cuts = read_cuts(reading, top);
  const auto* list = top.list("leaks", "[{at: JB-4, between: [LP2-7.hot, spare-1.a], resistance: 300 kohm}]");
  if (list == nullptr) return;
  for (const YamlNode& node : *list) {
    const YamlMap map(reading.reader, node, "leak", {"at", "between", "resistance"});
    if (map.is_map()) reading.building.leaks.push_back(read_leak(map));
  }
}

void read_stages(ModelReading& reading, const YamlMap& top) {
  if (const auto* list = top.list("stages", "[{name: As found}]"))
    for (const YamlNode& node : *list) reading.building.stages.push_back(read_stage(reading, node));
}

}  // namespace io
