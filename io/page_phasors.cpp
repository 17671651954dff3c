#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/page_figures.h"
#include "io/page_html.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::ContributionEntry;
using netlists::PlaceFindings;
using Point = std::complex<double>;

constexpr double k_wide = 220.0;  // drawing units
constexpr double k_high = 150.0;
constexpr double k_margin = 20.0;

/// From volts to the drawing, y downwards.
struct Fit {
  Point centre;
  double scale = 1.0;  // units a volt

  Point at(Point volts) const {
    const Point from_centre = (volts - centre) * scale;
    return {k_wide / 2 + from_centre.real(), k_high / 2 - from_centre.imag()};
  }
};

Fit fit(const std::vector<Point>& points) {
  double left = 0, right = 0, low = 0, high = 0;
  for (const Point& p : points) {
    left = std::min(left, p.real());
    right = std::max(right, p.real());
    low = std::min(low, p.imag());
    high = std::max(high, p.imag());
  }
  const double width = std::max(right - left, 1e-12), height = std::max(high - low, 1e-12);
  return {{(left + right) / 2, (low + high) / 2},
          std::min((k_wide - 2 * k_margin) / width, (k_high - 2 * k_margin) / height)};
}

std::string arrow(const Fit& fit, Point from, Point to, const std::string& kind) {
  const Point a = fit.at(from), b = fit.at(to);
  return fmt::format("<path class=\"v {}\" d=\"M{} {}L{} {}\" />", kind, px(a.real(), true),
                     px(a.imag(), true), px(b.real(), true), px(b.imag(), true));
}

/// The number of an arrow, beside its middle.
std::string label(const Fit& fit, Point from, Point to, const std::string& text) {
  const Point a = fit.at(from), b = fit.at(to);
  const double length = std::max(std::abs(b - a), 1e-9);
  const Point beside = (a + b) / 2.0 + (b - a) / length * Point(0, 1) * -9.0;
  return fmt::format("<text x={} y={}>{}</text>", px(beside.real()), px(beside.imag() + 4), text);
}

bool finite(const PlaceFindings& place) {
  return std::all_of(place.contributions.begin(), place.contributions.end(),
                     [](const ContributionEntry& one) { return std::isfinite(std::abs(one.volts)); });
}

}  // namespace

std::vector<const ContributionEntry*> numbered(const PlaceFindings& place, std::size_t most) {
  std::vector<const ContributionEntry*> out;
  double largest = 0.0;
  for (const auto& entry : place.contributions) largest = std::max(largest, std::abs(entry.volts));
  for (const auto& entry : place.contributions)
    if (std::abs(entry.volts) >= 0.01 * largest && largest > 0) out.push_back(&entry);
  std::stable_sort(out.begin(), out.end(), [](const ContributionEntry* a, const ContributionEntry* b) {
    if ((a->from == "others") != (b->from == "others")) return b->from == "others";
    return std::abs(a->volts) > std::abs(b->volts);
  });
  if (out.size() > most) out.resize(most);
  return out;
}

std::string phasor_figure(const PlaceFindings& place) {
  const auto entries = numbered(place);
  if (entries.empty() || !finite(place)) return "";
  Point sum = 0.0;
  for (const auto& entry : place.contributions) sum += entry.volts;
  std::vector<Point> points{0.0};
  for (const auto* entry : entries) points.push_back(points.back() + entry->volts);
  points.push_back(sum);
  const Fit drawn = fit(points);

  std::string body;
  const Point origin = drawn.at(0.0);
  body += fmt::format("<path class=ax d=\"M{0} {1}h10M{0} {1}h-10M{0} {1}v10M{0} {1}v-10\" />",
                      px(origin.real()), px(origin.imag()));
  body += arrow(drawn, 0.0, sum, "vs");
  for (std::size_t k = 0; k < entries.size(); ++k) {
    const char* kind = entries[k]->path == "magnetic" ? "vm" : entries[k]->path == "conductive" ? "vc" : "ve";
    body += arrow(drawn, points[k], points[k + 1], kind);
    // Numbers of arrows too short to tell apart would cover each other; the table has them.
    if (std::abs(entries[k]->volts) * drawn.scale > 9)
      body += label(drawn, points[k], points[k + 1], std::to_string(k + 1));
  }
  return fmt::format(
      "<figure><svg viewBox=\"0 0 {} {}\" role=img aria-label=\"Contributions laid tip to tail; they come to "
      "{}\">{}</svg><figcaption>Who puts it there: contributions laid tip to tail come to the heavy arrow, "
      "{}. "
      "Angles from the first supply's first line. Numbers as in the table.</figcaption></figure>\n",
      px(k_wide), px(k_high), phasor_text(sum), body, phasor_text(sum));
}

}  // namespace io
