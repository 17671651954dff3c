// The findings, the network and a section, written out. Every writer takes the same findings.
#pragma once

#include <string>
#include <vector>

#include "engine/capacitance.h"
#include "engine/impedance.h"
#include "engine/solve.h"
#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace io {

/// Results file idlewire-findings/1. A number that is not finite is null, with a warning.
std::string findings_json(const netlists::Findings& findings);

/// One row a reading, by RFC 4180 (comma, CRLF, a header with the units); a number that is not finite is
/// left empty. Ends with a column that says that a prediction is not a test.
std::string findings_csv(const netlists::Findings& findings);

/// Network file idlewire-network/1: exactly the system that was solved.
std::string network_json(const netlists::Lowered& lowered, const engine::SolvedNetwork& solved);

/// Section result idlewire-section-result/1; `names` by row, the reference left out. `materials` are
/// the values taken for each material named, in words.
std::string section_json(const engine::FieldMatrices& field, const Eigen::MatrixXcd& impedance,
                         double frequency, const std::vector<std::string>& names,
                         const std::string& reference, const std::vector<std::string>& materials = {});

/// The ranked table for a terminal, at most `width` columns (60 or more), with the caution. `date` is
/// that of the sheet, as in "2024-05-17"; without one the sheet has none.
std::string ranked_table(const netlists::Findings& findings, int width, bool colour,
                         const std::string& date = "");

/// One conductor in full, at most `width` columns (80 or more), with the caution. Throws
/// std::invalid_argument if the id is not there, with the nearest that is.
std::string explanation(const netlists::Findings& findings, const std::string& id, int width,
                        const std::string& date = "");

/// The matrices of a section as text, with the caution.
std::string section_text(const engine::FieldMatrices& field, const Eigen::MatrixXcd& impedance,
                         double frequency, const std::vector<std::string>& names,
                         const std::string& reference, const std::vector<std::string>& materials = {});

/// A plain drawing of a section, to scale, for a printer: black, white and greys. `names` by number:
/// conductors, then shells, the reference of an open section among them.
std::string section_svg(const engine::CrossSection& section, const std::vector<std::string>& names);

/// Why nothing can be written to `path`, as far as can be told without writing: it is a directory, or
/// its folder is not there. "" if nothing speaks against it. "-" is standard output.
std::string unwritable(const std::string& path);

/// Writes beside the target, flushes to disk, then renames: a failure leaves the old file, whole.
/// "-" is standard output. Throws std::runtime_error with the path and the system's reason.
void write_whole(const std::string& path, const std::string& content);

}  // namespace io
