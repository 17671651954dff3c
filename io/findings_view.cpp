#include "io/findings_view.h"

#include <fmt/format.h>

#include <algorithm>
#include <cctype>
#include <cmath>

#include "io/text_layout.h"

namespace io {
namespace {
using netlists::Appearance;
using netlists::Condition;
using netlists::ConductorFindings;
using netlists::Findings;
using netlists::Misleads;
using netlists::PlaceFindings;
using netlists::Reading;

bool contradicts(const Reading& reading, Misleads how) {
  if (!reading.judged) return false;
  return (how == Misleads::false_dead && reading.appearance == Appearance::dead_like) ||
         (how == Misleads::false_live && reading.appearance == Appearance::live_like);
}

/// Whatever is not a number stands last.
double order_by(double value) { return std::isfinite(value) ? value : -1.0; }

/// " (43 to 71 V)", or nothing of nothing.
std::string in_brackets(const std::string& text) { return text.empty() ? "" : " (" + text + ")"; }

std::string list(const std::string& title, const std::vector<std::string>& lines, int width) {
  if (lines.empty()) return "";
  std::string out = "\n" + title + "\n";
  for (const std::string& line : lines) out += paragraph("  - ", printable(line), width);
  return out;
}

}  // namespace

Focus focus(const ConductorFindings& conductor) {
  Focus best;
  double least = 0.0;
  for (const PlaceFindings& place : conductor.places)
    for (const Reading& reading : place.readings) {
      if (!contradicts(reading, conductor.misleads)) continue;
      const double distance = std::abs(reading.volts - conductor.expected_reading);
      if (best.place != nullptr && !(distance < least)) continue;
      best = {&place, reading.reference};
      least = distance;
    }
  if (best.place != nullptr) return best;
  for (const PlaceFindings& place : conductor.places)
    if (best.place == nullptr ||
        order_by(std::abs(place.open_circuit)) > order_by(std::abs(best.place->open_circuit)))
      best = {&place, place.reference};
  return best;
}

bool summed_up(const ConductorFindings& conductor) {
  const bool by_wire =
      conductor.condition == Condition::grounded || conductor.condition == Condition::energised;
  return by_wire && !conductor.rank && !conductor.isolated_supply && conductor.misleads == Misleads::no;
}

std::vector<std::string> voltmeters(const Findings& findings) {
  std::vector<std::string> names;
  const auto add = [&names](const std::string& name) {
    if (std::find(names.begin(), names.end(), name) == names.end()) names.push_back(name);
  };
  for (const auto& instrument : findings.instruments)
    if (instrument.kind == netlists::InstrumentKind::voltmeter) add(instrument.name);
  for (const ConductorFindings& conductor : findings.conductors)
    for (const PlaceFindings& place : conductor.places)
      for (const Reading& reading : place.readings)
        if (!reading.indicator) add(reading.instrument);
  return names;
}

const netlists::ContributionEntry* main_aggressor(const PlaceFindings& place) {
  const netlists::ContributionEntry* best = nullptr;
  for (const auto& entry : place.contributions) {
    const bool better =
        best == nullptr || (best->from == "others" && entry.from != "others") ||
        (entry.from != "others" && order_by(std::abs(entry.volts)) > order_by(std::abs(best->volts)));
    if (better) best = &entry;
  }
  return best;
}

std::string telling_partner(const ConductorFindings& conductor, const PlaceFindings& place) {
  const std::string circuit = conductor.id.substr(0, conductor.id.find('.') + 1);
  const Reading* best = nullptr;
  const auto weight = [&](const Reading& reading) {
    const bool own = !circuit.empty() && reading.reference.rfind(circuit, 0) == 0;
    return std::pair(own, order_by(reading.volts));
  };
  for (const Reading& reading : place.readings) {
    if (reading.judged || reading.indicator || reading.reference == place.reference) continue;
    if (best == nullptr || weight(reading) > weight(*best)) best = &reading;
  }
  return best == nullptr ? "" : best->reference;
}

std::string condition_in_words(const ConductorFindings& conductor) {
  const std::string of = conductor.supply.empty() ? "a supply" : "supply " + printable(conductor.supply);
  switch (conductor.condition) {
    case Condition::grounded:
      return "grounded: a path of wires, closed contacts or bonds leads to a grounded pole or bar";
    case Condition::energised:
      return "energised: a path of wires, closed contacts or bonds leads to a pole of " + of;
    case Condition::through_load:
      return "through_load: fed through a load; cable capacitance aside, it drives more into a body of "
             "2 kohm than the model's limit of body current";
    case Condition::grounded_through_load:
      return "grounded_through_load: tied to ground through a load, and to no supply that could drive the "
             "model's limit of body current through it";
    case Condition::floating:
      return "floating: neither a wire, a closed contact, a winding nor a load leads from it to a supply "
             "pole or to ground";
  }
  return netlists::to_string(conductor.condition);
}

std::string misleads_in_words(const ConductorFindings& conductor) {
  switch (conductor.misleads) {
    case Misleads::false_dead:
      return "false_dead: fed, and yet an instrument can read next to nothing";
    case Misleads::false_live:
      return "false_live: nothing feeds it as drawn, and yet an instrument can read as if something did";
    case Misleads::no:
      break;
  }
  return "not flagged";
}

std::string small_volts(double volts) { return volts < 0.01 ? "<0.01 V" : volts_text(volts); }

std::string chance_in_words(const ConductorFindings& conductor) {
  if (!conductor.probability) return "";
  return fmt::format("probability {:.2f}, give or take {:.2f}, if the drawing is right",
                     *conductor.probability, conductor.probability_error);
}

std::string reading_text(const Focus& at, const std::string& instrument) {
  double least = 0.0, most = 0.0;
  bool any = false;
  for (const Reading& reading : at.place->readings) {
    if (reading.instrument != instrument || reading.reference != at.reference) continue;
    least = any ? std::min(least, reading.volts) : reading.volts;
    most = any ? std::max(most, reading.volts) : reading.volts;
    any = true;
  }
  if (!any) return "-";
  const std::string low = small_volts(least), high = small_volts(most);
  return low == high ? high : low + " to " + high;
}

std::string spread_text(const std::optional<netlists::Band>& band, std::string (*text)(double, int)) {
  if (!band || !std::isfinite(band->p05) || !std::isfinite(band->p95)) return "";
  std::string low = text(band->p05, 2);
  const std::string high = text(band->p95, 2);
  if (low == high) return high;
  const std::size_t unit = low.find(' ');
  if (unit != std::string::npos && low.substr(unit) == high.substr(high.find(' '))) low.resize(unit);
  return low + " to " + high;
}

std::string chance_text(const ConductorFindings& conductor) {
  if (!conductor.probability) return "";
  if (*conductor.probability < 0.01) return "under 1 %";
  if (*conductor.probability > 0.99) return "over 99 %";
  return fmt::format("{:.0f} %", 100 * *conductor.probability);
}

std::vector<std::string> influences_in_words(const ConductorFindings& conductor) {
  std::vector<std::string> out;
  for (const auto& one : conductor.influences)
    out.push_back(
        fmt::format("{}: {} of the variance, {}{} a standard deviation", printable(one.quantity),
                    one.share < 0.01 ? std::string("under 1 %") : fmt::format("{:.0f} %", 100 * one.share),
                    one.derivative < 0 ? "-" : "", volts_text(std::abs(one.derivative))));
  return out;
}

std::string settle_in_words(const ConductorFindings& conductor) {
  const netlists::Settle& settle = conductor.settle;
  std::string text;
  if (settle.instrument)
    text = fmt::format("{}: expect {}{}; treat as live above {}. ", *settle.instrument,
                       volts_text(settle.expect, 3), in_brackets(spread_text(settle.band, volts_text)),
                       limit_text(settle.treat_as_live_above));
  else
    text = "none of the model's instruments. ";
  if (!settle.why.empty()) {
    std::string why = printable(settle.why);
    why.front() = static_cast<char>(std::toupper(static_cast<unsigned char>(why.front())));
    text += why + (why.back() == '.' ? " " : ". ");
  }
  if (settle.instrument && settle.why.find("never proves") == std::string::npos)
    text += "A reading below this limit never proves the conductor dead.";
  return text;
}

std::vector<std::string> reading_remarks(const PlaceFindings& place) {
  std::vector<std::string> out;
  for (const Reading& reading : place.readings) {
    const std::string what = printable(reading.instrument) + " to " + printable(reading.reference) + ": ";
    if (reading.swapped)
      out.push_back(fmt::format("{}{} with its common lead on {}, {} with the leads swapped.", what,
                                volts_text(reading.volts, 3), printable(reading.reference),
                                volts_text(*reading.swapped, 3)));
    if (reading.reference != place.reference || reading.on_ranges.size() < 2) continue;
    std::string ranges;
    for (const auto& range : reading.on_ranges)
      ranges += fmt::format("{}{} on {}", ranges.empty() ? "" : ", ",
                            range.volts > range.full_scale ? "off scale" : volts_text(range.volts, 3),
                            volts_text(range.full_scale, 2));
    out.push_back(what + ranges + "; a person settles on " + volts_text(*reading.range, 2) + ".");
  }
  return out;
}

std::string sheet_title(const Findings& findings) {
  return findings.title.empty() ? "untitled model" : findings.title;
}

std::string sheet_facts(const Findings& findings, const std::string& date) {
  std::string facts = fmt::format("Stage: {}. {} Hz.", findings.stage.empty() ? "as drawn" : findings.stage,
                                  fmt::format("{:g}", findings.frequency));
  if (!findings.model_sha256.empty()) facts += " Model " + findings.model_sha256.substr(0, 12) + ".";
  if (!date.empty()) facts += " " + date + ".";
  if (!findings.program_version.empty()) facts += " idlewire " + findings.program_version + ".";
  return facts;
}

std::string states_in_words(const Findings& findings) {
  std::string states;
  for (const std::string& state : findings.states) states += (states.empty() ? "" : "; ") + state;
  return states.empty() ? "none in this model" : states;
}

std::string sheet_warning() {
  return "A reading that agrees with this sheet proves nothing. "
         "Void once anything is switched or changed.";
}

std::string sheet_head(const Findings& findings, const std::string& date, int width) {
  return paragraph("", printable(sheet_title(findings)), width) +
         paragraph("", printable(sheet_facts(findings, date)), width) + "\n" +
         paragraph("CAUTION  ", netlists::caution(), width);
}

std::string sheet_foot(const Findings& findings, int width) {
  std::string out = list("Warnings", findings.warnings, width);
  out +=
      "\nBreakers and switches as assumed\n" + paragraph("  ", printable(states_in_words(findings)), width);
  out += list("Assumptions", findings.assumptions, width);
  return out + "\n" + paragraph("", sheet_warning(), width);
}

}  // namespace io
