#include "io/catalogue_entries.h"

#include <fmt/format.h>

#include <array>
#include <charconv>
#include <cmath>

#include "io/catalogue_entry.h"

namespace io {
namespace {

using netlists::CableType;
using netlists::Core;
using netlists::InsulationLayer;
using netlists::Material;
using netlists::RacewayKind;
using netlists::RacewayType;
using netlists::WireType;

constexpr Range k_size{1e-6, 10.0, "0.001 mm to 10 m"};
constexpr Range k_offset{-1.0, 1.0, "-1 m to 1 m"};
constexpr Range k_permittivity{1.0, 1e4, "1 to 10000"};
constexpr Range k_loss{0.0, 10.0, "0 to 10"};
constexpr Range k_permeability{0.1, 1e6, "0.1 to 1000000"};
constexpr Range k_resistivity{1e-9, 1.0, "1e-9 ohm m to 1 ohm m"};
constexpr double k_touch = 1e-9;  // m: outlines this deep in each other still only touch

/// "0.00393 1/K", in 1/K.
std::optional<double> read_temperature_coefficient(const YamlMap& map) {
  const auto text = map.text("temperature_coefficient");
  if (!text) return std::nullopt;
  double value = NAN;
  const char* end = text->data() + text->size();
  const auto parsed = std::from_chars(text->data(), end, value);
  if (parsed.ec == std::errc() && std::string(parsed.ptr, end) == " 1/K" && std::abs(value) < 0.1)
    return value;
  map.error(
      *map.find("temperature_coefficient"),
      fmt::format("temperature_coefficient '{}' must be under 0.1 and have its unit, as in '0.00393 1/K'",
                  *text));
  return std::nullopt;
}

/// Ohm metres; of a pair the geometric middle.
std::optional<double> read_resistivity(const YamlMap& map) {
  const YamlNode* node = map.find("resistivity");
  if (node == nullptr) return std::nullopt;
  if (node->kind != YamlKind::sequence)
    return map.quantity("resistivity", Dimension::resistivity, k_resistivity);
  const auto ends = map.interval("resistivity", Dimension::resistivity, k_resistivity);
  return ends ? std::optional(std::sqrt(ends->first * ends->second)) : std::nullopt;
}

void read_metal(const YamlMap& map, Material& material) {
  constexpr Range k_conductivity{1.0, 1e9, "1 S/m to 1e9 S/m"};
  if (const auto value = read_resistivity(map)) material.conductivity = 1.0 / *value;
  if (const auto value = map.quantity("conductivity", Dimension::conductivity, k_conductivity))
    material.conductivity = *value;
  if (const auto value = read_temperature_coefficient(map)) material.temperature_coefficient = *value;
  if (const auto value = read_spread(map, "relative_permeability", k_permeability))
    material.relative_permeability = value->central;
}

void read_insulator(const YamlMap& map, Material& material) {
  if (const auto value = read_spread(map, "permittivity", k_permittivity)) {
    material.permittivity = value->central;
    material.permittivity_low = value->low;
    material.permittivity_high = value->high;
  }
  if (const auto value = read_spread(map, "loss_tangent", k_loss)) material.loss_tangent = value->central;
}

void read_material_entry(const YamlMap& map, Material& material) {
  const int kinds = map.has("permittivity") + map.has("resistivity") + map.has("conductivity");
  if (kinds != 1)
    map.error(map.place(),
              "takes one of permittivity (an insulator), resistivity and conductivity (a metal)");
  read_metal(map, material);
  read_insulator(map, material);
}

InsulationLayer read_layer(const CatalogueReading& reading, const YamlMap& map) {
  InsulationLayer layer;
  map.require("material");
  map.require("thickness");
  layer.material = read_material(reading.catalogue, map, "material", false).value_or("");
  layer.thickness = map.quantity("thickness", Dimension::length, k_size).value_or(0.0);
  return layer;
}

void read_wire_entry(const CatalogueReading& reading, const YamlMap& map, WireType& wire) {
  if (const auto metal = read_material(reading.catalogue, map, "metal", true)) wire.metal = *metal;
  map.require("diameter");
  wire.conductor_diameter = map.quantity("diameter", Dimension::length, k_size).value_or(0.0);
  wire.strands = map.whole("strands", 1, 271).value_or(1);
  if (!is_concentric(wire.strands))
    map.error(
        *map.find("strands"),
        fmt::format("{} strands do not lie in rings; it takes 1, 7, 19, 37, 61, 91, 127, ...", wire.strands));
  wire.resistance = read_resistance_per_length(map, "resistance").value_or(0.0);
  const auto* layers = map.list("insulation", "[{material: PVC, thickness: 0.8 mm}]");
  if (layers == nullptr) return;
  for (const YamlNode& layer : *layers)
    wire.layers.push_back(
        read_layer(reading, YamlMap(map.reader(), layer, map.owner(), {"material", "thickness"})));
}

Core read_core(const CatalogueReading& reading, const YamlMap& map) {
  Core core;
  for (const char* key : {"role", "wire", "x"}) map.require(key);
  core.role = map.text("role").value_or("");
  core.x = map.quantity("x", Dimension::length, k_offset).value_or(0.0);
  core.y = map.quantity("y", Dimension::length, k_offset).value_or(0.0);
  const auto type = map.text("wire");
  if (!type) return core;
  const auto found = reading.catalogue.wires.find(*type);
  if (found != reading.catalogue.wires.end()) {
    core.wire = found->second;
    return core;
  }
  std::vector<std::string> names;
  for (const auto& [name, wire] : reading.catalogue.wires) names.push_back(name);
  map.error(*map.find("wire"),
            fmt::format("wire '{}' is not in the catalogue{}", *type, netlists::nearest_hint(*type, names)));
  return core;
}

void read_outline(const YamlMap& map, CableType& cable) {
  if (map.has("diameter")) {
    cable.width = cable.height = map.quantity("diameter", Dimension::length, k_size).value_or(0.0);
    if (map.has("width") || map.has("height"))
      map.error(map.place(), "takes a diameter (round) or width and height (flat), not both");
    return;
  }
  if (!map.has("width") && !map.has("height")) {
    map.error(map.place(), "an outline is missing: diameter (round) or width and height (flat)");
    return;
  }
  map.require("width");
  map.require("height");
  cable.width = map.quantity("width", Dimension::length, k_size).value_or(0.0);
  cable.height = map.quantity("height", Dimension::length, k_size).value_or(0.0);
  if (cable.width < cable.height) map.error(*map.find("width"), "width must not be under height");
}

void read_jacket(const CatalogueReading& reading, const YamlMap& map, CableType& cable) {
  const YamlNode* node = map.find("jacket");
  if (node == nullptr) return;
  const InsulationLayer jacket =
      read_layer(reading, YamlMap(map.reader(), *node, map.owner() + ": jacket", {"material", "thickness"}));
  cable.jacket = jacket.material;
  cable.jacket_thickness = jacket.thickness;
}

void read_armour(const CatalogueReading& reading, const YamlMap& map, CableType& cable) {
  const YamlNode* node = map.find("armour");
  if (node == nullptr) return;
  const YamlMap parts(map.reader(), *node, map.owner() + ": armour",
                      {"material", "inner_diameter", "outer_diameter", "resistance"});
  for (const char* key : {"material", "inner_diameter", "outer_diameter"}) parts.require(key);
  netlists::CableArmour armour;
  armour.material = read_material(reading.catalogue, parts, "material", true).value_or("");
  armour.inner_diameter = parts.quantity("inner_diameter", Dimension::length, k_size).value_or(0.0);
  armour.outer_diameter = parts.quantity("outer_diameter", Dimension::length, k_size).value_or(0.0);
  armour.resistance = read_resistance_per_length(parts, "resistance").value_or(0.0);
  if (armour.inner_diameter >= armour.outer_diameter)
    parts.error(*node, "inner_diameter must be under outer_diameter");
  cable.armour = armour;
}

/// How far a core reaches out of the space inside jacket or armour: a circle, or of a flat cable two
/// half circles with straight sides between.
double reach_out(const CableType& cable, const Core& core) {
  const double height =
      cable.armour ? cable.armour->inner_diameter : cable.height - 2 * cable.jacket_thickness;
  const double straight = cable.armour ? 0.0 : cable.width - cable.height;
  const double x = std::max(0.0, std::abs(core.x) - straight / 2);
  return std::hypot(x, core.y) + core.wire.outer_diameter() / 2 - height / 2;
}

void check_fit(const YamlMap& map, const CableType& cable) {
  const double armour = cable.armour ? cable.armour->outer_diameter + 2 * cable.jacket_thickness : 0.0;
  if (armour > cable.width + k_touch)
    map.error(map.place(), fmt::format("armour and jacket come to {:.3f} mm, the outline is {:.3f} mm",
                                       armour * 1e3, cable.width * 1e3));
  for (std::size_t i = 0; i < cable.cores.size(); ++i) {
    const Core& a = cable.cores[i];
    if (reach_out(cable, a) > k_touch)
      map.error(map.place(), fmt::format("core '{}' reaches {:.3f} mm out of the space inside", a.role,
                                         reach_out(cable, a) * 1e3));
    for (std::size_t j = 0; j < i; ++j) {
      const Core& b = cable.cores[j];
      const double apart = std::hypot(a.x - b.x, a.y - b.y);
      const double radii = (a.wire.outer_diameter() + b.wire.outer_diameter()) / 2;
      if (a.role == b.role) map.error(map.place(), fmt::format("two cores have the role '{}'", a.role));
      if (apart < radii - k_touch)
        map.error(map.place(),
                  fmt::format("cores '{}' and '{}' overlap: centres {:.3f} mm apart, radii sum to "
                              "{:.3f} mm",
                              b.role, a.role, apart * 1e3, radii * 1e3));
    }
  }
}

void read_cable_entry(const CatalogueReading& reading, const YamlMap& map, CableType& cable) {
  const std::size_t faults = map.reader().faults().size();
  read_outline(map, cable);
  read_jacket(reading, map, cable);
  read_armour(reading, map, cable);
  if (!map.has("jacket") && !map.has("armour")) map.error(map.place(), "has neither a jacket nor an armour");
  if (cable.armour && cable.flat()) map.error(map.place(), "an armoured cable must be round");
  map.require("filler");
  cable.filler = read_material(reading.catalogue, map, "filler", false).value_or("");
  map.require("cores");
  const auto* cores = map.list("cores", "[{role: hot, wire: THHN 12, x: 0 mm, y: 0 mm}]");
  if (cores != nullptr && cores->empty()) map.error(*map.find("cores"), "a cable has at least one core");
  if (cores != nullptr)
    for (const YamlNode& core : *cores)
      cable.cores.push_back(read_core(
          reading, YamlMap(map.reader(), core, map.owner() + ": core", {"role", "wire", "x", "y"})));
  if (map.reader().faults().size() == faults) check_fit(map, cable);
}

void read_tube(const YamlMap& map, RacewayType& raceway) {
  map.require("inner_diameter");
  map.require("outer_diameter");
  raceway.inner_diameter = map.quantity("inner_diameter", Dimension::length, k_size).value_or(0.0);
  raceway.outer_diameter = map.quantity("outer_diameter", Dimension::length, k_size).value_or(0.0);
  if (raceway.inner_diameter > 0 && raceway.outer_diameter > 0 &&
      raceway.inner_diameter >= raceway.outer_diameter)
    map.error(*map.find("inner_diameter"), "inner_diameter must be under outer_diameter");
}

void read_trough(const YamlMap& map, RacewayType& raceway) {
  for (const char* key : {"width", "height", "wall"}) map.require(key);
  raceway.width = map.quantity("width", Dimension::length, k_size).value_or(0.0);
  raceway.height = map.quantity("height", Dimension::length, k_size).value_or(0.0);
  raceway.wall = map.quantity("wall", Dimension::length, k_size).value_or(0.0);
}

void read_raceway_entry(const CatalogueReading& reading, const YamlMap& map, RacewayType& raceway) {
  map.require("kind");
  const auto kind = map.choice<RacewayKind>("kind", {{"metal_tube", RacewayKind::metal_tube},
                                                     {"plastic_tube", RacewayKind::plastic_tube},
                                                     {"wireway", RacewayKind::wireway},
                                                     {"tray", RacewayKind::tray}});
  if (!kind) return;
  raceway.kind = *kind;
  if (*kind == RacewayKind::metal_tube || *kind == RacewayKind::plastic_tube)
    read_tube(map, raceway);
  else
    read_trough(map, raceway);
  map.require("material");
  raceway.material = read_material(reading.catalogue, map, "material", raceway.metal()).value_or("");
}

}  // namespace

void read_materials(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "material",
               {"permittivity", "loss_tangent", "resistivity", "conductivity", "temperature_coefficient",
                "relative_permeability"},
               reading.catalogue.materials, read_material_entry);
}

void read_wires(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "wire", {"metal", "diameter", "strands", "resistance", "insulation"},
               reading.catalogue.wires,
               [&](const YamlMap& map, WireType& wire) { read_wire_entry(reading, map, wire); });
}

void read_cables(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "cable", {"diameter", "width", "height", "jacket", "armour", "filler", "cores"},
               reading.catalogue.cables,
               [&](const YamlMap& map, CableType& cable) { read_cable_entry(reading, map, cable); });
}

void read_raceways(const CatalogueReading& reading, const YamlNode& node) {
  read_entries(reading, node, "raceway",
               {"kind", "inner_diameter", "outer_diameter", "width", "height", "wall", "material"},
               reading.catalogue.raceways,
               [&](const YamlMap& map, RacewayType& raceway) { read_raceway_entry(reading, map, raceway); });
}

}  // namespace io
