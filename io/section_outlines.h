// What lies in whose way in a section file.
#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "engine/cross_section.h"
#include "io/yaml_reader.h"

namespace io {

/// The outline of one thing of a section file.
struct Outline {
  std::string what;      // "conductor 'a'", "jacket 1"
  const YamlNode* node;  // where it stands
  Eigen::Vector2d centre;
  double outer = 0.0;   // m
  double inside = 0.0;  // m, radius of the room it has for others; 0: none
  double metal = 0.0;   // m, radius of its metal; 0: none
};

/// Reports every pair whose outlines cross or whose metal touches, and everything that lies outside the
/// tube or under the plane. Insulation may touch.
void check_outlines(YamlReader& reader, const std::vector<Outline>& outlines,
                    const engine::CrossSection& section);

}  // namespace io
