// The section file, format idlewire-section/1: one cross-section alone.
#pragma once

#include <string>
#include <vector>

#include "engine/cross_section.h"
#include "engine/impedance.h"
#include "netlists/catalogue.h"
#include "netlists/fault.h"

namespace io {

/// A section file read, with every fault; the section is complete only if none is an error.
struct SectionFile {
  engine::CrossSection section;
  engine::ImpedanceConditions conditions;
  std::vector<std::string> names;      // by number: conductors, then shells
  std::string reference;               // "enclosure", "plane" or the name of the reference conductor
  std::vector<std::string> materials;  // the values taken for each material named, in words
  std::vector<netlists::Fault> faults;
};

SectionFile read_section(const std::string& path, const netlists::Catalogue& catalogue);
SectionFile read_section_text(const std::string& text, const std::string& name,
                              const netlists::Catalogue& catalogue);

}  // namespace io
