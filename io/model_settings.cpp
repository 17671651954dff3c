// What holds for the whole model: frequency, instruments, limits, uncertainty.
#include <fmt/format.h>

#include <algorithm>

#include "io/model_reading.h"

namespace io {
namespace {

using netlists::Building;
using netlists::InstrumentKind;
using netlists::InstrumentRange;
using netlists::InstrumentType;

void warn_if_low(const YamlMap& map, std::string_view key, double ohms) {
  if (ohms < 100.0)
    map.warn(*map.find(key),
             fmt::format("an instrument of {} would show nothing; is it Mohm that is meant, not mohm?",
                         *map.text(key)));
}

void read_ranges(const YamlMap& owner, InstrumentType& type) {
  const auto* list = owner.list("ranges", "[{full_scale: 250 V, resistance: 1.25 Mohm}]");
  if (list == nullptr) return;
  for (const YamlNode& node : *list) {
    const YamlMap map(owner.reader(), node, owner.owner() + ": range", {"full_scale", "resistance"});
    map.require("full_scale");
    map.require("resistance");
    const auto volts = map.quantity("full_scale", Dimension::voltage, k_voltage);
    const auto ohms = map.quantity("resistance", Dimension::resistance, k_resistance);
    if (ohms) warn_if_low(map, "resistance", *ohms);
    if (volts && ohms) type.ranges.push_back({*volts, *ohms});
  }
  std::sort(type.ranges.begin(), type.ranges.end(),
            [](const InstrumentRange& a, const InstrumentRange& b) { return a.full_scale < b.full_scale; });
}

void read_own_instrument(ModelReading& reading, const YamlNode& node) {
  const std::vector<std::string> keys{"name",        "label",  "kind",     "resistance",
                                      "capacitance", "ranges", "threshold"};
  const YamlMap unnamed(reading.reader, node, "instrument", keys);
  if (!unnamed.is_map()) return;
  InstrumentType type;
  type.name = required_name(unnamed, "name").text;
  const YamlMap map(reading.reader, node, fmt::format("instrument '{}'", type.name), keys);
  type.label = map.text("label").value_or(type.name);
  type.kind = map.choice<InstrumentKind>("kind", {{"voltmeter", InstrumentKind::voltmeter},
                                                  {"indicator", InstrumentKind::indicator}})
                  .value_or(InstrumentKind::voltmeter);
  if (!map.has("resistance") && !map.has("ranges"))
    map.error(node, "resistance is missing: what it reads depends on what it draws");
  type.resistance = map.quantity("resistance", Dimension::resistance, k_resistance).value_or(0.0);
  if (type.resistance > 0) warn_if_low(map, "resistance", type.resistance);
  type.capacitance = map.quantity("capacitance", Dimension::capacitance, k_capacitance).value_or(0.0);
  read_ranges(map, type);
  type.threshold = map.quantity("threshold", Dimension::voltage, k_voltage).value_or(0.0);
  if (type.kind == InstrumentKind::indicator && !map.has("threshold"))
    map.error(node, "threshold is missing: the voltage from which an indicator shows something");
  type.source = "the model";
  reading.building.instruments.push_back(std::move(type));
}

void read_instruments(ModelReading& reading, const YamlMap& top) {
  const auto& known = reading.building.catalogue.instruments;
  auto& instruments = reading.building.instruments;
  if (!top.has("instruments")) {
    for (const char* name : {"dmm", "low_impedance", "analog_5k"})
      if (const auto found = known.find(name); found != known.end()) instruments.push_back(found->second);
    return;
  }
  const auto* list = top.list("instruments", "[dmm, low_impedance]");
  if (list == nullptr) return;
  if (list->empty())
    top.error(*top.find("instruments"), "instruments is empty; leave it out for the usual ones");
  constexpr std::size_t k_most = 50;
  if (list->size() > k_most) {
    top.error(*top.find("instruments"), fmt::format("instruments: at most {} are taken", k_most));
    return;
  }
  for (const YamlNode& node : *list) {
    const std::size_t before = instruments.size();
    if (node.kind == YamlKind::map)
      read_own_instrument(reading, node);
    else if (const auto name = reading.reader.text(node, {top.owner(), "an instrument"}))
      if (in_catalogue(top, node, *name, known, "instrument")) instruments.push_back(known.at(*name));
    for (std::size_t i = 0; i < before && before < instruments.size(); ++i)
      if (instruments[i].name == instruments[before].name)
        top.error(node, fmt::format("instrument '{}' is listed twice", instruments[before].name));
  }
}

void read_limits(ModelReading& reading, const YamlMap& top) {
  const YamlNode* node = top.find("limits");
  if (node == nullptr) return;
  const YamlMap map(reading.reader, *node, "limits", {"live_like", "dead_like", "body_current"});
  auto& limits = reading.building.limits;
  limits.live_like = map.quantity("live_like", Dimension::voltage, k_voltage);
  limits.dead_like = map.quantity("dead_like", Dimension::voltage, k_voltage);
  limits.body_current = map.quantity("body_current", Dimension::current, {1e-6, 1, "1 uA to 1 A"})
                            .value_or(limits.body_current);
  if (limits.live_like && limits.live_like <= limits.dead_like.value_or(3.0))
    map.error(*map.find("live_like"),
              fmt::format("live_like must lie above dead_like, {:g} V", limits.dead_like.value_or(3.0)));
}

void read_permittivities(ModelReading& reading, const YamlMap& owner) {
  const YamlNode* node = owner.find("permittivity");
  if (node == nullptr) return;
  const std::string what = owner.owner() + ": permittivity";
  for_each_entry(reading.reader, *node, what, [&](const YamlNode& key, const YamlNode& value) {
    in_catalogue(owner, key, key.text, reading.building.catalogue.materials, "material");
    const auto ends = reading.reader.number_interval(value, {1, 100, "1 to 100"}, {what, key.text});
    if (ends) reading.building.uncertainty.permittivity[key.text] = *ends;
  });
}

void read_uncertainty(ModelReading& reading, const YamlMap& top) {
  const YamlNode* node = top.find("uncertainty");
  if (node == nullptr) return;
  const YamlMap map(reading.reader, *node, "uncertainty",
                    {"length", "permittivity", "clearance", "wander_length", "unlisted_load", "may_vary"});
  auto& uncertainty = reading.building.uncertainty;
  if (const YamlNode* length = map.find("length")) {
    const YamlMap spread(reading.reader, *length, "uncertainty: length", {"spread"});
    spread.require("spread");
    uncertainty.length_spread =
        spread.quantity("spread", Dimension::ratio, {0, 0.9, "0 % to 90 %"}).value_or(0.0);
  }
  read_permittivities(reading, map);
  uncertainty.clearance = map.interval("clearance", Dimension::length, k_distance);
  uncertainty.wander_length = map.interval("wander_length", Dimension::length, {1e-2, 1e4, "1 cm to 10 km"})
                                  .value_or(uncertainty.wander_length);
  uncertainty.unlisted_load = map.quantity("unlisted_load", Dimension::ratio, k_probability);
  uncertainty.may_vary = names(map, "may_vary", "[LP2-9.breaker]");
}

}  // namespace

void read_settings(ModelReading& reading, const YamlMap& top) {
  Building& building = reading.building;
  building.title = top.text("title").value_or("");
  building.frequency = top.quantity("frequency", Dimension::frequency, {10, 1000, "10 Hz to 1 kHz"})
                           .value_or(building.frequency);
  building.temperature =
      top.quantity("temperature", Dimension::temperature, {-60, 150, "-60 degC to 150 degC"})
          .value_or(building.temperature);
  building.earth_resistivity =
      top.quantity("earth_resistivity", Dimension::resistivity, {0.1, 1e6, "0.1 ohm m to 1000000 ohm m"})
          .value_or(building.earth_resistivity);
  read_instruments(reading, top);
  read_limits(reading, top);
  read_uncertainty(reading, top);
}

}  // namespace io
