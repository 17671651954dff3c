#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "io/effects_text.h"
#include "io/findings_view.h"
#include "io/reading_curve.h"
#include "io/text_layout.h"
#include "io/writers.h"
#include "netlists/fault.h"

namespace io {
namespace {
using netlists::ConductorFindings;
using netlists::Findings;
using netlists::PlaceFindings;
using netlists::Reading;

constexpr int k_effects_shown = 20;
constexpr std::size_t k_influences_shown = 10;
constexpr int k_digits = 4;  // of the figures that have to add up

const ConductorFindings& find(const Findings& findings, const std::string& id) {
  std::vector<std::string> ids;
  for (const ConductorFindings& conductor : findings.conductors) {
    if (conductor.id == id) return conductor;
    ids.push_back(conductor.id);
  }
  const std::string near = netlists::nearest(id, ids);
  throw std::invalid_argument("the model has no conductor '" + id + "'" +
                              (near.empty() ? "; conductors are named CIRCUIT.wire or RUN.raceway"
                                            : "; the nearest is '" + near + "'"));
}

std::string verdict(const ConductorFindings& conductor, int width) {
  std::string out = paragraph("Condition  ",
                              condition_in_words(conductor) + ". As drawn; the drawing may be wrong.", width);
  if (conductor.isolated_supply)
    out +=
        paragraph("           ",
                  "It belongs to an isolated supply: no reading to ground settles it, and while one leg is "
                  "loaded to ground the other is at full voltage to ground.",
                  width);
  if (conductor.not_predicted)
    out += paragraph("           ",
                     "It shares a run with the output of a drive: not predicted, expect more than shown.",
                     width);
  out += paragraph(
      "Misleads   ",
      misleads_in_words(conductor) + (conductor.rank ? fmt::format(" (rank {})", *conductor.rank) : ""),
      width);
  if (conductor.probability) out += paragraph("           ", chance_in_words(conductor) + ".", width);
  return out;
}

/// The uncertain quantities that move its reading most.
std::string influences(const ConductorFindings& conductor, int width) {
  if (conductor.influences.empty()) return "";
  TextTable table({{"what is uncertain", std::max(24, width - 46)},
                   {"one standard deviation moves it by", 20, true},
                   {"share of variance", 10, true}});
  std::size_t shown = 0;
  for (const auto& one : conductor.influences)
    if (shown++ < k_influences_shown)
      table.add({printable(one.quantity),
                 (one.derivative < 0 ? "-" : "") + small_volts(std::abs(one.derivative)),
                 fmt::format("{:.1f} %", 100 * one.share)});
  return "\nWhat its reading hangs on\n" + table.indented(2);
}

std::string felt(const ConductorFindings& conductor, int width) {
  double most = 0.0;
  for (const PlaceFindings& place : conductor.places) most = std::max(most, place.short_circuit);
  if (summed_up(conductor) || most < k_felt) return "";
  return paragraph("", fmt::format("Whatever drives it, a current of {} can be felt.", amperes_text(most)),
                   width);
}

std::string settles(const ConductorFindings& conductor, int width) {
  return "\n" + paragraph("What settles it  ", settle_in_words(conductor), width, 2) + felt(conductor, width);
}

std::string thevenin(const PlaceFindings& place, int width) {
  TextTable table({{"what shows at " + printable(place.place) + ", to " + place.reference}, {""}});
  table.add({"open circuit", phasor_text(place.open_circuit, k_digits)});
  if (place.open_circuit_band)
    table.add({"in nine of ten draws", spread_text(place.open_circuit_band, volts_text)});
  table.add({"source impedance",
             ohms_text(std::abs(place.source_impedance), 3) + " at " + degrees_text(place.source_impedance)});
  table.add({"short-circuit current (computed)", amperes_text(place.short_circuit, 3)});
  return table.width() + 2 <= width
             ? table.indented(2)
             : paragraph(
                   "  ",
                   fmt::format("open circuit {}; source impedance {} at {}; short-circuit current "
                               "(computed) {}",
                               phasor_text(place.open_circuit, k_digits),
                               ohms_text(std::abs(place.source_impedance), 3),
                               degrees_text(place.source_impedance), amperes_text(place.short_circuit, 3)),
                   width);
}

/// One unit and one number of decimals for figures that are added up.
struct Scale {
  double unit = 1.0;  // V
  const char* name = "V";
  int decimals = 2;

