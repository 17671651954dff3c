// A model checked as a whole, and what `check` says of it.
#pragma once

#include <string>
#include <vector>

#include "io/model_file.h"

namespace io {

/// Reads a model and validates what could be read: every fault of the file, sorted by place. The
/// building may be lowered if none of the faults is an error. Never throws for what the file holds.
ModelFile check_model(const std::string& path);
ModelFile check_model_text(const std::string& text, const std::string& name);

/// One line a fault, the first 200 of them, then the count: "2 errors, nothing computed", "1 warning",
/// or "" where there is nothing to say.
std::string fault_report(const std::vector<netlists::Fault>& faults);

/// What `check` prints of a model without errors: what it holds, every default in force and what
/// lowering it took for granted (Lowered::assumptions, which hold the defaults too: each is printed
/// once); then the caution. Ends in a newline.
std::string check_report(const netlists::Building& building, const std::vector<std::string>& assumptions);

}  // namespace io
