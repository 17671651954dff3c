// Which uncertain quantities move a conductor's reading most.
#pragma once

#include <vector>

#include "engine/solve.h"
#include "netlists/building.h"
#include "netlists/draws.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

/// The reading that an answer about influences is given for: the highest judged one to the place's
/// reference. Null place where the conductor has none.
struct RankedReading {
  const PlaceFindings* place = nullptr;
  const Reading* reading = nullptr;
};
RankedReading ranked_reading(const ConductorFindings& found);

/// Sorted by share, largest first, those under a thousandth left out. Derivatives of the nominal reading's
/// magnitude by the adjoint method, one solve a conductor; a layout's part is what its departure from the
/// mean layout does to first order, over as many layouts as the run holds; what is there or not (states,
/// unlisted loads) counts by the difference of the means of the draws with and without it, where that is
/// over three standard errors. Shares are of the sum of all variances, so they leave interaction out.
/// Empty without a judged reading. All arguments belong together.
std::vector<Influence> influences(const Building& staged, const Lowered& lowered,
                                  const engine::SolvedNetwork& solved, const Draws& draws,
                                  const ConductorFindings& found);

}  // namespace netlists
