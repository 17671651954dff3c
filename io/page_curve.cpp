#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/page_figures.h"
#include "io/page_html.h"
#include "io/reading_curve.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::Findings;
using netlists::PlaceFindings;

constexpr int k_points = 49;
constexpr double k_left = 42.0;  // drawing units, of the axes
constexpr double k_right = 262.0;
constexpr double k_top = 10.0;
constexpr double k_bottom = 112.0;

double x_of(double ohms) {
  const double share = std::log(ohms / k_curve_first) / std::log(k_curve_last / k_curve_first);
  return k_left + (k_right - k_left) * std::clamp(share, 0.0, 1.0);
}

double y_of(double volts, double full) {
  return k_bottom - (k_bottom - k_top) * std::clamp(volts / full, 0.0, 1.0);
}

/// The next round figure: 1, 2, 3, 4, 5, 6 or 8 times a power of ten.
double rounded_up(double value) {
  const double power = std::pow(10.0, std::floor(std::log10(value)));
  for (const double step : {1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0})
    if (value <= step * power * (1 + 1e-9)) return step * power;
  return 10 * power;
}

std::string line(const std::vector<CurvePoint>& points, double full) {
  std::string path;
  for (const CurvePoint& point : points)
    path += fmt::format("{}{} {}", path.empty() ? "M" : "L", px(x_of(point.resistance)),
                        px(y_of(point.volts, full), true));
  return path;
}

std::string scale(double full) {
  std::string out;
  for (const double share : {0.0, 0.5, 1.0})
    out += fmt::format("<text class=e x={} y={}>{}</text>", px(k_left - 4), px(y_of(share * full, full) + 3),
                       share == 0.0 ? "0" : volts_text(share * full));
  return out;
}

char letter(std::size_t k) { return static_cast<char>('a' + static_cast<int>(k % 26)); }

}  // namespace

std::string curve_figure(const Findings& findings, const PlaceFindings& place,
                         const netlists::Settle* settle) {
  const auto points = curve_points(place.open_circuit, place.source_impedance, k_points);
  if (points.empty()) return "";
  const auto marks = curve_marks(findings, place);
  double most = std::abs(place.open_circuit);
  for (const CurveMark& mark : marks)
    if (std::isfinite(mark.volts)) most = std::max(most, mark.volts);
  const double full = rounded_up(most);
  std::string body = "<use href=#axr />" + scale(full);
  body += fmt::format("<path class=cv d=\"{}\" />", line(points, full));
  std::string legend;
  for (std::size_t k = 0; k < marks.size(); ++k) {
    if (!std::isfinite(marks[k].volts)) continue;
    const double x = x_of(marks[k].resistance), y = y_of(marks[k].volts, full);
    body += fmt::format("<circle class=cm cx={} cy={} r=3 /><text x={} y={}>{}</text>", px(x), px(y, true),
                        px(x), px(y < k_top + 14 ? y + 14 : y - 6), letter(k));
    legend +=
        fmt::format("{}<b>{}</b> {}, {}: {}", legend.empty() ? "" : "; ", letter(k),
                    html(marks[k].instrument), ohms_text(marks[k].resistance), volts_text(marks[k].volts));
    if (settle != nullptr && settle->instrument == marks[k].instrument)
      body += fmt::format("<path class=cl d=\"M{} {}h20\" />", px(x - 10),
                          px(y_of(settle->treat_as_live_above, full), true));
  }
  if (settle != nullptr && settle->instrument)
    legend += fmt::format("; bar: treat as live above {} on {}", limit_text(settle->treat_as_live_above),
                          html(*settle->instrument));
  return fmt::format(
      "<figure><svg viewBox=\"0 0 280 146\" role=img aria-label=\"Reading against the instrument's "
      "resistance\">{}</svg><figcaption>Reading to {} against the instrument's resistance. {}.</figcaption>"
      "</figure>\n",
      body, html(place.reference), legend);
}

}  // namespace io
