#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include "io/findings_view.h"
#include "io/page_html.h"
#include "io/page_parts.h"
#include "io/text_layout.h"
#include "netlists/touch.h"

namespace io {
namespace {
using netlists::Condition;
using netlists::ConductorFindings;
using netlists::Findings;
using netlists::Misleads;

/// One line of the table as HTML.
class ListRow {
 public:
  explicit ListRow(std::string head) : text_(std::move(head)) {}
  ListRow& cell(const std::string& inner, bool figure = false) {
    text_ += (figure ? "<td class=n>" : "<td>") + inner;
    return *this;
  }
  ListRow& head(const std::string& inner) {
    text_ += "<th scope=row>" + inner;
    return *this;
  }
  std::string end() const { return text_ + "\n"; }

 private:
  std::string text_;
};

/// Numbers of the places where a conductor is reached, for the filter: " 0 4 ".
std::string places_of(const ConductorFindings& conductor, const PageIndex& index) {
  std::string out = " ";
  for (const auto& place : conductor.places) out += fmt::format("{} ", index.place_number(place.place));
  return out;
}

std::string main_text(const netlists::PlaceFindings& place) {
  const auto* entry = main_aggressor(place);
  if (entry == nullptr) return "";
  return fmt::format("{} ({}, {})", html(entry->from), entry->path, small_volts(std::abs(entry->volts)));
}

std::string place_text(const Focus& at, const PageIndex& index) {
  if (at.place == nullptr) return "nowhere reached";
  std::string out =
      fmt::format("<a href=#t{}>{}</a>", index.place_number(at.place->place), html(at.place->place));
  if (at.reference != "ground") out += " to " + html(at.reference);
  return out;
}

std::string row(const PageModel& model, const PageIndex& index, std::size_t k) {
  const ConductorFindings& conductor = model.findings.conductors[k];
  const Focus at = focus(conductor);
  ListRow out(fmt::format("<tr id=r{} data-p=\"{}\">", k, places_of(conductor, index)));
  out.cell(conductor.rank ? std::to_string(*conductor.rank) : "-", true).head(index.link_to(k));
  out.cell(html(index.panel_of(conductor.id))).cell(place_text(at, index));
  out.cell(netlists::to_string(conductor.condition) + (conductor.isolated_supply ? ", isolated supply" : ""));
  out.cell(verdict_html(conductor.misleads));
  if (model.findings.draws > 0) out.cell(chance_text(conductor), true);
  for (const std::string& name : index.instruments())
    out.cell(at.place == nullptr ? "-" : reading_text(at, name), true);
  out.cell(at.place == nullptr ? "-" : ohms_text(std::abs(at.place->source_impedance)), true);
  out.cell(at.place == nullptr ? "-" : amperes_text(at.place->short_circuit), true);
  return out.cell(at.place == nullptr ? "" : main_text(*at.place)).end();
}

std::string head(const PageIndex& index, bool draws) {
  const auto column = [](const std::string& name, const char* key, bool figure) {
    return fmt::format("<th scope=col{}{}>{}", figure ? " class=n" : "",
                       *key == '\0' ? "" : fmt::format(" data-f={}", key), html(name));
  };
  std::string out = column("#", "", true) + column("conductor", "", false) + column("panel", "panel", false) +
                    column("at", "", false) + column("condition", "condition", false) +
                    column("verdict", "verdict", false);
  if (draws) out += column("chance", "", true);
  for (const std::string& name : index.instruments()) out += column(name, "", true);
  return out + column("source impedance", "", true) + column("short circuit (computed)", "", true) +
         column("mainly from", "", false);
}

/// The controls; they wait hidden for the script that gives them something to do.
std::string controls(const PageIndex& index) {
  std::string places = "<option value=\"\">all places";
  for (std::size_t k = 0; k < index.places().size(); ++k)
    places += fmt::format("<option value={}>{}", k, html(index.places()[k]));
  std::string out =
      "<form id=find hidden role=search aria-label=\"The ranked list\"><label>Search <input type=search "
      "name=q "
      "autocomplete=off></label>";
  for (const char* key : {"panel", "condition", "verdict"})
    out += fmt::format("<label>{0} <select name={0}><option value=\"\">all</select></label>", key);
  return out + "<label>place <select name=place>" + places +
         "</select></label><button type=reset>Clear</button><output id=count></output></form>\n";
}

/// Conductors fed or grounded as drawn: a short table, or names alone where it would fill the page.
std::string summed(const PageModel& model, std::size_t room) {
  const Findings& findings = model.findings;
  HtmlTable table(
      "Fed or grounded by wire as drawn, not flagged. The drawing may be wrong.",
      {{"conductor"}, {"as drawn"}, {"highest at"}, {"open circuit", true}, {"source impedance", true}});
  std::map<std::string, std::string> names;
  for (const ConductorFindings& conductor : findings.conductors) {
    if (!summed_up(conductor)) continue;
    const std::string as =
        conductor.condition == Condition::grounded ? "grounded" : "energised by " + html(conductor.supply);
    const Focus at = focus(conductor);
    table.add({html(conductor.id), as + (conductor.not_predicted ? ", behind a drive, not predicted" : ""),
               at.place == nullptr ? "-" : html(at.place->place),
               at.place == nullptr ? "-" : small_volts(std::abs(at.place->open_circuit)),
               at.place == nullptr ? "-" : ohms_text(std::abs(at.place->source_impedance))});
    std::string& list = names[as];
    list += (list.empty() ? "" : ", ") + html(conductor.id);
  }
  if (table.empty()) return "";
  const std::string text = table.text();
  if (text.size() <= room) return scroll_box("Fed or grounded as drawn", text);
  std::string out;
  for (const auto& [as, list] : names) out += "<p><b>" + as + ":</b> " + list + ".</p>\n";
  return out;
}

}  // namespace

std::string verdict_html(Misleads misleads) {
  switch (misleads) {
    case Misleads::false_dead:
      return "<b class=fd>false_dead</b>";
    case Misleads::false_live:
      return "<b class=fl>false_live</b>";
    case Misleads::no:
      break;
  }
  return "not flagged";
}

std::string verdict_sentence(const Findings& findings) {
  const auto count = [&](Misleads how) {
    return std::count_if(findings.conductors.begin(), findings.conductors.end(),
                         [how](const ConductorFindings& one) { return one.misleads == how; });
  };
  const auto plural = [](auto n, const char* one, const char* more) {
    return n == 1 ? fmt::format("{} {}", n, one) : fmt::format("{} {}", n, more);
  };
  const auto dead = count(Misleads::false_dead), live = count(Misleads::false_live);
  std::string out;
  if (dead > 0)
    out += plural(dead, "conductor that is fed can read as if it were dead (false_dead). ",
                  "conductors that are fed can read as if they were dead (false_dead). ");
  if (live > 0)
    out += plural(live, "conductor that nothing feeds as drawn can read as if it were live (false_live). ",
                  "conductors that nothing feeds as drawn can read as if they were live (false_live). ");
  if (dead + live == 0)
    out += "No listed instrument contradicts the drawing on any conductor; that proves nothing. ";
  double most = 0.0;  // A
  int felt = 0;       // places
  for (const auto& effect : findings.effects) {
    if (effect.what != "person_feels" || !effect.happens) continue;
    most = std::max(most, effect.value);
    ++felt;
  }
  if (felt > 0)
    out += fmt::format("At {} a current of up to {} can go through a person: {}. ",
                       plural(felt, "place", "places"), amperes_text(most), netlists::body_zone(most));
  return out;
}

std::string page_list(const PageModel& model, const PageIndex& index, std::size_t room) {
  std::string rows, short_names;
  std::size_t shown = 0, left_out = 0;
  for (std::size_t k = 0; k < model.findings.conductors.size(); ++k) {
    const ConductorFindings& conductor = model.findings.conductors[k];
    if (summed_up(conductor)) continue;
    const std::string one = rows.size() < room ? row(model, index, k) : "";
    if (one.empty()) {
      ++left_out;
      short_names += (short_names.empty() ? "" : ", ") + html(conductor.id);
      continue;
    }
    rows += one;
    ++shown;
  }
  std::string out =
      "<section id=list aria-labelledby=list-h><h2 id=list-h>Ranked list</h2>\n"
      "<p>Readings are to ground unless a row says otherwise. Impedance and current are computed, to ground. "
      "Not flagged means only that no listed instrument contradicts the drawing; that proves nothing.</p>\n";
  if (shown > 0)
    out += controls(index) +
           scroll_box("Ranked list",
                      "<table id=ranked><caption>Conductors that are neither fed nor grounded by wire "
                      "as drawn, and whatever is flagged: false_dead first, then false_live, by rank"
                      "</caption><thead><tr>" +
                          head(index, model.findings.draws > 0) + "<tbody>" + rows + "</table>\n");
  if (left_out > 0)
    out += fmt::format(
        "<p>{} more conductors, lower in rank or not flagged, are left out of this table to keep the "
        "page small; <code>--csv</code> has all: {}.</p>\n",
        left_out, short_names);
  return out + "</section>\n";
}

std::string page_fed(const PageModel& model, std::size_t room) {
  const std::string inner = summed(model, room);
  if (inner.empty()) return "";
  return "<section id=fed aria-labelledby=fed-h><h2 id=fed-h>Fed or grounded as drawn</h2>\n" + inner +
         "</section>\n";
}

}  // namespace io
