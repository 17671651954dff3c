#include "io/section_values.h"

#include <fmt/format.h>

#include <algorithm>

namespace io {
namespace {

using engine::Dielectric;
using engine::Metal;

constexpr Range k_size{1e-6, 100.0, "0.001 mm to 100 m"};
constexpr Range k_position{-1e3, 1e3, "-1 km to 1 km"};
constexpr double k_usual_sheet = 1.5e-3;  // m, 16 gauge: UL 870 and common practice, from memory
constexpr Range k_permittivity{1.0, 1e4, "1 to 10000"};
constexpr Range k_loss{0.0, 10.0, "0 to 10"};

}  // namespace

/// Radii of inner_diameter and outer_diameter, both due.
std::pair<double, double> SectionValues::read_wall(const YamlMap& map) {
  map.require("inner_diameter");
  map.require("outer_diameter");
  const auto inner = map.quantity("inner_diameter", Dimension::length, k_size);
  const auto outer = map.quantity("outer_diameter", Dimension::length, k_size);
  if (inner && outer && *inner >= *outer)
    map.error(*map.find("inner_diameter"), "inner_diameter must be under outer_diameter");
  return {inner.value_or(0.0) / 2, outer.value_or(0.0) / 2};
}

Eigen::Vector2d SectionValues::read_centre(const YamlMap& map) {
  map.require("centre");
  const auto* items = map.list("centre", "[0 mm, 20 mm]");
  if (items == nullptr) return {0.0, 0.0};
  if (items->size() != 2) {
    map.error(*map.find("centre"), fmt::format("centre must have two values [x, y], not {}", items->size()));
    return {0.0, 0.0};
  }
  const auto x = reader_.quantity((*items)[0], Dimension::length, k_position, {map.owner(), "centre"});
  const auto y = reader_.quantity((*items)[1], Dimension::length, k_position, {map.owner(), "centre"});
  return {x.value_or(0.0), y.value_or(0.0)};
}

Eigen::Vector2d SectionValues::read_size(const YamlMap& map) {
  map.require("width");
  map.require("height");
  return {map.quantity("width", Dimension::length, k_size).value_or(0.0),
          map.quantity("height", Dimension::length, k_size).value_or(0.0)};
}

double SectionValues::read_sheet(const YamlMap& map) {
  if (map.has("wall")) return map.quantity("wall", Dimension::length, k_size).value_or(k_usual_sheet);
  note(fmt::format("wall of the enclosure: {:.2g} mm, the usual sheet of a wireway", k_usual_sheet * 1e3));
  return k_usual_sheet;
}

void SectionValues::note(const std::string& words) {
  auto& list = materials_;
  if (std::find(list.begin(), list.end(), words) == list.end()) list.push_back(words);
}

/// A metal of the catalogue, or one by its values.
Metal SectionValues::read_metal(const YamlMap& map, const std::string& usual) {
  const YamlNode* node = map.find("material");
  if (node != nullptr && node->kind == YamlKind::map) return read_metal_values(map, *node);
  std::string name = usual;
  if (node != nullptr) {
    const auto found = read_material(catalogue_, map, "material", true);
    if (!found) return {};
    name = *found;
  }
  const netlists::Material& material = catalogue_.materials.at(name);
  note(fmt::format("{}: {:.4g} MS/m at 20 degC, {:.4g} 1/K, relative permeability {:.4g}", name,
                   material.conductivity * 1e-6, material.temperature_coefficient,
                   material.relative_permeability));
  return {material.conductivity, material.relative_permeability, material.temperature_coefficient};
}

Metal SectionValues::read_metal_values(const YamlMap& map, const YamlNode& node) {
  const YamlMap values(reader_, node, map.owner() + ": material", {"conductivity", "relative_permeability"});
  values.require("conductivity");
  Metal metal;
  metal.temperature_coefficient = 0.0;  // the file gives the value at its own temperature
  metal.conductivity =
      values.quantity("conductivity", Dimension::conductivity, {1.0, 1e9, "1 S/m to 1000 MS/m"})
          .value_or(1.0);
  metal.relative_permeability =
      values.number("relative_permeability", {0.1, 1e6, "0.1 to 1000000"}).value_or(1.0);
  return metal;
}

/// An insulator of the catalogue, or one by its values.
Dielectric SectionValues::read_dielectric(const YamlMap& map) {
  if (map.has("material") == map.has("permittivity")) {
    map.error(map.place(), "takes either a material or a permittivity");
    return {};
  }
  if (map.has("permittivity"))
    return {map.number("permittivity", k_permittivity).value_or(1.0),
            map.number("loss_tangent", k_loss).value_or(0.0)};
  if (map.has("loss_tangent"))
    map.error(*map.key_node("loss_tangent"), "loss_tangent comes with the material");
  const auto name = read_material(catalogue_, map, "material", false);
  if (!name) return {};
  const netlists::Material& material = catalogue_.materials.at(*name);
  note(fmt::format("{}: permittivity {:.4g}, loss tangent {:.4g}", *name, material.permittivity,
                   material.loss_tangent));
  return {material.permittivity, material.loss_tangent};
}

/// Rings of insulation from the inside out, the first around `radius`.
std::vector<engine::Layer> SectionValues::read_insulation(const YamlMap& map, double radius) {
  std::vector<engine::Layer> layers;
  const auto* items = map.list("insulation", "[{outer_diameter: 3.3 mm, permittivity: 3.6}]");
  if (items == nullptr) return layers;
  for (const YamlNode& node : *items) {
    const YamlMap ring(reader_, node, map.owner() + ": insulation",
                       {"outer_diameter", "permittivity", "loss_tangent", "material"});
    ring.require("outer_diameter");
    engine::Layer layer;
    layer.dielectric = read_dielectric(ring);
    const auto outer = ring.quantity("outer_diameter", Dimension::length, k_size);
    if (!outer) continue;
    layer.outer_radius = *outer / 2;
    if (layer.outer_radius <= radius)
      ring.error(*ring.find("outer_diameter"),
                 fmt::format("outer_diameter must be over that of what is inside, {:.4g} mm", 2e3 * radius));
    radius = layer.outer_radius;
    layers.push_back(layer);
  }
  return layers;
}

std::optional<Dielectric> SectionValues::read_filler(const YamlMap& map) {
  const YamlNode* node = map.find("filler");
  if (node == nullptr) return std::nullopt;
  return read_dielectric(
      YamlMap(reader_, *node, map.owner() + ": filler", {"permittivity", "loss_tangent", "material"}));
}

}  // namespace io
