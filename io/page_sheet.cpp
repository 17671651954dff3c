#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/effects_text.h"
#include "io/findings_view.h"
#include "io/page_figures.h"
#include "io/page_html.h"
#include "io/page_parts.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::ConductorFindings;
using netlists::PlaceFindings;
using netlists::Reading;

constexpr std::size_t k_sections = 4;  // drawn on one sheet
constexpr std::size_t k_effects = 6;

std::string fact(const char* name, const std::string& value) {
  return fmt::format("<div><dt>{}<dd>{}</div>", name, value);
}

/// What shows at the place the sheet speaks of.
std::string facts(const PlaceFindings& place) {
  const auto spread = [](const std::string& text) {
    return text.empty() ? "" : "<br><span class=small>" + text + " in nine of ten draws</span>";
  };
  return "<dl class=key>" +
         fact("open circuit to", html(place.reference) + ": " + phasor_text(place.open_circuit) +
                                     spread(spread_text(place.open_circuit_band, volts_text))) +
         fact("source impedance", ohms_text(std::abs(place.source_impedance), 3) + " at " +
                                      degrees_text(place.source_impedance) +
                                      spread(spread_text(place.source_impedance_band, ohms_text))) +
         fact("short-circuit current (computed)",
              amperes_text(place.short_circuit, 3) +
                  spread(spread_text(place.short_circuit_band, amperes_text))) +
         "</dl>\n";
}

/// Contributions with what of each lies in phase with the sum: that column adds up to it.
std::string contributions(const PlaceFindings& place) {
  if (place.contributions.empty()) return "";
  std::complex<double> sum = 0.0;
  for (const auto& entry : place.contributions) sum += entry.volts;
  const auto in_phase = [&](std::complex<double> v) {
    return sum == 0.0 ? 0.0 : (v * std::conj(sum)).real() / std::abs(sum);
  };
  const auto figures = numbered(place);
  HtmlTable table("Who puts it there, at " + place.place,
                  {{"from"}, {"path"}, {"volts", true}, {"angle", true}, {"in phase with the sum", true}});
  const auto volts = [](double v) { return fmt::format("{:.2f} V", std::abs(v) < 0.005 ? 0.0 : v); };
  const auto add = [&](const std::string& from, const std::string& path, std::complex<double> v) {
    table.add({from, path, volts(std::abs(v)), degrees_text(v), volts(in_phase(v))});
  };
  for (std::size_t k = 0; k < figures.size(); ++k)
    add(fmt::format("{}. {}", k + 1, html(figures[k]->from)), figures[k]->path, figures[k]->volts);
  for (const auto& entry : place.contributions)
    if (std::find(figures.begin(), figures.end(), &entry) == figures.end())
      add(html(entry.from), entry.path, entry.volts);
  add("<b>sum</b>", "", sum);
  return scroll_box("Who puts it there", table.text());
}

std::string reading_cell(const Reading& reading) {
  std::string out = volts_text(reading.volts, 3) + " " + netlists::to_string(reading.appearance);
  if (reading.range) out += ", range " + volts_text(*reading.range, 2);
  const std::string spread = spread_text(reading.band, volts_text);
  if (!spread.empty()) out += "<br>" + spread;
  return out + (reading.judged ? "" : " (shown only)");
}

/// Readings of every place, a row for each place and reference.
std::string readings(const ConductorFindings& conductor, const PageIndex& index) {
  std::vector<HtmlColumn> columns{{"at, to"}};
  for (const std::string& name : index.instruments()) columns.push_back({name, true});
  HtmlTable table("Readings, the instrument's loading included", columns);
  for (const PlaceFindings& place : conductor.places) {
    std::vector<std::string> references;
    for (const Reading& reading : place.readings)
      if (!reading.indicator &&
          std::find(references.begin(), references.end(), reading.reference) == references.end())
        references.push_back(reading.reference);
    for (const std::string& reference : references) {
      std::vector<std::string> cells{html(place.place) + ", to " + html(reference)};
      for (const std::string& name : index.instruments()) {
        const auto found = std::find_if(
            place.readings.begin(), place.readings.end(),
            [&](const Reading& one) { return one.instrument == name && one.reference == reference; });
        cells.push_back(found == place.readings.end() ? "-" : reading_cell(*found));
      }
      table.add(cells);
    }
  }
  return table.empty() ? "" : scroll_box("Readings of " + conductor.id, table.text());
}