  std::string text(double volts) const {
    if (!std::isfinite(volts)) return "unknown";
    const bool zero = std::abs(volts / unit) < 0.5 * std::pow(10.0, -decimals);
    return fmt::format("{:.{}f} {}", zero ? 0.0 : volts / unit, decimals, name);
  }
};

Scale scale_for(double most) {
  Scale scale;
  if (most < 0.01) scale = {1e-3, "mV", 2};
  if (most < 1e-5) scale = {1e-6, "uV", 2};
  if (most > 0 && std::isfinite(most))
    scale.decimals =
        std::clamp(k_digits - 1 - static_cast<int>(std::floor(std::log10(most / scale.unit))), 0, 6);
  return scale;
}

/// Who puts the voltage there: phasors, and the part of each in phase with the whole, which add up.
std::string contributions(const PlaceFindings& place, int width) {
  if (place.contributions.empty()) return "";
  TextTable table({{"from", std::max(12, width - 56)},
                   {"path", 10},
                   {"volts", 10, true},
                   {"angle", 10, true},
                   {"in phase with the sum", 13, true}});
  std::complex<double> sum;
  double most = 0.0;
  for (const auto& entry : place.contributions) {
    sum += entry.volts;
    most = std::max(most, std::abs(entry.volts));
  }
  const Scale scale = scale_for(most);
  const auto in_phase = [&sum](std::complex<double> v) {
    return sum == 0.0 ? 0.0 : (v * std::conj(sum)).real() / std::abs(sum);
  };
  const auto add = [&](const std::string& from, const std::string& path, std::complex<double> v) {
    table.add({printable(from), path, scale.text(std::abs(v)), degrees_text(v), scale.text(in_phase(v))});
  };
  for (const auto& entry : place.contributions) add(entry.from, entry.path, entry.volts);
  add("sum", "", sum);
  return "\n  Who puts it there\n" + table.indented(2);
}

std::string remarks(const PlaceFindings& place, int width) {
  std::string out;
  for (const std::string& remark : reading_remarks(place)) out += paragraph("  ", remark, width, 4);
  return out;
}

std::string readings(const PlaceFindings& place, int width) {
  TextTable table({{"instrument", 24},
                   {"to", std::max(12, width - 66)},
                   {"range", 8, true},
                   {"reads", 9, true},
                   {"appears", 10},
                   {"counted", 10}});
  for (const Reading& reading : place.readings)
    if (!reading.indicator)
      table.add({printable(reading.instrument), printable(reading.reference),
                 reading.range ? volts_text(*reading.range, 2) : "-", volts_text(reading.volts, 3),
                 netlists::to_string(reading.appearance), reading.judged ? "judged" : "shown only"});
  if (table.row_count() == 0) return "";
  return "\n  Readings, the loading of the instrument included\n" + table.indented(2) + remarks(place, width);
}

/// The same over the draws, where there are any.
std::string drawn_readings(const PlaceFindings& place, int width) {
  TextTable table({{"instrument", 24},
                   {"to", std::max(12, width - 66)},
                   {"p05", 9, true},
                   {"median", 9, true},
                   {"p95", 9, true}});
  for (const Reading& reading : place.readings)
    if (reading.band && !reading.indicator)
      table.add({printable(reading.instrument), printable(reading.reference), small_volts(reading.band->p05),
                 small_volts(reading.band->p50), small_volts(reading.band->p95)});
  if (table.row_count() == 0) return "";
  return "\n  The same over the draws\n" + table.indented(2);
}

std::string indicators(const PlaceFindings& place, int width) {
  TextTable table({{"indicator", 24}, {"to", std::max(12, width - 58)}, {"sees", 9, true}, {"", 20}});
  for (const Reading& reading : place.readings)
    if (reading.indicator)
      table.add({printable(reading.instrument), printable(reading.reference), volts_text(reading.volts, 3),
                 reading.indicates ? "responds" : "silent"});
  if (table.row_count() == 0) return "";
  return "\n  Indicators, which only light, buzz or glow; a silent one proves nothing\n" + table.indented(2);
}

bool alike(std::complex<double> a, std::complex<double> b) { return std::abs(a - b) <= 0.01 * std::abs(a); }

/// The curve, or the earlier place that it looks like.
std::string curve(const Findings& findings, const ConductorFindings& conductor, const PlaceFindings& place,
                  int width) {
  for (const PlaceFindings& earlier : conductor.places) {
    if (&earlier == &place) break;
    if (alike(earlier.open_circuit, place.open_circuit) &&
        alike(earlier.source_impedance, place.source_impedance))
      return "\n" +
             paragraph("  ",
                       "Reading against the instrument's resistance: as at " + printable(earlier.place) + ".",
                       width);
  }
  const std::string drawn =
      reading_curve(place.open_circuit, place.source_impedance, curve_marks(findings, place), width);
  return drawn.empty()
             ? ""
             : "\n  Reading to " + place.reference + " against the instrument's resistance\n" + drawn;
}

}  // namespace

std::string explanation(const Findings& findings, const std::string& id, int width, const std::string& date) {
  const ConductorFindings& conductor = find(findings, id);
  width = std::max(80, width);
  std::string out = paragraph("", printable(conductor.id), width) + sheet_head(findings, date, width) + "\n";
  out += verdict(conductor, width);
  out += settles(conductor, width) + influences(conductor, width);
  for (const PlaceFindings& place : conductor.places)
    out += "\n" + thevenin(place, width) + contributions(place, width) + readings(place, width) +
           drawn_readings(place, width) + indicators(place, width) +
           effects_text(findings, width, place.place, k_effects_shown) +
           curve(findings, conductor, place, width);
  if (conductor.places.empty()) out += "\nIt can be reached at no place of the model.\n";
  return out + sheet_foot(findings, width);
}

}  // namespace io
