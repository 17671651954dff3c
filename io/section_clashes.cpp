#include "io/section_clashes.h"

#include <fmt/format.h>

#include <string>

namespace io {
namespace {

using Kind = engine::Clash::Kind;

std::string with_surroundings(const engine::Clash& clash, bool plane) {
  if (clash.kind == Kind::metal_touches_inside)
    return fmt::format("its metal touches the {}; it must stand off it", plane ? "plane" : "enclosure");
  const std::string by = fmt::format("{:.4g} mm", clash.by * 1e3);
  return plane ? fmt::format("reaches {} under the plane; its lowest point is due at y = 0 or above", by)
               : fmt::format("sticks {} out of the enclosure; it must lie inside, and may touch it", by);
}

std::string with_another(const engine::Clash& clash, const std::string& other) {
  switch (clash.kind) {
    case Kind::overlap:
      return fmt::format("overlaps {} by {:.4g} mm; the two may touch", other, clash.by * 1e3);
    case Kind::crosses_wall:
      return fmt::format("crosses the inner wall of {} by {:.4g} mm; it may touch it", other, clash.by * 1e3);
    case Kind::metal_touches:
      return fmt::format("its metal touches that of {}; a gap or insulation is due between them", other);
    case Kind::metal_touches_inside:
      break;
  }
  return fmt::format("its metal touches the inside of {}; a gap or insulation is due between them", other);
}

}  // namespace

void report_clashes(YamlReader& reader, const engine::CrossSection& section,
                    const std::vector<SolidPlace>& places) {
  for (const engine::Clash& clash : engine::clashes(section, engine::solids_of(section))) {
    const SolidPlace& part = places[static_cast<std::size_t>(clash.part)];
    if (clash.other < 0) {
      const bool plane = section.surroundings == engine::Surroundings::plane;
      reader.error(*part.node, part.what, with_surroundings(clash, plane));
    } else {
      reader.error(*part.node, part.what,
                   with_another(clash, places[static_cast<std::size_t>(clash.other)].what));
    }
  }
}

}  // namespace io
