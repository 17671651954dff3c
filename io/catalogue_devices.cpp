// Entries that have terminals: supply systems, instruments, loads.
#include <fmt/format.h>

#include <algorithm>

#include "io/catalogue_entries.h"
#include "io/catalogue_entry.h"

namespace io {
namespace {

using netlists::InstrumentKind;
using netlists::InstrumentRange;
using netlists::InstrumentType;
using netlists::LoadEffect;
using netlists::LoadKind;
using netlists::Pole;
using netlists::SystemType;

constexpr Range k_volts{-1e6, 1e6, "-1000 kV to 1000 kV"};
constexpr Range k_positive_volts{1e-3, 1e6, "1 mV to 1000 kV"};
constexpr Range k_angle{-6.3, 6.3, "-360 deg to 360 deg"};
constexpr Range k_source_ohms{0.0, 1e6, "0 ohm to 1 Mohm"};
constexpr Range k_input_ohms{1e-3, 1e15, "1 mohm to 1e6 Gohm"};
constexpr Range k_farads{0.0, 1.0, "0 pF to 1 F"};
constexpr Range k_share{1e-3, 2.0, "0.1 % to 200 %"};
constexpr Range k_amperes{1e-9, 1e3, "1e-6 mA to 1000 A"};
constexpr Range k_watts{1e-6, 1e9, "1e-6 W to 1e6 kW"};

void read_lines(const YamlMap& map, SystemType& system) {
  const YamlNode* lines = map.require("lines");
  if (lines == nullptr) return;
  for_each_entry(
      map.reader(), *lines, map.owner() + ": lines", [&](const YamlNode& key, const YamlNode& value) {
        const YamlMap pole(map.reader(), value, map.owner() + ": line '" + key.text + "'", {"volts", "angle"},
                           &key);
        pole.require("volts");
        system.lines.push_back({key.text, pole.quantity("volts", Dimension::voltage, k_volts).value_or(0.0),
                                pole.quantity("angle", Dimension::angle, k_angle).value_or(0.0)});
      });
}

void check_grounded_pole(const YamlMap& map, const SystemType& system) {
  std::vector<std::string> names;
  for (const Pole& line : system.lines) names.push_back(line.name);
  if (system.neutral) names.emplace_back("neutral");
  const std::string& pole = system.grounded_pole;
  if (pole.empty() || std::find(names.begin(), names.end(), pole) != names.end()) return;
  map.error(*map.find("grounded_pole"),
            fmt::format("grounded_pole '{}' is no pole of it{}", pole, netlists::nearest_hint(pole, names)));
}

void read_impedance(const YamlMap& map, SystemType& system) {
  const YamlNode* node = map.require("impedance");
  if (node == nullptr) return;
  const YamlMap parts(map.reader(), *node, map.owner() + ": impedance", {"resistance", "reactance"});
  parts.require("resistance");
  parts.require("reactance");
  system.impedance_resistance =
      parts.quantity("resistance", Dimension::resistance, k_source_ohms).value_or(0.0);
  system.impedance_reactance =
      parts.quantity("reactance", Dimension::resistance, k_source_ohms).value_or(0.0);
}

void read_system_entry(const YamlMap& map, SystemType& system) {
  read_lines(map, system);
  system.neutral = map.has("neutral");
  system.neutral_volts = map.quantity("neutral", Dimension::voltage, k_volts).value_or(0.0);
  system.grounded_pole = map.text("grounded_pole").value_or("");
  check_grounded_pole(map, system);
  map.require("default_grounding");
  system.default_grounding =
      map.choice<std::string>(
             "default_grounding",
             {{"solid", "solid"}, {"corner", "corner"}, {"none", "none"}, {"isolated", "isolated"}})
          .value_or("");
  const bool grounded = system.default_grounding == "solid" || system.default_grounding == "corner";
  if (grounded && !map.has("grounded_pole"))
    map.error(map.place(), "grounded_pole is missing: which pole is grounded?");
  read_impedance(map, system);
}

/// `mohm` and `Mohm` differ by 1e9: an input below 100 ohm is more likely a slip than a voltmeter.
void warn_of_milliohms(const YamlMap& map, const YamlNode& at, double resistance) {
  if (resistance < 100.0)
    map.warn(at,
             fmt::format(
                 "resistance {:g} ohm is low for a voltmeter; mohm is a thousandth of an ohm, Mohm a million",
                 resistance));
}

void read_ranges(const YamlMap& map, InstrumentType& instrument) {
  const auto* ranges = map.list("ranges", "[{full_scale: 250 V, resistance: 1.25 Mohm}]");
  if (ranges == nullptr) return;
  for (const YamlNode& node : *ranges) {
    const YamlMap parts(map.reader(), node, map.owner() + ": range", {"full_scale", "resistance"});
    parts.require("full_scale");
    parts.require("resistance");
    const InstrumentRange range{
        parts.quantity("full_scale", Dimension::voltage, k_positive_volts).value_or(0.0),
        parts.quantity("resistance", Dimension::resistance, k_input_ohms).value_or(0.0)};
    if (!instrument.ranges.empty() && range.full_scale <= instrument.ranges.back().full_scale)
      parts.error(node, "ranges must stand in ascending order of full_scale");
    instrument.ranges.push_back(range);
  }
}

void read_instrument_entry(const YamlMap& map, InstrumentType& instrument) {
  instrument.label = map.text("label").value_or(instrument.name);
  instrument.kind = map.choice<InstrumentKind>("kind", {{"voltmeter", InstrumentKind::voltmeter},
                                                        {"indicator", InstrumentKind::indicator}})
                        .value_or(InstrumentKind::voltmeter);
  if (map.has("resistance") == map.has("ranges")) map.error(map.place(), "takes either resistance or ranges");
  if (const auto ohms = map.quantity("resistance", Dimension::resistance, k_input_ohms)) {
    instrument.resistance = *ohms;
    if (instrument.kind == InstrumentKind::voltmeter) warn_of_milliohms(map, *map.find("resistance"), *ohms);
  }
  read_ranges(map, instrument);
  instrument.capacitance = map.quantity("capacitance", Dimension::capacitance, k_farads).value_or(0.0);
  instrument.common_to_earth =
      map.quantity("common_to_earth", Dimension::capacitance, k_farads).value_or(0.0);
  instrument.three_lamps = map.flag("three_lamps").value_or(false);
  instrument.to_ground_only = map.flag("to_ground_only").value_or(false);
  if (instrument.kind == InstrumentKind::indicator) map.require("threshold");
  instrument.threshold = map.quantity("threshold", Dimension::voltage, k_positive_volts).value_or(0.0);
}

/// An effect takes its threshold as volts, as a share of the nominal voltage, or as a current.
void read_effect(const YamlMap& map, LoadEffect& effect) {
  map.require("what");
  effect.what = map.choice<std::string>("what", {{"lamp_glows", "lamp_glows"},
                                                 {"input_reads_on", "input_reads_on"},
                                                 {"coil_stays_in", "coil_stays_in"},
                                                 {"coil_pulls_in", "coil_pulls_in"},
                                                 {"device_trips", "device_trips"},
                                                 {"alarm_sounds", "alarm_sounds"}})
                    .value_or("");
  effect.volts = map.quantity("volts", Dimension::voltage, k_positive_volts).value_or(0.0);
  effect.share = map.quantity("share", Dimension::ratio, k_share).value_or(0.0);
  effect.current = map.quantity("current", Dimension::current, k_amperes).value_or(0.0);
  effect.volts_at_low_current =
      map.quantity("volts_at_low_current", Dimension::voltage, k_positive_volts).value_or(0.0);
  effect.rectifies = map.flag("rectifies").value_or(false);
  effect.admittance_factor = map.number("admittance_factor", {0.001, 1000.0, "0.001 to 1000"}).value_or(1.0);
  map.require("source");
  effect.source = map.text("source").value_or("");
  const bool by_current = effect.what == "device_trips" || effect.rectifies;
  if (by_current ? effect.current <= 0.0 : map.has("volts") == map.has("share"))
    map.error(map.place(), by_current ? "current is missing: from which current on?"
                                      : "takes either volts or share, a threshold at its terminals");
}

void read_effects(const YamlMap& map, LoadKind& load) {
  if (!map.has("effects")) return;
  const auto* effects = map.list("effects", "[{what: coil_stays_in, share: 20 %, source: ...}]");
  if (effects == nullptr) return;
  for (const YamlNode& node : *effects) {
    const YamlMap parts(map.reader(), node, map.owner() + ": effect",
                        {"what", "volts", "share", "current", "volts_at_low_current", "rectifies",
                         "admittance_factor", "source"});
    LoadEffect effect;
    if (parts.is_map()) read_effect(parts, effect);
    load.effects.push_back(std::move(effect));
  }
}

void read_load_entry(const YamlMap& map, LoadKind& load) {
  load.label = map.text("label").value_or(load.name);
  load.power_factor = map.number("power_factor", {0.01, 1.0, "0.01 to 1"}).value_or(1.0);
  load.capacitive = map.flag("capacitive").value_or(false);
  load.standby_resistance =
      map.quantity("standby_resistance", Dimension::resistance, k_input_ohms).value_or(0.0);
  load.standby_capacitance =
      map.quantity("standby_capacitance", Dimension::capacitance, k_farads).value_or(0.0);
  load.nominal_volts = map.quantity("nominal", Dimension::voltage, k_positive_volts).value_or(0.0);
  load.default_capacitance =
      map.quantity("default_capacitance", Dimension::capacitance, k_farads).value_or(0.0);
  load.filter = map.flag("filter").value_or(false);
  read_effects(map, load);
  if (load.default_capacitance == 0.0) map.require("default_power");
  load.default_power = map.quantity("default_power", Dimension::power, k_watts).value_or(0.0);
}

}  // namespace

void read_systems(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "system",
               {"lines", "neutral", "grounded_pole", "default_grounding", "impedance"},
               reading.catalogue.systems, read_system_entry);
}

void read_instruments(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "instrument",
               {"label", "kind", "resistance", "capacitance", "common_to_earth", "three_lamps",
                "to_ground_only", "ranges", "threshold"},
               reading.catalogue.instruments, read_instrument_entry);
}

void read_loads(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "load",
               {"label", "power_factor", "capacitive", "standby_resistance", "standby_capacitance",
                "default_power", "nominal", "default_capacitance", "filter", "effects"},
               reading.catalogue.loads, read_load_entry);
}

}  // namespace io
