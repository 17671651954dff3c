#include "io/page.h"

#include <fmt/format.h>

#include "io/embedded_page.h"
#include "io/findings_view.h"
#include "io/page_figures.h"
#include "io/page_html.h"

namespace io {
namespace {
using netlists::Findings;

// Bytes of the parts; together they stay below 3 MB.
constexpr std::size_t k_list_room = 1'000'000;
constexpr std::size_t k_fed_room = 500'000;
constexpr std::size_t k_tests_room = 600'000;
constexpr std::size_t k_page_room = 2'900'000;

std::string top(const PageModel& model) {
  const std::string title = html(sheet_title(model.findings));
  return fmt::format(
      "<!doctype html>\n<html lang=en>\n<head>\n<meta charset=utf-8>\n"
      "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'sha256-{}'; "
      "script-src "
      "'sha256-{}'; base-uri 'none'; form-action 'none'\">\n"
      "<meta name=viewport content=\"width=device-width, initial-scale=1\">\n"
      "<meta name=color-scheme content=\"light dark\">\n<title>{}: predicted "
      "readings</title>\n<style>{}</style>\n"
      "</head>\n<body>\n<a class=skip href=#list>Skip to the ranked list</a>\n",
      policy_hash(page_style()), policy_hash(page_script()), title, page_style());
}

std::string facts(const PageModel& model) {
  const Findings& findings = model.findings;
  std::string out = "<dl class=key>";
  const auto add = [&out](const char* name, const std::string& value) {
    if (!value.empty()) out += fmt::format("<div><dt>{}<dd>{}</div>", name, html(value));
  };
  add("stage", findings.stage.empty() ? "as drawn" : findings.stage);
  add("date", model.date);
  add("frequency", fmt::format("{:g} Hz", findings.frequency));
  add("model", findings.model_sha256.substr(0, 12));
  add("program", "idlewire " + findings.program_version);
  add("seed", std::to_string(findings.seed));
  return out + "</dl>\n";
}

std::string header(const PageModel& model, bool effects, bool fed) {
  const std::string links = fmt::format(
      "<ul><li><a href=#list>Ranked list</a><li><a href=#plan>Plan</a>{}<li><a href=#sheets>Sheets</a>"
      "<li><a href=#tests>Test sheets</a>{}<li><a href=#appendix>Appendix</a></ul>",
      effects ? "<li><a href=#currents>Currents</a>" : "", fed ? "<li><a href=#fed>Fed as drawn</a>" : "");
  return fmt::format(
      "<header>\n<p class=kicker>Predicted readings of conductors</p>\n<h1>{}</h1>\n<p "
      "class=verdict>{}</p>\n{}"
      "<p class=caution><strong>Caution.</strong> {}</p>\n</header>\n<nav aria-label=\"Parts of this "
      "page\">{}</nav>\n"
      "<main>\n",
      html(sheet_title(model.findings)), html(verdict_sentence(model.findings)), facts(model),
      html(netlists::caution()), links);
}

/// Sheets in the order of the findings, as many as fit: with pictures up to two thirds of the room, then
/// without, then none.
std::string sheets(const PageModel& model, PageIndex& index, SectionGallery& gallery, std::size_t room) {
  std::string text;
  std::size_t plain = 0, none = 0;
  for (std::size_t k = 0; k < model.findings.conductors.size(); ++k) {
    if (summed_up(model.findings.conductors[k])) continue;
    const std::size_t used = text.size() + gallery.size();
    const bool drawn = used < room * 2 / 3;
    if (used > room) {
      ++none;
      continue;
    }
    plain += drawn ? 0 : 1;
    index.set_sheet(k);
    text += page_sheet(model, index, gallery, k, drawn);
  }
  std::string out =
      "<section id=sheets aria-labelledby=sheets-h><h2 id=sheets-h>Sheets</h2>\n<p>One a conductor that is "
      "neither fed "
      "nor grounded by wire as drawn, or that is flagged. <code>idlewire explain</code> shows any "
      "other.</p>\n";
  if (plain + none > 0)
    out += fmt::format(
        "<p>To keep the page small {} sheets, the lowest in rank, are without pictures and {} conductors "
        "have none; <code>idlewire explain</code> shows each in full.</p>\n",
        plain, none);
  return out + text + "</section>\n";
}

std::string bottom(const SectionGallery& gallery) {
  return "</main>\n<footer><p class=caution><strong>Caution.</strong> " + html(netlists::caution()) + " " +
         html(sheet_warning()) + "</p></footer>\n<svg class=shared aria-hidden=true focusable=false><defs>" +
         figure_symbols() + gallery.symbols() + "</defs></svg>\n<script>" + std::string(page_script()) +
         "</script>\n</body>\n</html>\n";
}

}  // namespace

std::string report_page(const PageModel& model) {
  PageIndex index(model);
  SectionGallery gallery(model.building, model.findings.seed);
  const std::string effects = page_effects(model.findings);
  const std::string hurting = page_hurting(model.findings);
  const std::string fed = page_fed(model, k_fed_room);
  const std::string ends = page_appendix(model);
  const std::string head = top(model) + header(model, !effects.empty(), !fed.empty());
  const auto before = [&] {
    return hurting + page_list(model, index, k_list_room) + page_plan(model, index) + effects;
  };
  const auto after = [&] { return page_tests(model, index, k_tests_room) + fed + ends; };
  // Whatever links to sheets is written anew once they are known; links to all of them are allowed for.
  constexpr std::size_t k_link = 60;  // bytes of a link, at two places
  const std::size_t others = head.size() + before().size() + after().size() + page_script().size() +
                             k_link * model.findings.conductors.size() / 5;
  const std::string text = sheets(model, index, gallery, others < k_page_room ? k_page_room - others : 0);
  return head + before() + text + after() + bottom(gallery);
}

}  // namespace io
