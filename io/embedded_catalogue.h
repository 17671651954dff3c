// The catalogue's YAML files as the build put them into the program.
#pragma once

#include <span>
#include <string_view>

namespace io {

struct EmbeddedFile {
  std::string_view name;  // "materials.yaml"
  std::string_view text;
};

/// In the order they are to be read: what a file refers to stands in an earlier one.
std::span<const EmbeddedFile> embedded_catalogue();

}  // namespace io