/// What else the instruments show at the place shown, and indicators everywhere.
std::string remarks(const ConductorFindings& conductor, const PlaceFindings* shown) {
  std::vector<std::string> lines;
  for (const PlaceFindings& place : conductor.places) {
    if (&place == shown)
      for (const std::string& remark : reading_remarks(place)) lines.push_back(remark);
    for (const Reading& reading : place.readings)
      if (reading.indicator)
        lines.push_back(fmt::format("{}: {} to {} {}, {}.", place.place, reading.instrument,
                                    reading.reference,
                                    reading.indicates ? "responds" : "stays silent, which proves nothing",
                                    volts_text(reading.volts, 3)));
  }
  return html_list(lines);
}

/// Effects at the places of a conductor, the nearest to happening first, as they stand in the findings.
std::string effects(const PageModel& model, const ConductorFindings& conductor) {
  std::vector<std::string> lines;
  for (const auto& effect : model.findings.effects) {
    const bool here = std::any_of(conductor.places.begin(), conductor.places.end(),
                                  [&](const PlaceFindings& place) { return place.place == effect.where; });
    if (here && lines.size() < k_effects)
      lines.push_back(effect_in_words(effect) + ". Threshold: " + effect.source + ".");
  }
  return lines.empty() ? "" : "<h4>What coupled current does at its places</h4>\n" + html_list(lines);
}

std::string sections(const ConductorFindings& conductor, const PlaceFindings& place, const PageIndex& index,
                     SectionGallery& gallery) {
  std::vector<std::string> aggressors;
  for (const auto* entry : numbered(place)) aggressors.push_back(entry->from);
  std::string out, others;
  std::size_t drawn = 0;
  for (const std::string& run : index.runs_of(conductor.id)) {
    if (drawn < k_sections) {
      const std::string figure = gallery.figure(run, conductor.id, aggressors);
      if (!figure.empty()) ++drawn;
      out += figure;
    } else {
      others += (others.empty() ? "" : ", ") + html(run);
    }
  }
  if (out.empty()) return "</div>\n";
  return out +
         "</div>\n<p class=small>Sections as one of the layouts drawn has them: this conductor "
         "ringed, its aggressors numbered as in the table." +
         (others.empty() ? "" : " It also lies in " + others + ".") + "</p>\n";
}

std::string head(const ConductorFindings& conductor, std::size_t k) {
  std::string out = fmt::format("<article class=sheet id=c{0} aria-labelledby=h{0}><h3 id=h{0}>{1}</h3>\n<p>",
                                k, html(conductor.id));
  if (conductor.rank) out += fmt::format("Rank {}. ", *conductor.rank);
  out += verdict_html(conductor.misleads);
  if (conductor.probability && conductor.misleads != netlists::Misleads::no)
    out += ", chance " + chance_text(conductor) + " if the drawing is right";
  out += ". " + html(condition_in_words(conductor)) + ". As drawn; the drawing may be wrong.</p>\n";
  if (conductor.isolated_supply)
    out +=
        "<p class=warn>It belongs to an isolated supply: no reading to ground settles it, and while one leg "
        "is "
        "loaded to ground the other is at full voltage to ground.</p>\n";
  if (conductor.leakage)
    out +=
        "<p class=warn>Leakage: conductance carries over a tenth of what it reads somewhere; treat as live "
        "until "
        "the leak is found.</p>\n";
  if (conductor.not_predicted)
    out +=
        "<p class=warn>It shares a run with the output of a drive: not predicted, expect more than "
        "shown.</p>\n";
  return out;
}

}  // namespace

std::string page_sheet(const PageModel& model, const PageIndex& index, SectionGallery& gallery, std::size_t k,
                       bool drawn) {
  const ConductorFindings& conductor = model.findings.conductors[k];
  const Focus at = focus(conductor);
  std::string out = head(conductor, k);
  if (at.place == nullptr) return out + "<p>It can be reached at no place of the model.</p></article>\n";
  out += "<p><b>What settles it:</b> " + html(settle_in_words(conductor)) + "</p>\n";
  out += fmt::format("<p class=small>What follows is at {}.</p>\n", html(at.place->place)) + facts(*at.place);
  if (drawn) {
    out += "<div class=figs>" + phasor_figure(*at.place) +
           curve_figure(model.findings, *at.place, &conductor.settle) +
           current_figure(model.findings, *at.place) + sections(conductor, *at.place, index, gallery);
  }
  out += contributions(*at.place) + readings(conductor, index) + remarks(conductor, at.place);
  if (!conductor.influences.empty())
    out += "<h4>What moves its reading</h4>\n" + html_list(influences_in_words(conductor));
  if (drawn) out += effects(model, conductor);
  return out + fmt::format("<p class=small><a href=#r{}>Its row in the list</a></p></article>\n", k);
}

}  // namespace io
