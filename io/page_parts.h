// The parts of the report page, each a piece of HTML from the same findings.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "io/page_sections.h"
#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace io {

/// All that the page is made of. `building` is the building in the stage of the findings, `lowered` what
/// the findings were solved from.
struct PageModel {
  const netlists::Findings& findings;
  const netlists::Building& building;
  const netlists::Lowered& lowered;
  std::string date;  // "2024-05-17"; "" for none
};

/// Where things are in the page and in the building. The anchors of conductor k, of its row and of place k
/// are "cK", "rK" and "tK".
class PageIndex {
 public:
  explicit PageIndex(const PageModel& model);

  /// Places where something is reached: panels first, then as the runs name them.
  const std::vector<std::string>& places() const { return places_; }
  int place_number(const std::string& place) const;  // -1 where nothing is reached

  /// The panel a conductor's circuit or feeder belongs to; "" for none.
  std::string panel_of(const std::string& conductor) const;

  /// Runs that hold a conductor, in the order of its segments.
  const std::vector<std::string>& runs_of(const std::string& conductor) const;

  const std::vector<std::string>& instruments() const { return instruments_; }

  /// Whether conductor number k has a sheet in the page.
  bool has_sheet(std::size_t k) const { return k < sheets_.size() && sheets_[k]; }
  void set_sheet(std::size_t k) { sheets_[k] = true; }

  /// "<a href=#c3>spare-1.a</a>" where there is such a sheet, else the name alone; escaped.
  std::string link_to(std::size_t k) const;

  /// Number of a conductor by its name, or -1.
  int number_of(const std::string& conductor) const;

 private:
  void collect_places(const PageModel& model);

  const netlists::Findings& findings_;
  std::vector<std::string> places_;
  std::vector<std::string> instruments_;
  std::map<std::string, int> place_numbers_;
  std::map<std::string, int> numbers_;
  std::map<std::string, std::string> panels_;
  std::map<std::string, std::vector<std::string>> runs_;
  std::vector<bool> sheets_;
};

/// "false_dead" with the mark that stands for it without colour; "not flagged".
std::string verdict_html(netlists::Misleads misleads);

/// The verdict of the whole page in a sentence or two, plain text.
std::string verdict_sentence(const netlists::Findings& findings);

/// Rows of every conductor that one line cannot sum up, at most `room` bytes of them.
std::string page_list(const PageModel& model, const PageIndex& index, std::size_t room);

/// The other conductors, fed or grounded by wire as drawn: a table, or where it takes over `room` bytes
/// their names.
std::string page_fed(const PageModel& model, std::size_t room);

/// The sheet of conductor k; without pictures where `drawn` is false.
std::string page_sheet(const PageModel& model, const PageIndex& index, SectionGallery& gallery, std::size_t k,
                       bool drawn);

/// The test sheets, at most `room` bytes of them, places with flagged conductors first.
std::string page_tests(const PageModel& model, const PageIndex& index, std::size_t room);

/// Currents that people feel, or worse; "" where there are none.
std::string page_hurting(const netlists::Findings& findings);

/// Effects on loads and devices, patterns of receptacle testers.
std::string page_effects(const netlists::Findings& findings);

/// The drawing of panels, places and runs.
std::string page_plan(const PageModel& model, const PageIndex& index);

/// Assumptions and sources, the method, how to recompute.
std::string page_appendix(const PageModel& model);

}  // namespace io
