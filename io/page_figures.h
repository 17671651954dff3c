// The figures of a conductor's sheet, as SVG whose looks the page's style sheet gives.
#pragma once

#include <string>
#include <vector>

#include "netlists/findings.h"

namespace io {

/// The contributions that a figure and its table number from 1: those of at least a hundredth of the
/// largest, the largest first, "others" last. At most `most`.
std::vector<const netlists::ContributionEntry*> numbered(const netlists::PlaceFindings& place,
                                                         std::size_t most = 12);

/// Contributions laid tip to tail, and the sum they come to. "" without contributions.
std::string phasor_figure(const netlists::PlaceFindings& place);

/// The reading against the instrument's resistance, each instrument marked. "" where there is no voltage.
/// `settle` marks the limit of the instrument that settles; null where none does.
std::string curve_figure(const netlists::Findings& findings, const netlists::PlaceFindings& place,
                         const netlists::Settle* settle);

/// The short-circuit current on a logarithmic scale beside what people feel and what devices at the place
/// take for on.
std::string current_figure(const netlists::Findings& findings, const netlists::PlaceFindings& place);

/// What the figures share: arrow heads and axes, for the page's one hidden image.
std::string figure_symbols();

}  // namespace io
