// What is in whose way in a section file.
#pragma once

#include <string>
#include <vector>

#include "engine/nesting.h"
#include "io/yaml_reader.h"

namespace io {

/// Where one conductor, body or shell of a section stands in its file.
struct SolidPlace {
  std::string what;                // "conductor 'a'", "jacket 1"
  const YamlNode* node = nullptr;  // its entry
};

/// Reports whatever engine::clashes finds. `places` has one for each of engine::solids_of, in that order.
void report_clashes(YamlReader& reader, const engine::CrossSection& section,
                    const std::vector<SolidPlace>& places);

}  // namespace io
