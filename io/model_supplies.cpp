#include <fmt/format.h>

#include <cmath>

#include "io/model_reading.h"

namespace io {
namespace {

using netlists::FedFrom;
using netlists::Feeder;
using netlists::Panel;
using netlists::Supply;
using netlists::SystemType;

/// "277 two-wire" stands for the catalogue's two-wire system at another voltage: the first word is
/// the voltage, the rest must fit an entry. The transformer behind it keeps its apparent power.
bool add_scaled_system(netlists::Catalogue& catalogue, const std::string& name) {
  const auto space = name.find(' ');
  if (space == std::string::npos) return false;
  const auto volts = parse_quantity(name.substr(0, space) + " V", Dimension::voltage, "");
  if (!std::holds_alternative<double>(volts)) return false;
  const double wanted = std::get<double>(volts);
  if (!(wanted >= 1 && wanted <= 1000)) return false;
  const auto like = catalogue.systems.find("120" + name.substr(space));
  if (like == catalogue.systems.end()) return false;
  SystemType system = like->second;
  const double scale = wanted / 120.0;
  system.name = name;
  for (auto& line : system.lines) line.volts *= scale;
  system.neutral_volts *= scale;
  system.impedance_resistance *= scale * scale;
  system.impedance_reactance *= scale * scale;
  catalogue.systems.emplace(name, std::move(system));
  return true;
}

void read_grounding(const YamlMap& map, Supply& supply) {
  supply.grounding = map.choice<std::string>("grounding", {{"solid", "solid"},
                                                           {"isolated", "isolated"},
                                                           {"none", "none"},
                                                           {"corner", "corner"},
                                                           {"resistance", "resistance"}});
  const auto ohms = map.quantity("grounding_resistance", Dimension::resistance, k_resistance);
  supply.grounding_resistance = ohms.value_or(0.0);
  const bool wanted = supply.grounding == "resistance";
  if (wanted && !map.has("grounding_resistance"))
    map.error(*map.find("grounding"), "grounding 'resistance' needs grounding_resistance, as in '5 ohm'");
  if (!wanted && map.has("grounding_resistance"))
    map.error(*map.key_node("grounding_resistance"),
              "grounding_resistance goes with grounding 'resistance' only");
}

std::optional<FedFrom> read_fed_from(const YamlMap& supply) {
  const YamlNode* node = supply.find("fed_from");
  if (node == nullptr) return std::nullopt;
  const YamlMap map(supply.reader(), *node, supply.owner() + ": fed_from", {"circuit", "at", "between"});
  if (!map.is_map()) return std::nullopt;
  FedFrom fed;
  fed.circuit = required_name(map, "circuit");
  fed.at = optional_name(map, "at");
  if (map.has("between")) fed.between = required_pair(map, "between");
  return fed;
}

void read_stray(const YamlMap& owner, const netlists::Catalogue& catalogue, Supply& supply) {
  const YamlNode* node = owner.find("stray");
  if (node == nullptr) return;
  const YamlMap map(owner.reader(), *node, owner.owner() + ": stray",
                    {"line_to_ground", "primary_to_secondary"});
  supply.stray_primary_to_secondary =
      map.quantity("primary_to_secondary", Dimension::capacitance, k_capacitance);
  const YamlNode* lines = map.find("line_to_ground");
  if (lines == nullptr) return;
  const Label label{map.owner(), "line_to_ground"};
  const auto one = [&](const YamlNode& value) {
    const auto farads = map.reader().quantity(value, Dimension::capacitance, k_capacitance, label);
    if (farads) supply.stray_line_to_ground.push_back(*farads);
  };
  if (lines->kind != YamlKind::sequence) return one(*lines);
  for (const YamlNode& value : lines->items) one(value);
  const auto found = catalogue.systems.find(supply.system.text);
  if (found == catalogue.systems.end()) return;
  const std::size_t poles = found->second.lines.size() + (found->second.neutral ? 1 : 0);
  if (lines->items.size() != 1 && lines->items.size() != poles)
    map.error(*lines,
              fmt::format("line_to_ground must have one value for all or {} values, one a pole", poles));
}

void read_impedance(const YamlMap& owner, Supply& supply) {
  const YamlNode* node = owner.find("impedance");
  if (node == nullptr) return;
  if (node->kind == YamlKind::scalar) {
    const auto ohms = owner.quantity("impedance", Dimension::resistance, {1e-6, 1e6, "0.001 mohm to 1 Mohm"});
    if (ohms) supply.impedance = *ohms;
    return;
  }
  const YamlMap map(owner.reader(), *node, owner.owner() + ": impedance", {"resistance", "reactance"});
  map.require("resistance");
  const auto r = map.quantity("resistance", Dimension::resistance, k_contact);
  const auto x = map.quantity("reactance", Dimension::resistance, k_reactance);
  if (!r) return;
  supply.impedance = std::complex<double>(*r, x.value_or(0.0));
  if (std::abs(*supply.impedance) < 1e-6)
    map.error(*node, "must not be zero: a supply without impedance is none; write '10 mohm' or leave it out");
}

void check_vector_group(const YamlMap& map, const Supply& supply) {
  if (supply.vector_group.empty()) return;
  const auto digit = supply.vector_group.find_first_of("0123456789");
  const std::string clock = digit == std::string::npos ? "" : supply.vector_group.substr(digit);
  const bool good = !clock.empty() && clock.size() <= 2 &&
                    clock.find_first_not_of("0123456789") == std::string::npos && std::stoi(clock) <= 11 &&
                    supply.vector_group.find_first_not_of("DYZNdyzn0123456789") == std::string::npos;
  if (!good)
    map.error(*map.find("vector_group"),
              fmt::format("vector_group '{}' must end in its clock number, 0 to 11, as in 'Dyn1'",
                          supply.vector_group));
  if (supply.angle) map.error(*map.find("angle"), "angle and vector_group say the same; give one");
}

/// What speaks of a primary needs one.
void check_primary(const YamlMap& map, const Supply& supply) {
  if (map.has("fed_from")) return;
  if (!supply.vector_group.empty())
    map.error(*map.key_node("vector_group"), "vector_group speaks of a primary, and there is no fed_from");
  if (supply.stray_primary_to_secondary)
    map.error(*map.key_node("stray"),
              "stray: primary_to_secondary speaks of a primary, and there is no fed_from");
}

void read_supply(ModelReading& reading, const YamlNode& key, const YamlNode& value) {
  const YamlMap map(reading.reader, value, fmt::format("supply '{}'", key.text),
                    {"system", "grounding", "grounding_resistance", "fed_from", "stray", "impedance", "angle",
                     "vector_group", "asynchronous", "rating", "insulation"},
                    &key);
  check_id(reading.reader, key, map.owner());
  Supply supply;
  supply.name = {key.text, reading.reader.mark(key)};
  supply.system = required_name(map, "system");
  auto& catalogue = reading.building.catalogue;
  const std::string& system = supply.system.text;
  if (!system.empty() && !catalogue.systems.contains(system) && !add_scaled_system(catalogue, system))
    in_catalogue(map, *map.find("system"), system, catalogue.systems, "system");
  read_grounding(map, supply);
  supply.fed_from = read_fed_from(map);
  read_stray(map, catalogue, supply);
  read_impedance(map, supply);
  supply.angle = map.quantity("angle", Dimension::angle, k_angle);
  supply.vector_group = map.text("vector_group").value_or("");
  check_vector_group(map, supply);
  check_primary(map, supply);
  supply.asynchronous = map.flag("asynchronous").value_or(false);
  supply.rating = map.quantity("rating", Dimension::apparent, k_apparent).value_or(0.0);
  supply.insulation =
      map.quantity("insulation", Dimension::resistance, {1.0, 1e15, "1 ohm to 1e6 Gohm"}).value_or(0.0);
  reading.building.supplies.push_back(std::move(supply));
}

std::optional<Feeder> read_feeder(ModelReading& reading, const YamlMap& panel) {
  const YamlNode* node = panel.find("feeder");
  if (node == nullptr) return std::nullopt;
  const YamlMap map(reading.reader, *node, panel.owner() + ": feeder", {"from", "wires", "runs", "breaker"},
                    panel.key_node("feeder"));
  if (!map.is_map()) return std::nullopt;
  Feeder feeder;
  feeder.mark = reading.reader.mark(map.place());
  feeder.from = required_name(map, "from");
  map.require("wires");
  feeder.wires = read_wires(reading, map);
  map.require("runs");
  feeder.runs = names(map, "runs", "[F1]");
  feeder.breaker_on = map.flag("breaker").value_or(true);
  return feeder;
}

void read_panel(ModelReading& reading, const YamlNode& key, const YamlNode& value) {
  const YamlMap map(reading.reader, value, fmt::format("panel '{}'", key.text), {"supply", "feeder"}, &key);
  check_id(reading.reader, key, map.owner());
  Panel panel;
  panel.name = {key.text, reading.reader.mark(key)};
  panel.supply = optional_name(map, "supply");
  panel.feeder = read_feeder(reading, map);
  if (map.is_map() && map.has("supply") == map.has("feeder"))
    map.error(key, map.has("supply") ? "has a supply and a feeder; a panel hangs on one of them"
                                     : "needs a supply or a feeder");
  reading.building.panels.push_back(std::move(panel));
}

}  // namespace

void read_supplies(ModelReading& reading, const YamlMap& top) {
  if (const YamlNode* node = top.find("supplies"))
    for_each_entry(reading.reader, *node, "supplies",
                   [&](const YamlNode& key, const YamlNode& value) { read_supply(reading, key, value); });
  if (const YamlNode* node = top.find("panels"))
    for_each_entry(reading.reader, *node, "panels",
                   [&](const YamlNode& key, const YamlNode& value) { read_panel(reading, key, value); });
}

}  // namespace io
