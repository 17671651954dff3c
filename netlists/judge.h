// From the solved network to what people need to know of each conductor.
#pragma once

#include "engine/solve.h"
#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

/// Conditions, readings, contributions, ranking and what settles each case.
Findings judge(const Building& building, const Lowered& lowered, const engine::SolvedNetwork& solved);

}  // namespace netlists
