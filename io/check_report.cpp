#include "io/check_report.h"

#include <fmt/format.h>

#include <algorithm>

#include "netlists/findings.h"

namespace io {
namespace {

using netlists::Fault;
using netlists::Severity;

std::string counted(std::size_t n, const std::string& one) {
  return fmt::format("{} {}{}", n, one, n == 1 ? "" : "s");
}

std::string list_of(const std::string& title, const std::vector<std::string>& lines) {
  if (lines.empty()) return "";
  std::string text = title + "\n";
  for (const std::string& line : lines) text += fmt::format("  {}\n", line);
  return text;
}

}  // namespace

std::string fault_report(const std::vector<Fault>& faults) {
  constexpr std::size_t k_most_lines = 200;
  std::string text;
  for (std::size_t i = 0; i < std::min(faults.size(), k_most_lines); ++i) text += to_string(faults[i]) + "\n";
  if (faults.size() > k_most_lines) text += fmt::format("... and {} more\n", faults.size() - k_most_lines);
  const auto errors = static_cast<std::size_t>(std::count_if(
      faults.begin(), faults.end(), [](const Fault& f) { return f.severity == Severity::error; }));
  const std::size_t warnings = faults.size() - errors;
  if (errors > 0) text += counted(errors, "error");
  if (errors > 0 && warnings > 0) text += ", ";
  if (warnings > 0) text += counted(warnings, "warning");
  if (errors > 0) text += ", nothing computed";
  return text.empty() ? text : text + "\n";
}

std::string check_report(const netlists::Building& building, const std::vector<std::string>& assumptions) {
  std::string text = fmt::format("{}\n", building.title.empty() ? building.file : building.title);
  text += fmt::format("{} {}, {}, {}, {}, {}\n", building.supplies.size(),
                      building.supplies.size() == 1 ? "supply" : "supplies",
                      counted(building.panels.size(), "panel"), counted(building.runs.size(), "run"),
                      counted(building.circuits.size(), "circuit"), counted(building.stages.size(), "stage"));
  std::vector<std::string> lines = building.defaults;
  for (const std::string& line : assumptions)
    if (std::find(lines.begin(), lines.end(), line) == lines.end()) lines.push_back(line);
  text += list_of("Defaults and assumptions in force:", lines);
  return text + netlists::caution() + "\n";
}

}  // namespace io
