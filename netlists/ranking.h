// Which readings contradict the condition, and which conductor comes first.
#pragma once

#include <vector>

#include "netlists/findings.h"

namespace netlists {

/// True for a condition that feeds: energised or through_load.
bool fed(Condition condition);

/// Sets `misleads` and `expected_reading` from the judged readings and the condition: false_dead where
/// a conductor that is fed reads dead_like somewhere, false_live where any other reads live_like. The
/// reading it is ranked by is the highest judged one.
void set_misleads(ConductorFindings& found);

/// Sorts: false_dead, then false_live, each by probability where draws gave one, ties by expected reading;
/// then the rest in the order given.
/// Numbers those that mislead from 1.
void rank(std::vector<ConductorFindings>& all);

}  // namespace netlists
