// The findings as a spreadsheet.
#pragma once

#include <string>

#include "io/page_parts.h"

namespace io {

/// An XLSX workbook: the ranked list, what shows at each place, every reading, every contribution, the test
/// sheets to print, and notes with all that was assumed. Numbers are numbers in SI units, named in the
/// heads; text of the model stays text whatever it begins with. The caution stands on every sheet.
std::string findings_xlsx(const PageModel& model);

}  // namespace io
