#include "io/page_sections.h"

#include <fmt/format.h>

#include <algorithm>
#include <numbers>
#include <stdexcept>

#include "engine/outline.h"
#include "io/page_html.h"

namespace io {
namespace {
using engine::CrossSection;

constexpr double k_unit = 1e5;  // drawing units a metre: ten micrometres are one

/// The part of the plane to draw, in units, y downwards.
struct Frame {
  double left = 1e30, right = -1e30, top = 1e30, bottom = -1e30;

  void take(const engine::Outline& outline) {
    const auto [low, high] = engine::bounds(outline);
    left = std::min(left, low.x() * k_unit);
    right = std::max(right, high.x() * k_unit);
    top = std::min(top, -high.y() * k_unit);
    bottom = std::max(bottom, -low.y() * k_unit);
  }
};

Frame frame_of(const CrossSection& section) {
  Frame frame;
  for (const auto& conductor : section.conductors)
    frame.take({conductor.centre, {}, conductor.outer_radius()});
  for (const auto& body : section.bodies) frame.take(engine::outer_outline(body));
  for (const auto& shell : section.shells) frame.take(engine::covered_outline(shell));
  // The plane is drawn where it is near; a run far above it would be a speck.
  if (frame.bottom < 0 && -frame.bottom < 0.3 * (frame.bottom - frame.top)) frame.bottom = 0;
  const double margin = 0.05 * std::max(frame.right - frame.left, frame.bottom - frame.top);
  return {frame.left - margin, frame.right + margin, frame.top - margin, frame.bottom + margin};
}

std::string shape(const char* kind, const engine::Outline& o) {
  const std::string x = px(o.centre.x() * k_unit), y = px(-o.centre.y() * k_unit);
  if (o.is_circle())
    return fmt::format("<circle class={} cx={} cy={} r={} />", kind, x, y, px(o.rounding * k_unit));
  const Eigen::Vector2d half = (o.core.half_size.array() + o.rounding) * k_unit;
  return fmt::format(
      "<rect class={} x={} y={} width={} height={} rx={} transform=\"translate({} {}) rotate({:.3g})\" />",
      kind, px(-half.x()), px(-half.y()), px(2 * half.x()), px(2 * half.y()), px(o.rounding * k_unit), x, y,
      -o.core.turn * 180 / std::numbers::pi);
}

/// Discs of one size in one path: a stroke of no length with a round end is a disc.
void add_dot(std::map<std::string, std::string>& paths, const Eigen::Vector2d& centre, double radius) {
  paths[px(2 * radius * k_unit)] +=
      fmt::format("M{} {}h0", px(centre.x() * k_unit), px(-centre.y() * k_unit));
}

std::string dots(const char* kind, const std::map<std::string, std::string>& paths) {
  std::string out;
  for (const auto& [width, path] : paths)
    out += fmt::format("<path class={} stroke-width={} d=\"{}\" />", kind, width, path);
  return out;
}

std::string content(const CrossSection& section, const Frame& frame) {
  std::string out;
  if (section.surroundings == engine::Surroundings::plane && frame.bottom > 0)
    out += fmt::format("<path class=sp stroke-width={} d=\"M{} 0H{}\" />",
                       px((frame.bottom - frame.top) / 60), px(frame.left), px(frame.right));
  for (const auto& shell : section.shells) {
    if (!shell.layers.empty()) out += shape("sj", engine::covered_outline(shell));
    out += shape("sm", engine::metal_outline(shell)) + shape("sa", engine::inner_outline(shell));
  }
  for (const auto& body : section.bodies)
    out += shape("sj", engine::outer_outline(body)) +
           shape(body.filler.permittivity > 1.0 ? "sf" : "sa", engine::inner_outline(body));
  std::map<std::string, std::string> insulation, metal;
  for (const auto& conductor : section.conductors) {
    if (!conductor.layers.empty()) add_dot(insulation, conductor.centre, conductor.outer_radius());
    add_dot(metal, conductor.centre, conductor.radius);
  }
  return out + dots("si", insulation) + dots("sk", metal);
}

/// The name a section knows a conductor by: a piece of a cut wire is the wire there.
std::string wire_name(const std::string& conductor) { return conductor.substr(0, conductor.find('/')); }

struct Spot {
  Eigen::Vector2d centre = Eigen::Vector2d::Zero();  // m
  double radius = 0.0;                               // m
  bool shell = false;
};

/// Where a conductor lies in a section; radius 0 where it does not.
Spot spot_of(const netlists::RunSection& section, const std::string& conductor) {
  for (std::size_t k = 0; k < section.names.size(); ++k) {
    if (section.names[k] != wire_name(conductor)) continue;
    const auto& wires = section.section.conductors;
    if (k < wires.size()) return {wires[k].centre, wires[k].outer_radius(), false};
    const auto& shell = section.section.shells[k - wires.size()];
    return {shell.centre, shell.core.half_size.y() + shell.outer_radius, true};
  }
  return {};
}

/// Rings and numbers over the drawing.
std::string marks(const netlists::RunSection& section, const std::string& conductor,
                  const std::vector<std::string>& aggressors, double height) {
  const double letter = height / 12;
  const Spot own = spot_of(section, conductor);
  std::string out;
  if (own.radius > 0)
    out += fmt::format("<circle class=so stroke-width={} cx={} cy={} r={} />", px(letter / 5),
                       px(own.centre.x() * k_unit), px(-own.centre.y() * k_unit), px(own.radius * k_unit));
  for (std::size_t k = 0; k < aggressors.size(); ++k) {
    const Spot spot = spot_of(section, aggressors[k]);
    if (spot.radius <= 0) continue;
    const double up = spot.shell ? spot.radius * k_unit : 0.0;  // a tube is named at its top
    out +=
        fmt::format("<text class=sn font-size={} x={} y={}>{}</text>", px(letter),
                    px(spot.centre.x() * k_unit), px(-spot.centre.y() * k_unit - up + 0.36 * letter), k + 1);
  }
  return out;
}

std::string raceway_words(const netlists::Run& run) {
  return run.raceway.text.empty() || run.raceway.text == "none" ? "no raceway" : run.raceway.text;
}

}  // namespace

SectionGallery::SectionGallery(const netlists::Building& building, unsigned seed)
    : building_(building), wiring_(netlists::wiring(building)), library_(building, wiring_, seed) {}

const SectionGallery::Drawing& SectionGallery::drawing(std::size_t run) {
  const auto [slot, fresh] = drawings_.try_emplace(run);
  Drawing& drawn = slot->second;
  if (!fresh) return drawn;
  drawn.section = library_.section({{static_cast<int>(run)}, {}}, 0);
  if (drawn.section.names.empty()) return drawn;
  const Frame frame = frame_of(drawn.section.section);
  drawn.left = frame.left;
  drawn.top = frame.top;
  drawn.width = frame.right - frame.left;
  drawn.height = frame.bottom - frame.top;
  const std::string inner = content(drawn.section.section, frame);
  const auto [symbol, first] = symbols_.try_emplace(inner, fmt::format("s{}", symbols_.size()));
  if (first) size_ += inner.size();
  drawn.symbol = symbol->second;
  return drawn;
}

std::string SectionGallery::figure(const std::string& run, const std::string& conductor,
                                   const std::vector<std::string>& aggressors) {
  const auto& runs = building_.runs;
  const auto found =
      std::find_if(runs.begin(), runs.end(), [&](const netlists::Run& one) { return one.name.text == run; });
  if (found == runs.end()) return "";
  const Drawing& drawn = drawing(static_cast<std::size_t>(found - runs.begin()));
  if (drawn.symbol.empty()) return "";
  return fmt::format(
      "<figure class=\"sec{}\"><svg viewBox=\"{} {} {} {}\" role=img aria-label=\"Section of {}\"><use "
      "href=#{} "
      "/>{}"
      "</svg><figcaption><b>{}</b> {}, {:.3g}&nbsp;m</figcaption></figure>\n",
      drawn.width > 1.6 * drawn.height ? " flat" : "", px(drawn.left), px(drawn.top), px(drawn.width),
      px(drawn.height), html(run), drawn.symbol,
      marks(drawn.section, conductor, aggressors, std::max(drawn.height, 0.5 * drawn.width)), html(run),
      html(raceway_words(*found)), found->length);
}

std::string SectionGallery::symbols() const {
  std::string out;
  for (const auto& [inner, id] : symbols_) out += fmt::format("<g id={}>{}</g>\n", id, inner);
  return out;
}

}  // namespace io
