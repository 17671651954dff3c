#include <fmt/format.h>

#include <cmath>
#include <numbers>
#include <optional>

#include "io/writers.h"

namespace io {
namespace {

using netlists::ConductorFindings;
using netlists::PlaceFindings;
using netlists::Reading;

/// A row of RFC 4180: fields with a comma, a quote or a line's end are quoted, quotes doubled.
class Row {
 public:
  Row& text(const std::string& field) {
    if (!first_) line_ += ',';
    first_ = false;
    if (field.find_first_of(",\"\r\n") == std::string::npos) {
      line_ += field;
      return *this;
    }
    line_ += '"';
    for (const char c : field) line_ += c == '"' ? std::string("\"\"") : std::string(1, c);
    line_ += '"';
    return *this;
  }

  /// The shortest text that reads back to the same double; empty where there is no finite number.
  Row& number(std::optional<double> value) {
    return text(value && std::isfinite(*value) ? fmt::format("{}", *value) : std::string());
  }

  Row& yes(bool value) { return text(value ? "yes" : "no"); }

  std::string end() const { return line_ + "\r\n"; }

 private:
  std::string line_;
  bool first_ = true;
};

double degrees(std::complex<double> phasor) { return std::arg(phasor) * 180 / std::numbers::pi; }

std::string header() {
  Row row;
  for (const char* name : {"conductor",
                           "rank",
                           "condition",
                           "misleads",
                           "place",
                           "instrument",
                           "reference",
                           "range_V",
                           "reading_V",
                           "appearance",
                           "judged",
                           "indicates",
                           "open_circuit_V",
                           "open_circuit_angle_deg",
                           "source_impedance_ohm",
                           "source_impedance_angle_deg",
                           "short_circuit_A",
                           "settled_by",
                           "treat_as_live_above_V",
                           "reading_p05_V",
                           "reading_p50_V",
                           "reading_p95_V",
                           "misleads_probability",
                           "caution"})
    row.text(name);
  return row.end();
}

/// What each row says of itself: it may be copied out of the sheet alone.
std::string caution_of(const ConductorFindings& conductor) {
  if (conductor.isolated_supply) return "live on an isolated supply: no reading to ground settles it";
  return "a prediction is not a test: treat as live until proved dead";
}

std::string reading_row(const ConductorFindings& conductor, const PlaceFindings& at, const Reading& reading) {
  const bool settles = conductor.settle.instrument.has_value();
  Row row;
  row.text(conductor.id).text(conductor.rank ? std::to_string(*conductor.rank) : "");
  row.text(to_string(conductor.condition)).text(to_string(conductor.misleads));
  row.text(at.place).text(reading.instrument).text(reading.reference);
  row.number(reading.range).number(reading.volts).text(to_string(reading.appearance)).yes(reading.judged);
  row.text(!reading.indicator ? "" : reading.indicates ? "yes" : "no");
  row.number(std::abs(at.open_circuit)).number(degrees(at.open_circuit));
  row.number(std::abs(at.source_impedance)).number(degrees(at.source_impedance)).number(at.short_circuit);
  row.text(conductor.settle.instrument.value_or(""));
  row.number(settles ? std::optional(conductor.settle.treat_as_live_above) : std::nullopt);
  using netlists::Band;
  for (const double Band::*percentile : {&Band::p05, &Band::p50, &Band::p95})
    row.number(reading.band ? std::optional((*reading.band).*percentile) : std::nullopt);
  row.number(conductor.probability);
  return row.text(caution_of(conductor)).end();
}

}  // namespace

std::string findings_csv(const netlists::Findings& findings) {
  std::string out = header();
  for (const ConductorFindings& conductor : findings.conductors) {
    for (const PlaceFindings& at : conductor.places) {
      for (const Reading& reading : at.readings) out += reading_row(conductor, at, reading);
    }
  }
  return out;
}

}  // namespace io
