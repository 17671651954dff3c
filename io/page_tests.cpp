#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/findings_view.h"
#include "io/page_html.h"
#include "io/page_parts.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::Condition;
using netlists::ConductorFindings;
using netlists::Misleads;
using netlists::PlaceFindings;
using netlists::Reading;

/// References that a test sheet has a row for: those judged, and the partner of an isolated leg.
std::vector<std::string> references(const ConductorFindings& conductor, const PlaceFindings& place) {
  std::vector<std::string> out;
  for (const Reading& reading : place.readings)
    if (reading.judged && std::find(out.begin(), out.end(), reading.reference) == out.end())
      out.push_back(reading.reference);
  if (out.empty()) out.push_back(place.reference);
  const std::string partner = conductor.isolated_supply ? telling_partner(conductor, place) : "";
  if (!partner.empty() && std::find(out.begin(), out.end(), partner) == out.end()) out.push_back(partner);
  return out;
}

/// When to stop: above which value, or why no value tells.
std::string stop_text(const ConductorFindings& conductor) {
  if (conductor.isolated_supply) return "isolated supply: no reading to ground settles it; treat as live";
  if (conductor.condition == Condition::energised || conductor.condition == Condition::through_load)
    return "fed as drawn: treat as live whatever it reads";
  if (conductor.settle.instrument)
    return fmt::format("above {} on {}", limit_text(conductor.settle.treat_as_live_above),
                       html(*conductor.settle.instrument));
  return "none of these instruments settles it; treat as live";
}

void add_rows(HtmlTable& table, const PageIndex& index, std::size_t k, const ConductorFindings& conductor,
              const PlaceFindings& place) {
  for (const std::string& reference : references(conductor, place)) {
    std::vector<std::string> cells{index.link_to(k), html(reference)};
    for (const std::string& name : index.instruments())
      cells.push_back(reading_text({&place, reference}, name));
    const bool partner = reference != place.reference && conductor.isolated_supply;
    cells.push_back(partner ? "full voltage to its partner: live" : stop_text(conductor));
    cells.insert(cells.end(), {"", "", ""});
    table.add(cells);
  }
}

std::string names(const char* title, const std::vector<std::string>& list) {
  if (list.empty()) return "";
  std::string out = std::string("<p><b>") + title + "</b> ";
  for (std::size_t k = 0; k < list.size(); ++k) out += (k == 0 ? "" : ", ") + html(list[k]);
  return out + ".</p>\n";
}

struct Here {
  const ConductorFindings* conductor;
  const PlaceFindings* place;
  std::size_t number;
};

std::string heading(const PageModel& model, const std::string& place, std::size_t number) {
  const auto& findings = model.findings;
  return fmt::format(
      "<article class=test id=t{0} aria-labelledby=th{0}><h3 id=th{0}>Test sheet: {1}</h3>\n<p><b>{2}</b> "
      "{3}</p>\n"
      "<p class=caution>{4} <b>{5}</b></p>\n",
      number, html(place), html(sheet_title(findings)), html(sheet_facts(findings, model.date)),
      html(netlists::caution()), html(sheet_warning()));
}

/// One sheet; `states` false where the states assumed would fill the page, and stand in the appendix alone.
std::string sheet(const PageModel& model, const PageIndex& index, std::size_t number,
                  const std::vector<Here>& here, bool states) {
  const std::string& place = index.places()[number];
  std::vector<HtmlColumn> columns{{"conductor"}, {"to"}};
  for (const std::string& name : index.instruments()) columns.push_back({name + " reads", true});
  for (const char* name : {"stop at", "measured", "with", "time, by"}) columns.push_back({name});
  HtmlTable table(
      "What each instrument should read at " + place + " if it is coupling only, as the drawing has it",
      columns);
  std::vector<std::string> fed, grounded;
  for (const Here& one : here) {
    if (!summed_up(*one.conductor))
      add_rows(table, index, one.number, *one.conductor, *one.place);
    else
      (one.conductor->condition == Condition::grounded ? grounded : fed).push_back(one.conductor->id);
  }
  std::string out = heading(model, place, number);
  out += table.empty() ? "<p>Nothing here but what is fed or grounded by wire as drawn.</p>\n"
                       : scroll_box("Test sheet of " + place, table.text());
  out += names("Fed here as drawn, live:", fed) +
         names("Grounded here, if the drawing is right; test as live:", grounded);
  out += "<p class=small><b>Breakers and switches as assumed:</b> " +
         (states ? html(states_in_words(model.findings))
                 : std::string(
                       "<a href=#states>every one is listed in the appendix</a>; print it with this sheet")) +
         ".</p></article>\n";
  return out;
}

}  // namespace

std::string page_tests(const PageModel& model, const PageIndex& index, std::size_t room) {
  std::vector<std::vector<Here>> at(index.places().size());
  std::vector<bool> flagged(at.size(), false);
  for (std::size_t k = 0; k < model.findings.conductors.size(); ++k) {
    const ConductorFindings& conductor = model.findings.conductors[k];
    for (const PlaceFindings& place : conductor.places) {
      const auto number = static_cast<std::size_t>(index.place_number(place.place));
      at[number].push_back({&conductor, &place, k});
      if (conductor.misleads != Misleads::no) flagged[number] = true;
    }
  }
  const bool states = states_in_words(model.findings).size() * at.size() < room / 3;
  std::vector<std::string> sheets(at.size());
  std::vector<std::string> left_out;
  std::size_t used = 0;
  for (const bool first : {true, false})
    for (std::size_t k = 0; k < at.size(); ++k) {
      if (flagged[k] != first) continue;
      std::string one = sheet(model, index, k, at[k], states);
      if (used + one.size() > room) {
        left_out.push_back(index.places()[k]);
        // What links here must lead somewhere.
        one = fmt::format("<p id=t{} class=small>{}: left out to keep the page small.</p>\n", k,
                          html(left_out.back()));
      }
      used += one.size();
      sheets[k] = one;
    }
  std::string out =
      "<section id=tests aria-labelledby=tests-h><h2 id=tests-h>Test sheets</h2>\n<p>One a place, each on a "
      "page of its "
      "own in print. Stop at the value named: from there on coupling does not explain it.</p>\n";
  if (!left_out.empty())
    out += fmt::format(
        "<p>{} places have no sheet here, to keep the page small; --csv has their readings.</p>\n",
        left_out.size());
  for (const std::string& one : sheets) out += one;
  return out + "</section>\n";
}

}  // namespace io
