// The report: one HTML file for people, whole without a network, a script or another file.
#pragma once

#include <string>

#include "io/page_parts.h"

namespace io {

/// The page of the findings, at most some 3 MB however large the model: sheets, pictures and test sheets go
/// first to what is flagged, and the page says what it left out. Text of the model is escaped; styles and
/// script stand under a content security policy that lets nothing else in. Without a script all of it is
/// there; with one the list can be sorted, searched and filtered.
std::string report_page(const PageModel& model);

}  // namespace io
