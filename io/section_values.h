// What the things of a section file are made of: walls, metals, insulators.
#pragma once

#include <Eigen/Core>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "engine/cross_section.h"
#include "io/catalogue_entry.h"
#include "io/yaml_reader.h"

namespace io {

/// Reads values out of the maps of a section file; materials by name come from the catalogue, and what was
/// taken for each is noted in words. Faults go to the reader; what is returned after one only fills a place.
class SectionValues {
 public:
  SectionValues(YamlReader& reader, const netlists::Catalogue& catalogue, std::vector<std::string>& materials)
      : reader_(reader), catalogue_(catalogue), materials_(materials) {}

  /// `centre`, due: [x, y] in m.
  Eigen::Vector2d read_centre(const YamlMap& map);
  /// Radii in m of `inner_diameter` and `outer_diameter`, both due.
  std::pair<double, double> read_wall(const YamlMap& map);
  /// `width` and `height`, both due, in m.
  Eigen::Vector2d read_size(const YamlMap& map);
  /// `wall` of sheet metal in m; the usual one, noted, where it is left out.
  double read_sheet(const YamlMap& map);
  /// `material`: a metal of the catalogue, or one by its values; `usual` where it is left out.
  engine::Metal read_metal(const YamlMap& map, const std::string& usual);
  /// Either `material`, an insulator of the catalogue, or `permittivity` and `loss_tangent`.
  engine::Dielectric read_dielectric(const YamlMap& map);
  /// `filler`, if it is there: a dielectric.
  std::optional<engine::Dielectric> read_filler(const YamlMap& map);
  /// `insulation`: rings from the inside out, the first around `radius` (m).
  std::vector<engine::Layer> read_insulation(const YamlMap& map, double radius);

 private:
  engine::Metal read_metal_values(const YamlMap& map, const YamlNode& node);
  void note(const std::string& words);

  YamlReader& reader_;
  const netlists::Catalogue& catalogue_;
  std::vector<std::string>& materials_;
};

}  // namespace io
