#include "io/section_outlines.h"

#include <fmt/format.h>

namespace io {
namespace {

constexpr double k_touch = 1e-9;  // m: outlines this deep in each other still only touch

std::string mm(double metres) { return fmt::format("{:.4g} mm", metres * 1e3); }

/// True if b lies in the room of a.
bool holds(const Outline& a, const Outline& b, double apart) { return apart + b.outer <= a.inside + k_touch; }

void check_held(YamlReader& reader, const Outline& a, const Outline& b, double apart) {
  if (a.metal == 0.0 || b.metal == 0.0 || a.inside - apart - b.metal > k_touch) return;
  reader.error(
      *b.node, b.what,
      fmt::format("its metal touches the inside of {}: it reaches {} from the centre, the inner radius is {}",
                  a.what, mm(apart + b.metal), mm(a.inside)));
}

void check_pair(YamlReader& reader, const Outline& a, const Outline& b) {
  const double apart = (a.centre - b.centre).norm();
  if (holds(a, b, apart)) return check_held(reader, a, b, apart);
  if (holds(b, a, apart)) return check_held(reader, b, a, apart);
  const bool metal = a.metal > 0 && b.metal > 0 && apart <= a.metal + b.metal + k_touch;
  if (apart < a.outer + b.outer - k_touch)
    reader.error(*b.node, b.what,
                 fmt::format("overlaps {}: centres {} apart, radii sum to {}", a.what, mm(apart),
                             mm(a.outer + b.outer)));
  else if (metal)
    reader.error(*b.node, b.what,
                 fmt::format("its metal touches that of {}: centres {} apart, radii of metal sum to {}",
                             a.what, mm(apart), mm(a.metal + b.metal)));
}

void check_in_tube(YamlReader& reader, const Outline& a, double radius) {
  const double away = a.centre.norm();
  if (away + a.outer > radius + k_touch)
    reader.error(
        *a.node, a.what,
        fmt::format("lies outside the enclosure: it reaches {} from the centre, the inner radius is {}",
                    mm(away + a.outer), mm(radius)));
  else if (a.metal > 0 && radius - away - a.metal <= k_touch)
    reader.error(*a.node, a.what, "its metal touches the enclosure");
}

void check_over_plane(YamlReader& reader, const Outline& a) {
  if (a.centre.y() < a.outer - k_touch)
    reader.error(*a.node, a.what,
                 fmt::format("lies under the plane: its centre is {} above it, its radius {}",
                             mm(a.centre.y()), mm(a.outer)));
  else if (a.metal > 0 && a.centre.y() - a.metal <= k_touch)
    reader.error(*a.node, a.what, "its metal touches the plane");
}

}  // namespace

void check_outlines(YamlReader& reader, const std::vector<Outline>& outlines,
                    const engine::CrossSection& section) {
  for (std::size_t i = 0; i < outlines.size(); ++i) {
    if (section.surroundings == engine::Surroundings::metal_tube)
      check_in_tube(reader, outlines[i], section.tube_inner_radius);
    if (section.surroundings == engine::Surroundings::plane) check_over_plane(reader, outlines[i]);
    for (std::size_t j = 0; j < i; ++j) check_pair(reader, outlines[j], outlines[i]);
  }
}

}  // namespace io
