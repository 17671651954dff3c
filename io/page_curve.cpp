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

/// A reading's percentiles at an instrument's resistance.
struct BandAt {
  double resistance = 0.0;  // ohm
  double low = 0.0;         // V
  double high = 0.0;        // V
};

/// Where draws say how far the curve may lie: at each instrument, and at the right end the open circuit.
/// Ascending; empty without draws.
std::vector<BandAt> bands(const Findings& findings, const PlaceFindings& place) {
  std::vector<BandAt> out;
  for (const CurveMark& mark : curve_marks(findings, place))
    for (const auto& reading : place.readings)
      if (reading.band && reading.instrument == mark.instrument && reading.reference == place.reference)
        out.push_back({mark.resistance, reading.band->p05, reading.band->p95});
  if (out.empty()) return {};
  std::sort(out.begin(), out.end(),
            [](const BandAt& a, const BandAt& b) { return a.resistance < b.resistance; });
  const auto& open = place.open_circuit_band;
  if (open) out.push_back({k_curve_last, open->p05, open->p95});
  return out;
}

/// Between the instruments the curve's own shape, scaled from one instrument's percentiles to the next's.
std::string band_area(const Findings& findings, const PlaceFindings& place, double full) {
  const std::vector<BandAt> known = bands(findings, place);
  if (known.empty()) return "";
  const auto of_curve = [&](double ohms) {
    return std::max(1e-12, std::abs(place.open_circuit * ohms / (ohms + place.source_impedance)));
  };
  std::vector<CurvePoint> low, high;
  for (const CurvePoint& point : curve_points(place.open_circuit, place.source_impedance, k_points)) {
    auto after = std::find_if(known.begin(), known.end(),
                              [&](const BandAt& at) { return at.resistance >= point.resistance; });
    if (after == known.end()) --after;
    const auto before = after == known.begin() || after->resistance < point.resistance ? after : after - 1;
    const double steps = std::log(after->resistance / before->resistance);
    const double share = steps > 0 ? std::log(point.resistance / before->resistance) / steps : 0.0;
    const auto scaled = [&](double BandAt::*edge) {
      const double a = (*before).*edge / of_curve(before->resistance);
      const double b = (*after).*edge / of_curve(after->resistance);
      return point.volts * (a + (b - a) * share);
    };
    low.push_back({point.resistance, scaled(&BandAt::low)});
    high.push_back({point.resistance, scaled(&BandAt::high)});
  }
  std::reverse(high.begin(), high.end());
  std::string back = line(high, full);
  back.front() = 'L';
  return fmt::format("<path class=band d=\"{}{}z\" />", line(low, full), back);
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
  if (place.open_circuit_band) most = std::max(most, place.open_circuit_band->p95);
  const double full = rounded_up(most);
  const std::string area = band_area(findings, place, full);
  std::string body = "<use href=#axr />" + scale(full) + area;
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
      "resistance\">{}"
      "</svg><figcaption>Reading to {} against the instrument's resistance. {}.{}</figcaption></figure>\n",
      body, html(place.reference), legend,
      area.empty() ? "" : " Grey: nine of ten draws, exact at the instruments.");
}

}  // namespace io
