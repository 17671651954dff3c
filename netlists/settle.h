// What tells coupling from a real source, and what would where no instrument of the model does.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "netlists/findings.h"

namespace netlists {

/// What one voltmeter shows of coupling at the place in question.
struct CouplingReading {
  std::string instrument;
  double resistance = 0.0;  // ohm, of the range in force
  double volts = 0.0;       // V, the nominal reading
};

/// T = U R / (R + U / i): what an instrument of resistance R (ohm) shows of the weakest source that a
/// person feels, U (V) behind U / i, i the body current limit (A).
double weakest_source_reading(double nominal, double resistance, double body_current);

/// Picks the instrument whose coupling reading lies furthest below its T. Until draws give a 95th
/// percentile, twice the nominal reading stands for it. `nominal` in V, the highest to ground at the
/// place; `body_current` in A.
Settle settle_coupling(const std::vector<CouplingReading>& readings, double nominal, double body_current);

/// For conductors that are not coupled only: no instrument settles them by a low reading.
Settle settle_through_load(const std::string& load);
Settle settle_isolated(const std::string& supply, double line_volts);
Settle settle_energised(const std::string& supply);
Settle settle_grounded();

}  // namespace netlists
