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
  double resistance = 0.0;                  // ohm, of the range in force
  double volts = 0.0;                       // V, the nominal reading
  std::optional<Band> band = std::nullopt;  // V, over the draws
};

/// What coupling must be told apart from.
struct RealSource {
  double volts = 0.0;         // V to ground, the lowest of the supplies there: its source shows least
  double live_like = 0.0;     // V, what looks live there
  double body_current = 0.0;  // A, what a person feels
  // Standard deviations of ln U, of ln of an instrument's resistance, and of ln of what it shows.
  double supply_spread = 0.0;
  double resistance_spread = 0.0;
  double reading_spread = 0.0;
};

/// T = U R / (R + U / i): what an instrument of resistance R (ohm) shows of the weakest source that a
/// person feels, U (V) behind U / i, i the body current limit (A).
double weakest_source_reading(double nominal, double resistance, double body_current);

/// Picks the instrument whose coupling reading lies furthest below its limit: T, but never above what looks
/// live. With draws the 95th percentile of coupling counts, and the limit is the 5th percentile of what the
/// weakest source shows, instruments and supply being as uncertain as they are; the chance of taking that
/// source for coupling is set. Without, twice the nominal reading stands for the percentile. Only an
/// instrument that loads settles, one of no more than U / i: on any other the weakest real source keeps most
/// of its volts, and a limit near full voltage would call a sagging supply coupling.
Settle settle_coupling(const std::vector<CouplingReading>& readings, const RealSource& source);

/// Standard deviation of ln of what an instrument of `resistance` (ohm) shows of the weakest source.
double weakest_source_spread(const RealSource& source, double resistance);

/// For conductors that are not coupled only: no instrument settles them by a low reading.
Settle settle_through_load(const std::string& load);
Settle settle_isolated(const std::string& supply, double line_volts);
Settle settle_energised(const std::string& supply);
Settle settle_grounded();

}  // namespace netlists
