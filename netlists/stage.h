// One stage of the works, applied to the building as drawn.
#pragma once

#include <string>

#include "netlists/building.h"

namespace netlists {

/// The building in one of its stages: breakers, switches and loads set, bonds and cuts added,
/// circuits removed. "" is the first stage, or the building as drawn if it has none. Throws
/// std::invalid_argument, naming the stages there are, for a stage that is not there.
Building in_stage(const Building& building, const std::string& stage);

/// The name of the stage that in_stage takes for `stage`: "as drawn" where there are none.
std::string stage_name(const Building& building, const std::string& stage);

/// Applies one `set` entry ("LP2-9.breaker" -> "off") to `building`. Returns what is wrong with it,
/// or "" if it was applied.
std::string apply_setting(Building& building, const std::string& target, const std::string& value);

}  // namespace netlists
