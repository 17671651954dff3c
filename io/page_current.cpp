#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/page_figures.h"
#include "io/page_html.h"
#include "io/reading_curve.h"
#include "io/text_layout.h"

namespace io {
namespace {

constexpr double k_least = 1e-6;  // A, the left end
constexpr double k_decades = 8.0;
constexpr double k_left = 16.0;  // drawing units
constexpr double k_right = 264.0;

double x_of(double amperes) {
  if (!(amperes > 0)) return k_left;
  return k_left + (k_right - k_left) * std::clamp(std::log10(amperes / k_least) / k_decades, 0.0, 1.0);
}

/// Ticks at each decade of an axis at `y`, each with its name under it; names by decade.
std::string ticks(double left, double right, double y, const std::vector<std::string>& names) {
  const double step = (right - left) / static_cast<double>(names.size() - 1);
  std::string path = fmt::format("M{} {}H{}", px(left), px(y), px(right)), texts;
  for (std::size_t k = 0; k < names.size(); ++k) {
    const double x = left + step * static_cast<double>(k);
    path += fmt::format("M{} {}v4", px(x), px(y));
    if (!names[k].empty()) texts += fmt::format("<text x={} y={}>{}</text>", px(x), px(y + 14), names[k]);
  }
  return fmt::format("<path class=ax d=\"{}\" />{}", path, texts);
}

std::string bracket(double from, double to, const char* name) {
  return fmt::format("<path class=ax d=\"M{} 58v4H{}v-4\" /><text x={} y=72>{}</text>", px(x_of(from)),
                     px(x_of(to)), px((x_of(from) + x_of(to)) / 2), name);
}

}  // namespace

std::string current_figure(const netlists::Findings& findings, const netlists::PlaceFindings& place) {
  if (!std::isfinite(place.short_circuit)) return "";
  std::string body = "<use href=#axi />";
  std::string devices;
  for (const auto& effect : findings.effects) {
    if (effect.where != place.place || effect.unit != "A" || effect.what == "person_feels") continue;
    body += fmt::format("<path class=cl d=\"M{} 14v22\" />", px(x_of(effect.threshold)));
    devices += fmt::format("; {} from {}", html(effect.subject), amperes_text(effect.threshold));
  }
  const double x = x_of(place.short_circuit);
  body += fmt::format("<path class=cm d=\"M{0} 36l-5 -10h10z\" /><text x={1} y=20>{2}</text>", px(x),
                      px(std::clamp(x, 34.0, 246.0)), amperes_text(place.short_circuit));
  return fmt::format(
      "<figure><svg viewBox=\"0 0 280 78\" role=img aria-label=\"Current beside what people feel: "
      "{0}\">{1}</svg>"
      "<figcaption>Short-circuit current (computed), {0}, beside what a person feels (IEC 60479-1: from 0.5 "
      "mA; "
      "strong cramp from 5 mA; from 35 mA it may kill){2}.</figcaption></figure>\n",
      amperes_text(place.short_circuit, 3), body, devices);
}

std::string figure_symbols() {
  const std::string heads =
      "<marker id=ah viewBox=\"0 0 8 8\" refX=7 refY=4 markerWidth=7 markerHeight=7 "
      "markerUnits=userSpaceOnUse "
      "orient=auto><path class=ah d=\"M0 0L8 4L0 8z\" /></marker>";
  const std::string resistance = "<g id=axr>" +
                                 ticks(42, 262, 112, {"100 ohm", "", "10 k", "", "1 M", "", "100 M"}) +
                                 "<path class=ax d=\"M42 112V10m0 51h-4m4 -51h-4\" /><text x=152 "
                                 "y=142>resistance of the instrument</text></g>";
  const std::string current =
      "<g id=axi>" + ticks(k_left, k_right, 36, {"1 uA", "", "0.1 mA", "", "10 mA", "", "1 A", "", "100 A"}) +
      bracket(0.5e-3, 5e-3, "felt") + bracket(5e-3, 35e-3, "") + bracket(35e-3, 100.0, "may kill") + "</g>";
  return heads + "\n" + resistance + "\n" + current + "\n";
}

}  // namespace io
