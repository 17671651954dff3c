#include "io/catalogue_entry.h"

#include <fmt/format.h>

#include <cmath>

namespace io {
namespace {

Spread around(const std::pair<double, double>& ends) {
  return {std::sqrt(ends.first * ends.second), ends.first, ends.second};
}

std::optional<Spread> spread_of_map(const YamlMap& map, const YamlNode& node, std::string_view key,
                                    const Range& range) {
  const YamlMap parts(map.reader(), node, fmt::format("{}: {}", map.owner(), key), {"central", "range"});
  const YamlNode* ends_node = parts.require("range");
  parts.require("central");
  const auto central = parts.number("central", range);
  if (ends_node == nullptr || !central) return std::nullopt;
  const auto ends = map.reader().number_interval(*ends_node, range, {parts.owner(), "range"});
  if (!ends) return std::nullopt;
  if (*central >= ends->first && *central <= ends->second) return Spread{*central, ends->first, ends->second};
  parts.error(*ends_node, "range must hold the central value");
  return std::nullopt;
}

std::vector<std::string> names_of(const std::map<std::string, netlists::Material>& materials, bool metal) {
  std::vector<std::string> names;
  for (const auto& [name, material] : materials)
    if ((material.conductivity > 0) == metal) names.push_back(name);
  return names;
}

}  // namespace

std::string read_source(const CatalogueReading& reading, const YamlMap& map) {
  const YamlNode* node = map.find("source");
  if (node == nullptr) {
    if (!map.has("source"))
      map.warn(map.place(), "no source; say where the values are from, as in 'source: measured on site'");
    return "not given";
  }
  std::string joined;
  const auto add = [&](const std::string& word) {
    const auto known = reading.sources.find(word);
    joined += (joined.empty() ? "" : "; ") + (known != reading.sources.end() ? known->second : word);
  };
  if (node->kind == YamlKind::sequence) {
    for (const auto& [word, mark] : map.texts("source", "[a source, another]")) add(word);
  } else if (const auto word = map.text("source")) {
    add(*word);
  }
  return joined;
}

std::optional<Spread> read_spread(const YamlMap& map, std::string_view key, const Range& range) {
  const YamlNode* node = map.find(key);
  if (node == nullptr) return std::nullopt;
  if (node->kind == YamlKind::map) return spread_of_map(map, *node, key, range);
  if (node->kind == YamlKind::sequence) {
    const auto ends = map.reader().number_interval(*node, range, {map.owner(), key});
    return ends ? std::optional(around(*ends)) : std::nullopt;
  }
  const auto value = map.number(key, range);
  return value ? std::optional(Spread{*value, *value, *value}) : std::nullopt;
}

std::optional<double> read_resistance_per_length(const YamlMap& map, std::string_view key) {
  const YamlNode* node = map.find(key);
  const auto text = map.text(key);
  if (!text) return std::nullopt;
  const auto slash = text->find('/');
  if (slash == std::string::npos) {
    map.error(*node, fmt::format("{} '{}' is not per length; write it as in '5.32 ohm/km'", key, *text));
    return std::nullopt;
  }
  std::string length = text->substr(slash + 1);
  if (length.find_first_of("0123456789") == std::string::npos) length = "1 " + length;
  const auto ohms = parse_quantity(text->substr(0, slash), Dimension::resistance, std::string(key));
  const auto metres = parse_quantity(length, Dimension::length, std::string(key));
  for (const auto* part : {&ohms, &metres}) {
    if (const auto* problem = std::get_if<std::string>(part)) {
      map.error(*node, *problem);
      return std::nullopt;
    }
  }
  const double value = std::get<double>(ohms) / std::get<double>(metres);
  if (value >= 1e-7 && value <= 1e3) return value;
  map.error(*node, fmt::format("{} '{}' is not within 0.1 mohm/km to 1 kohm/m", key, *text));
  return std::nullopt;
}

std::optional<std::string> read_material(const netlists::Catalogue& catalogue, const YamlMap& map,
                                         std::string_view key, bool metal) {
  auto name = map.text(key);
  if (!name) return std::nullopt;
  const auto names = names_of(catalogue.materials, metal);
  const auto found = catalogue.materials.find(*name);
  if (found == catalogue.materials.end()) {
    map.error(*map.find(key), fmt::format("{} '{}' is not in the catalogue{}", key, *name,
                                          netlists::nearest_hint(*name, names)));
    return std::nullopt;
  }
  if ((found->second.conductivity > 0) == metal) return name;
  map.error(*map.find(key), fmt::format("{} '{}' is {}", key, *name, metal ? "no metal" : "no insulator"));
  return std::nullopt;
}

bool is_concentric(int strands) {
  int count = 1;
  for (int ring = 1; count < strands; ++ring) count += 6 * ring;
  return count == strands;
}

}  // namespace io
