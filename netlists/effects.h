// What coupled voltages and currents do to loads, devices and people.
#pragma once

#include <vector>

#include "engine/solve.h"
#include "netlists/building.h"
#include "netlists/condition.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

/// The effects on every load with a threshold in the catalogue that is not simply fed or dead by wire at both
/// its terminals, on every device that trips by residual current, and on a person at every place where a
/// conductor that is neither grounded nor stiffly fed can be touched. Those a person feels come first, then
/// what happens, each by how far it is over its threshold. What lies below a hundredth of its threshold is
/// left out. For every supply without a grounded pole each of its poles is also taken as faulted to ground,
/// one at a time, and what goes further then is told with the fault; each costs a solution of the network.
/// Run lengths take all runs of the conductor to grow alike.
/// Methods and sources: netlists/README.md, "Effects".
std::vector<Effect> effects(const Building& building, const Lowered& lowered, const Conditions& conditions,
                            const engine::SolvedNetwork& solved);

}  // namespace netlists
