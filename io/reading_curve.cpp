#include "io/reading_curve.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/text_layout.h"

namespace io {
namespace {

constexpr int k_rows = 9;
constexpr int k_label = 10;        // columns left of the axis
constexpr double k_decades = 6.0;  // from k_curve_first to k_curve_last

struct Canvas {
  int columns;
  double full;  // V, at the top
  std::vector<std::string> rows{};

  int row_of(double volts) const {
    const double share = std::clamp(volts / full, 0.0, 1.0);
    return static_cast<int>(std::lround((1.0 - share) * (k_rows - 1)));
  }
  int column_of(double ohms) const {
    const double share = std::clamp(std::log10(ohms / k_curve_first) / k_decades, 0.0, 1.0);
    return static_cast<int>(std::lround(share * (columns - 1)));
  }
  void put(int row, int column, char c) {
    rows[static_cast<std::size_t>(row)][static_cast<std::size_t>(column)] = c;
  }
};

/// Names under the axis, each beginning at its decade; the first and last by their ends.
std::string axis_names(int columns) {
  static const char* const names[] = {"100 ohm", "1 k", "10 k", "100 k", "1 M", "10 M", "100 Mohm"};
  std::string line(static_cast<std::size_t>(columns + k_label), ' ');
  for (int k = 0; k <= 6; ++k) {
    const std::string name = names[k];
    const int at = static_cast<int>(std::lround(k / k_decades * (columns - 1)));
    const int start = std::min(k_label + at, columns + k_label - static_cast<int>(name.size()));
    line.replace(static_cast<std::size_t>(start), name.size(), name);
  }
  return line + "\n";
}

std::string drawn(const Canvas& canvas) {
  std::string out;
  for (int r = 0; r < k_rows; ++r) {
    const bool labelled = r % 4 == 0;
    const double volts = canvas.full * (1.0 - r / double{k_rows - 1});
    const std::string line = canvas.rows[static_cast<std::size_t>(r)];
    out += fmt::format("{:>{}} |{}\n", labelled ? volts_text(volts) : "", k_label - 2,
                       line.substr(0, line.find_last_not_of(' ') + 1));
  }
  std::string axis(static_cast<std::size_t>(canvas.columns), '-');
  for (int k = 0; k <= 6; ++k)
    axis[static_cast<std::size_t>(std::lround(k / k_decades * (canvas.columns - 1)))] = '+';
  return out + std::string(k_label - 1, ' ') + "+" + axis + "\n" + axis_names(canvas.columns);
}

char letter(std::size_t k) { return static_cast<char>('a' + static_cast<int>(k % 26)); }

}  // namespace

std::vector<CurveMark> curve_marks(const netlists::Findings& findings, const netlists::PlaceFindings& place) {
  std::vector<CurveMark> marks;
  for (const netlists::Reading& reading : place.readings) {
    if (reading.indicator || reading.reference != place.reference) continue;
    for (const auto& instrument : findings.instruments) {
      if (instrument.name != reading.instrument) continue;
      double resistance = instrument.resistance;
      for (const auto& range : instrument.ranges)
        if (reading.range && range.full_scale == *reading.range) resistance = range.resistance;
      if (resistance > 0) marks.push_back({reading.instrument, resistance, reading.volts});
    }
  }
  return marks;
}

std::vector<CurvePoint> curve_points(std::complex<double> open_circuit, std::complex<double> source_impedance,
                                     int count) {
  const double volts = std::abs(open_circuit);
  if (!std::isfinite(volts) || volts == 0.0 || !std::isfinite(std::abs(source_impedance))) return {};
  std::vector<CurvePoint> points;
  for (int k = 0; k < count; ++k) {
    const double ohms = k_curve_first * std::pow(k_curve_last / k_curve_first, k / (count - 1.0));
    points.push_back({ohms, std::abs(open_circuit * ohms / (ohms + source_impedance))});
  }
  return points;
}

std::string reading_curve(std::complex<double> open_circuit, std::complex<double> source_impedance,
                          const std::vector<CurveMark>& marks, int width) {
  Canvas canvas{std::clamp(width - k_label, 37, 73), std::abs(open_circuit)};
  const std::vector<CurvePoint> points = curve_points(open_circuit, source_impedance, canvas.columns);
  if (points.empty()) return "";
  canvas.rows.assign(k_rows, std::string(static_cast<std::size_t>(canvas.columns), ' '));
  for (const CurvePoint& point : points)
    canvas.put(canvas.row_of(point.volts), canvas.column_of(point.resistance), '.');
  std::string legend;
  for (std::size_t k = 0; k < marks.size(); ++k) {
    if (std::isfinite(marks[k].volts))
      canvas.put(canvas.row_of(marks[k].volts), canvas.column_of(marks[k].resistance), letter(k));
    legend += fmt::format("{}{}: {}, {}, reads {}", k == 0 ? "" : "; ", letter(k), marks[k].instrument,
                          ohms_text(marks[k].resistance), volts_text(marks[k].volts));
  }
  return drawn(canvas) + (legend.empty() ? "" : paragraph(std::string(k_label, ' '), legend, width));
}

}  // namespace io
