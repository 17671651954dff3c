// The findings, the network and a section, written out. Every writer takes the same findings.
#pragma once

#include <string>

#include "engine/capacitance.h"
#include "engine/impedance.h"
#include "engine/solve.h"
#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace io {

/// Results file idlewire-findings/1.
std::string findings_json(const netlists::Findings& findings);

/// Network file idlewire-network/1: exactly the system that was solved.
std::string network_json(const netlists::Lowered& lowered, const engine::SolvedNetwork& solved);

/// Section result idlewire-section-result/1; `names` by row, the reference left out.
std::string section_json(const engine::FieldMatrices& field, const Eigen::MatrixXcd& impedance,
                         double frequency, const std::vector<std::string>& names,
                         const std::string& reference);

/// The ranked table for a terminal, at most `width` columns, with the caution.
std::string ranked_table(const netlists::Findings& findings, int width, bool colour);

/// One conductor in full, with the caution. Throws std::invalid_argument if the id is not there.
std::string explanation(const netlists::Findings& findings, const std::string& id, int width);

/// The matrices of a section as text.
std::string section_text(const engine::FieldMatrices& field, const Eigen::MatrixXcd& impedance,
                         double frequency, const std::vector<std::string>& names,
                         const std::string& reference);

/// Writes beside the target, then renames: a failure leaves nothing half written. "-" is standard
/// output. Throws std::runtime_error with the path and the system's reason.
void write_whole(const std::string& path, const std::string& content);

}  // namespace io
