#include <fmt/format.h>

#include "io/model_reading.h"

namespace io {
namespace {

using netlists::Alongside;
using netlists::Bonded;
using netlists::Box;
using netlists::Moisture;
using netlists::Place;
using netlists::Run;

void read_place(ModelReading& reading, const YamlNode& key, const YamlNode& value) {
  const YamlMap map(reading.reader, value, fmt::format("place '{}'", key.text), {"box"}, &key);
  Place place;
  place.name = {key.text, reading.reader.mark(key)};
  place.box = map.choice<Box>("box", {{"metal", Box::metal}, {"plastic", Box::plastic}, {"none", Box::none}})
                  .value_or(Box::by_raceway);
  reading.building.places.push_back(std::move(place));
}

void read_layout(const YamlMap& owner, Run& run) {
  const YamlNode* node = owner.find("layout");
  if (node == nullptr) return;
  const std::string what = owner.owner() + ": layout";
  for_each_entry(owner.reader(), *node, what, [&](const YamlNode& key, const YamlNode& value) {
    const std::string name = fmt::format("position of '{}'", key.text);
    const Label label{what, name};
    const auto* xy = owner.reader().list(value, "[-1.7 mm, -7.9 mm]", label);
    if (xy == nullptr) return;
    if (xy->size() != 2) return owner.reader().error(value, what, name + " must be two lengths [x, y]");
    const auto x = owner.reader().quantity((*xy)[0], Dimension::length, k_coordinate, label);
    const auto y = owner.reader().quantity((*xy)[1], Dimension::length, k_coordinate, label);
    if (x && y) run.layout[key.text] = Eigen::Vector2d(*x, *y);
  });
}

void read_run(ModelReading& reading, const YamlNode& key, const YamlNode& value) {
  const YamlMap map(reading.reader, value, fmt::format("run '{}'", key.text),
                    {"from", "to", "length", "raceway", "clearance", "bonded", "condition", "layout"}, &key);
  check_id(reading.reader, key, map.owner());
  if (key.text.find('+') != std::string::npos)
    map.error(key, "a run's name has no '+': that joins the names of runs that lie alongside");
  Run run;
  run.name = {key.text, reading.reader.mark(key)};
  run.from = required_name(map, "from");
  run.to = required_name(map, "to");
  if (!run.from.text.empty() && run.from.text == run.to.text)
    map.error(*map.find("to"), fmt::format("begins and ends at '{}'", run.to.text));
  map.require("length");
  run.length = map.quantity("length", Dimension::length, k_run_length).value_or(0.0);
  run.raceway = required_name(map, "raceway");
  if (!run.raceway.text.empty() && run.raceway.text != "none")
    in_catalogue(map, *map.find("raceway"), run.raceway.text, reading.building.catalogue.raceways, "raceway");
  run.clearance = map.quantity("clearance", Dimension::length, k_distance);
  run.bonded =
      map.choice<Bonded>(
             "bonded",
             {{"both", Bonded::both}, {"from", Bonded::from}, {"to", Bonded::to}, {"none", Bonded::none}})
          .value_or(Bonded::both);
  run.condition = map.choice<Moisture>("condition", {{"dry", Moisture::dry},
                                                     {"damp", Moisture::damp},
                                                     {"wet", Moisture::wet},
                                                     {"flooded", Moisture::flooded}})
                      .value_or(Moisture::dry);
  read_layout(map, run);
  reading.building.runs.push_back(std::move(run));
}

void read_alongside(ModelReading& reading, const YamlNode& value) {
  const YamlMap map(reading.reader, value, "alongside", {"runs", "spacing", "over"});
  if (!map.is_map()) return;
  Alongside alongside;
  alongside.mark = reading.reader.mark(value);
  map.require("runs");
  alongside.runs = names(map, "runs", "[C2, C3]");
  if (const YamlNode* runs = map.key_node("runs");
      runs != nullptr && runs[1].kind == YamlKind::sequence && runs[1].items.size() < 2)
    map.error(runs[1], "runs must name two or more");
  map.require("spacing");
  alongside.spacing = map.quantity("spacing", Dimension::length, k_distance).value_or(0.0);
  alongside.over = map.quantity("over", Dimension::length, k_run_length);
  reading.building.alongside.push_back(std::move(alongside));
}

}  // namespace

void read_runs(ModelReading& reading, const YamlMap& top) {
  if (const YamlNode* node = top.find("places"))
    for_each_entry(reading.reader, *node, "places",
                   [&](const YamlNode& key, const YamlNode& value) { read_place(reading, key, value); });
  if (const YamlNode* node = top.find("runs"))
    for_each_entry(reading.reader, *node, "runs",
                   [&](const YamlNode& key, const YamlNode& value) { read_run(reading, key, value); });
  if (const auto* list = top.list("alongside", "[{runs: [C2, C3], spacing: 40 mm}]"))
    for (const YamlNode& value : *list) read_alongside(reading, value);
}

}  // namespace io
