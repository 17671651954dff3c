#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>

#include "io/effects_text.h"
#include "io/findings_view.h"
#include "io/text_layout.h"
#include "io/writers.h"

namespace io {
namespace {
using netlists::Condition;
using netlists::ConductorFindings;
using netlists::Findings;
using netlists::Misleads;
using netlists::PlaceFindings;
using netlists::Reading;

constexpr int k_effects_shown = 8;
constexpr int k_indent = 6;  // columns, of the lines below a row

/// The mark of a row: its rank, or "-".
std::string mark(const ConductorFindings& conductor) {
  return conductor.rank ? std::to_string(*conductor.rank) : "-";
}

/// The table of all rows, with a column per voltmeter where they fit.
TextTable rows(const std::vector<const ConductorFindings*>& conductors,
               const std::vector<std::string>& instruments, int name_width) {
  std::vector<Column> columns{{"#", 6, true}, {"conductor", name_width}, {"at", std::max(8, name_width - 4)}};
  for (const std::string& name : instruments) columns.push_back({name, 14, true});
  columns.push_back({"source impedance", 11, true});
  columns.push_back({"short circuit", 9, true});
  TextTable table(columns);
  for (const ConductorFindings* conductor : conductors) {
    const Focus at = focus(*conductor);
    std::vector<std::string> cells{mark(*conductor), printable(conductor->id),
                                   at.place == nullptr ? "-" : printable(at.place->place)};
    for (const std::string& name : instruments)
      cells.push_back(at.place == nullptr ? "-" : reading_text(at, name));
    cells.push_back(at.place == nullptr ? "-" : ohms_text(std::abs(at.place->source_impedance)));
    cells.push_back(at.place == nullptr ? "-" : amperes_text(at.place->short_circuit));
    table.add(cells);
  }
  return table;
}

std::string condition_text(const ConductorFindings& conductor) {
  std::string out = netlists::to_string(conductor.condition);
  if (conductor.condition == Condition::energised && !conductor.supply.empty())
    out += " by " + printable(conductor.supply);
  if (conductor.isolated_supply) out += ", an isolated supply";
  return out;
}

std::string aggressor_text(const PlaceFindings& place) {
  const netlists::ContributionEntry* entry = main_aggressor(place);
  if (entry == nullptr) return "";
  return fmt::format(" Mainly from {} ({}, {} of {}).", printable(entry->from), entry->path,
                     small_volts(std::abs(entry->volts)), small_volts(std::abs(place.open_circuit)));
}

/// "dmm 61 V, low_impedance 0.35 V": what each instrument reads at the place against the reference.
std::string readings_text(const Focus& at, const std::vector<std::string>& instruments) {
  std::string out;
  for (const std::string& name : instruments) {
    const std::string volts = reading_text(at, name);
    if (volts != "-") out += (out.empty() ? "" : ", ") + name + " " + volts;
  }
  return out;
}

std::string settle_text(const ConductorFindings& conductor, const Focus& at,
                        const std::vector<std::string>& instruments) {
  if (conductor.isolated_supply) {
    const std::string partner = at.place == nullptr ? "" : telling_partner(conductor, *at.place);
    const std::string readings = partner.empty() ? "" : readings_text({at.place, partner}, instruments);
    return " No reading to ground settles it." +
           (readings.empty() ? "" : fmt::format(" To {}: {}.", printable(partner), readings));
  }
  if (!conductor.settle.instrument)
    return !conductor.rank ? ""
           : conductor.misleads == Misleads::false_dead
               ? " Treat as live; no reading here settles it: see explain."
               : " None of these instruments settles it: see explain.";
  return fmt::format(" Settled by {}: expect {}, treat as live above {}.", *conductor.settle.instrument,
                     small_volts(conductor.settle.expect), limit_text(conductor.settle.treat_as_live_above));
}

std::string indicators_text(const Focus& at) {
  std::string shows, silent;
  for (const Reading& reading : at.place->readings) {
    if (!reading.indicator || reading.reference != at.reference) continue;
    std::string& names = reading.indicates ? shows : silent;
    names += (names.empty() ? "" : ", ") + reading.instrument;
  }
  std::string out;
  if (!shows.empty()) out += " Indicators that respond: " + shows + ".";
  if (!silent.empty()) out += " Indicators that stay silent, which proves nothing: " + silent + ".";
  return out;
}

/// Where nine of ten draws put the highest judged reading of the row.
std::string drawn_text(const Focus& at) {
  const netlists::Reading* most = nullptr;
  if (at.place != nullptr)
    for (const netlists::Reading& reading : at.place->readings)
      if (reading.judged && reading.reference == at.reference && (!most || reading.volts > most->volts))
        most = &reading;
  if (most == nullptr || !most->band) return "";
  return fmt::format(" In nine of ten draws {} on {}.", spread_text(most->band, volts_text),
                     printable(most->instrument));
}

/// The lines below a row: how it misleads, its condition, who puts the voltage there, what settles it.
std::string details(const ConductorFindings& conductor, const std::vector<std::string>& instruments,
                    bool readings_below, int width) {
  const Focus at = focus(conductor);
  std::string text = conductor.misleads == Misleads::no ? std::string("not flagged: ")
                                                        : netlists::to_string(conductor.misleads) + ": ";
  text += condition_text(conductor) + ".";
  if (conductor.probability && conductor.misleads != Misleads::no)
    text += fmt::format(" Probability {:.2f}.", *conductor.probability);
  text += drawn_text(at);
  if (conductor.leakage)
    text += " Leakage: conductance carries over a tenth of it; treat as live until the leak is found.";
  if (conductor.not_predicted) text += " Not predicted: expect more than shown.";
  if (at.place != nullptr) {
    if (readings_below) text += " Reads " + readings_text(at, instruments) + ".";
    if (at.reference != "ground") text += " Readings to " + printable(at.reference) + ".";
    if (at.reference != at.place->reference)
      text += fmt::format(" To {}: {}.", at.place->reference,
                          readings_text({at.place, at.place->reference}, instruments));
    text += indicators_text(at) + aggressor_text(*at.place);
    if (at.place->short_circuit >= k_felt && conductor.condition == Condition::floating)
      text += fmt::format(" {} can be felt.", amperes_text(at.place->short_circuit));
  }
  text += settle_text(conductor, at, instruments);
  return paragraph(std::string(k_indent, ' '), text, width);
}

std::string summary(const std::string& title, const std::vector<std::string>& names, int width) {
  if (names.empty()) return "";
  std::string text;
  for (const std::string& name : names) text += (text.empty() ? "" : ", ") + printable(name);
  return paragraph("  " + title + ": ", text, width, 4);
}

/// One line for each supply that feeds, one for what is grounded.
std::string summaries(const Findings& findings, int width) {
  std::map<std::string, std::vector<std::string>> energised;
  std::vector<std::string> grounded, not_predicted;
  for (const ConductorFindings& conductor : findings.conductors) {
    if (!summed_up(conductor)) continue;
    if (conductor.condition == Condition::grounded)
      grounded.push_back(conductor.id);
    else
      energised[conductor.supply].push_back(conductor.id);
    if (conductor.not_predicted) not_predicted.push_back(conductor.id);
  }
  std::string out;
  for (const auto& [supply, names] : energised)
    out += summary("energised by " + (supply.empty() ? "a supply" : printable(supply)), names, width);
  out += summary("grounded, if the drawing is right", grounded, width);
  out += summary("behind a drive, not predicted: expect more than shown", not_predicted, width);
  return out.empty() ? "" : "\nFed or grounded by wire as drawn, not flagged\n" + out;
}

std::string heading(const std::string& text, const char* code, bool colour, int width) {
  const std::string lines = paragraph("", text, width);
  return "\n" + (colour && *code != '\0' ? fmt::format("\x1b[{}m{}\x1b[0m", code, lines) : lines);
}

struct Group {
  Misleads misleads;
  const char* title;
  const char* colour;  // of an ANSI terminal; the words say the same
};

// No colour stands for what is not flagged: any would read as a promise.
constexpr Group k_groups[] = {
    {Misleads::false_dead, "FALSE_DEAD: fed, and yet an instrument reads next to nothing", "1;31"},
    {Misleads::false_live, "FALSE_LIVE: nothing feeds it as drawn, and yet an instrument reads as if live",
     "1;33"},
    {Misleads::no, "NOT FLAGGED: no listed instrument contradicts the drawing; that proves nothing", ""}};

/// The columns that show most: names as wide as fit, readings below the row only where they must be.
struct Shape {
  TextTable table;
  bool readings_below = false;
};

Shape fitting(const std::vector<const ConductorFindings*>& conductors,
              const std::vector<std::string>& instruments, int width) {
  for (const int names : {36, 24, 16, 12}) {
    TextTable table = rows(conductors, instruments, names);
    if (table.width() <= width) return {table, false};
  }
  for (const int names : {36, 24, 16}) {
    TextTable table = rows(conductors, {}, names);
    if (table.width() <= width) return {table, true};
  }
  return {rows(conductors, {}, 12), true};
}

}  // namespace

std::string ranked_table(const Findings& findings, int width, bool colour, const std::string& date) {
  width = std::max(60, width);
  std::vector<const ConductorFindings*> shown;
  for (const ConductorFindings& conductor : findings.conductors)
    if (!summed_up(conductor)) shown.push_back(&conductor);
  const std::vector<std::string> instruments = voltmeters(findings);
  const Shape shape = fitting(shown, instruments, width);
  const std::vector<std::string> blocks = shape.table.blocks();

  std::string out = sheet_head(findings, date, width) + hurting_text(findings, width);
  if (!shown.empty())
    out += "\n" +
           paragraph("",
                     "Readings are to ground unless a row says otherwise. Impedance and current "
                     "are computed, to ground.",
                     width) +
           "\n" + blocks.front();
  for (const Group& group : k_groups) {
    std::string text;
    for (std::size_t k = 0; k < shown.size(); ++k)
      if (shown[k]->misleads == group.misleads)
        text += blocks[k + 1] + details(*shown[k], instruments, shape.readings_below, width);
    if (!text.empty()) out += heading(group.title, group.colour, colour, width) + text;
  }
  out += effects_text(findings, width, "", k_effects_shown);
  out += patterns_text(findings, width) + summaries(findings, width);
  out += "\n" + paragraph("", "A reading below a limit of this table never proves a conductor dead.", width);
  return out + sheet_foot(findings, width);
}

}  // namespace io
