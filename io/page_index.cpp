#include <algorithm>
#include <set>
#include <sstream>

#include "io/findings_view.h"
#include "io/page_html.h"
#include "io/page_parts.h"

namespace io {
namespace {

/// What stands before the first '.': circuit, panel of a feeder, or run.
std::string owner_of(const std::string& conductor) { return conductor.substr(0, conductor.find('.')); }

/// The runs of a line: itself, or those of a joint section, which is named C2+C3.
std::vector<std::string> runs_of_line(const std::string& line, const std::set<std::string>& runs) {
  if (runs.count(line) > 0) return {line};
  std::vector<std::string> out;
  std::istringstream parts(line);
  for (std::string part; std::getline(parts, part, '+');) out.push_back(part);
  return out;
}

}  // namespace

PageIndex::PageIndex(const PageModel& model)
    : findings_(model.findings),
      instruments_(voltmeters(model.findings)),
      sheets_(model.findings.conductors.size(), false) {
  for (std::size_t k = 0; k < findings_.conductors.size(); ++k)
    numbers_.emplace(findings_.conductors[k].id, static_cast<int>(k));
  for (const auto& panel : model.building.panels) panels_[panel.name.text] = panel.name.text;
  for (const auto& circuit : model.building.circuits)
    panels_[circuit.name.text] = circuit.panel ? circuit.panel->text : "";
  std::set<std::string> names;
  for (const auto& run : model.building.runs) names.insert(run.name.text);
  for (const auto& path : model.lowered.conductors) {
    std::vector<std::string>& runs = runs_[path.id];
    for (const auto& [line, row] : path.segments)
      for (const std::string& run :
           runs_of_line(model.lowered.line_runs[static_cast<std::size_t>(line)], names))
        if (std::find(runs.begin(), runs.end(), run) == runs.end()) runs.push_back(run);
  }
  collect_places(model);
}

void PageIndex::collect_places(const PageModel& model) {
  std::set<std::string> reached;
  for (const auto& conductor : findings_.conductors)
    for (const auto& place : conductor.places) reached.insert(place.place);
  const auto take = [&](const std::string& name) {
    if (reached.erase(name) == 0) return;
    place_numbers_[name] = static_cast<int>(places_.size());
    places_.push_back(name);
  };
  for (const auto& panel : model.building.panels) take(panel.name.text);
  for (const auto& run : model.building.runs) {
    take(run.from.text);
    take(run.to.text);
  }
  for (const std::string& name : std::set<std::string>(reached)) take(name);
}

int PageIndex::place_number(const std::string& place) const {
  const auto found = place_numbers_.find(place);
  return found == place_numbers_.end() ? -1 : found->second;
}

std::string PageIndex::panel_of(const std::string& conductor) const {
  const auto found = panels_.find(owner_of(conductor));
  return found == panels_.end() ? "" : found->second;
}

const std::vector<std::string>& PageIndex::runs_of(const std::string& conductor) const {
  static const std::vector<std::string> none;
  const auto found = runs_.find(conductor);
  return found == runs_.end() ? none : found->second;
}

int PageIndex::number_of(const std::string& conductor) const {
  const auto found = numbers_.find(conductor);
  return found == numbers_.end() ? -1 : found->second;
}

std::string PageIndex::link_to(std::size_t k) const {
  const std::string name = html(findings_.conductors[k].id);
  return has_sheet(k) ? "<a href=#c" + std::to_string(k) + ">" + name + "</a>" : name;
}

}  // namespace io
