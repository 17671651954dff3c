// The model file, format idlewire/1: YAML in, a Building out.
#pragma once

#include <string>
#include <vector>

#include "netlists/building.h"

namespace io {

/// A model file read: the building, and every fault found while reading. The building is complete
/// only if none of the faults is an error.
struct ModelFile {
  netlists::Building building;
  std::vector<netlists::Fault> faults;
  bool is_read = false;  // the file was a map of keys, whatever their faults
};

/// Reads a model from disk, catalogue files it names included. Never throws for what the file holds:
/// an unreadable, oversized or malformed file is a fault. Checks what one entry shows by itself;
/// netlists::validate does the rest.
ModelFile read_model(const std::string& path);

/// The same from text; `name` stands for the file in messages.
ModelFile read_model_text(const std::string& text, const std::string& name);

/// The same on a catalogue of the caller's instead of the built-in one.
ModelFile read_model_text(const std::string& text, const std::string& name,
                          const netlists::Catalogue& catalogue);

}  // namespace io
