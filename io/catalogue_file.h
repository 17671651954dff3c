// The catalogue: YAML data inside the program, and files of the user's on top.
#pragma once

#include <string>
#include <vector>

#include "netlists/catalogue.h"
#include "netlists/fault.h"

namespace io {

/// What the program knows by itself. Read once from the embedded YAML; a fault in it is a slip of ours.
const netlists::Catalogue& builtin_catalogue();

/// Adds the entries of a catalogue file to `catalogue`, overriding those of the same name.
void add_catalogue_text(const std::string& text, const std::string& name, netlists::Catalogue& catalogue,
                        std::vector<netlists::Fault>& faults);

}  // namespace io
