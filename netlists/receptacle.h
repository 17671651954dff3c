// The three lamps of a plug-in receptacle tester, all loading at once.
#pragma once

#include <vector>

#include "engine/solve.h"
#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

/// What the pattern of lit lamps is taken for (common practice); `lit` is set too.
void name_pattern(ReceptaclePattern& pattern, double threshold);

/// The pattern of every tester of three lamps in the model's list, wherever the first line, the neutral and
/// the ground of a circuit are all reached, its panel aside. Each lamp is the instrument's input impedance
/// between two of the three; lit from the instrument's threshold on.
std::vector<ReceptaclePattern> receptacle_patterns(const Building& building, const Lowered& lowered,
                                                   const engine::SolvedNetwork& solved);

}  // namespace netlists
