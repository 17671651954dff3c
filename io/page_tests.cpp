#include <fmt/format.h>

#include "io/findings_view.h"
#include "io/page_html.h"
#include "io/page_parts.h"
#include "io/test_rows.h"
#include "io/text_layout.h"

namespace io {
namespace {

std::string names(const char* title, const std::vector<std::string>& list) {
  if (list.empty()) return "";
  std::string out = std::string("<p><b>") + title + "</b> ";
  for (std::size_t k = 0; k < list.size(); ++k) out += (k == 0 ? "" : ", ") + html(list[k]);
  return out + ".</p>\n";
}

std::string heading(const PageModel& model, const std::string& place, std::size_t number) {
  const auto& findings = model.findings;
  return fmt::format(
      "<article class=test id=t{0} aria-labelledby=th{0}><h3 id=th{0}>Test sheet: {1}</h3>\n<p><b>{2}</b> "
      "{3}</p>\n"
      "<p class=caution>{4} <b>{5}</b></p>\n",
      number, html(place), html(sheet_title(findings)), html(sheet_facts(findings, model.date)),
      html(netlists::caution()), html(sheet_warning()));
}

/// "<br>43 to 71 V" under a reading, where there were draws.
std::string spread(const TestRow& row, const std::string& instrument) {
  for (const netlists::Reading& reading : row.place->readings) {
    if (reading.instrument != instrument || reading.reference != row.reference) continue;
    const std::string text = spread_text(reading.band, volts_text);
    return text.empty() ? "" : "<br>" + text;
  }
  return "";
}

/// One sheet; `states` false where the states assumed would fill the page, and stand in the appendix alone.
std::string sheet_html(const PageModel& model, const PageIndex& index, std::size_t number,
                       const TestSheet& test, bool states) {
  std::vector<HtmlColumn> columns{{"conductor"}, {"to"}};
  for (const std::string& name : index.instruments()) columns.push_back({name + " reads", true});
  for (const char* name : {"stop at", "measured", "with", "time, by"}) columns.push_back({name});
  HtmlTable table(
      "What each instrument should read at " + test.place + " if it is coupling only, as the drawing has it",
      columns);
  for (const TestRow& row : test.rows) {
    std::vector<std::string> cells{index.link_to(row.number), html(row.reference)};
    for (const std::string& name : index.instruments())
      cells.push_back(reading_text({row.place, row.reference}, name) + spread(row, name));
    cells.insert(cells.end(), {html(row.stop), "", "", ""});
    table.add(cells);
  }
  std::string out = heading(model, test.place, number);
  out += table.empty() ? "<p>Nothing here but what is fed or grounded by wire as drawn.</p>\n"
                       : scroll_box("Test sheet of " + test.place, table.text());
  out += names("Fed here as drawn, live:", test.fed) +
         names("Grounded here, if the drawing is right; test as live:", test.grounded);
  out += "<p class=small><b>Breakers and switches as assumed:</b> " +
         (states ? html(states_in_words(model.findings))
                 : std::string(
                       "<a href=#states>every one is listed in the appendix</a>; print it with this sheet")) +
         ".</p></article>\n";
  return out;
}

}  // namespace

std::string page_tests(const PageModel& model, const PageIndex& index, std::size_t room) {
  const std::vector<TestSheet> tests = test_sheets(model, index);
  const bool states = states_in_words(model.findings).size() * tests.size() < room / 3;
  std::vector<std::string> sheets(tests.size());
  std::size_t used = 0, left_out = 0;
  for (const bool first : {true, false})
    for (std::size_t k = 0; k < tests.size(); ++k) {
      if (tests[k].flagged != first) continue;
      sheets[k] = sheet_html(model, index, k, tests[k], states);
      if (used + sheets[k].size() > room) {
        ++left_out;
        // What links here must lead somewhere.
        sheets[k] = fmt::format("<p id=t{} class=small>{}: left out to keep the page small.</p>\n", k,
                                html(tests[k].place));
      }
      used += sheets[k].size();
    }
  std::string out =
      "<section id=tests aria-labelledby=tests-h><h2 id=tests-h>Test sheets</h2>\n<p>One a place, each on a "
      "page of "
      "its own in print. Stop at the value named: from there on coupling does not explain it.</p>\n";
  if (left_out > 0)
    out += fmt::format(
        "<p>{} places have no sheet here, to keep the page small; <code>--xlsx</code> has them.</p>\n",
        left_out);
  for (const std::string& one : sheets) out += one;
  return out + "</section>\n";
}

}  // namespace io
