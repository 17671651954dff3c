#include "engine/nesting.h"

#include <algorithm>
#include <iomanip>
#include <optional>
#include <sstream>
#include <stdexcept>
#include <string>

namespace engine {

std::string name_of(const Solid& solid) {
  const char* kind = solid.kind == Solid::Kind::conductor ? "conductor"
                     : solid.kind == Solid::Kind::body    ? "body"
                                                          : "shell";
  return std::string(kind) + " " + std::to_string(solid.index);
}

std::string in_mm(double length) {
  std::ostringstream text;
  text << std::setprecision(9) << length * 1e3 << " mm";
  return text.str();
}

std::vector<Solid> solids_of(const CrossSection& section) {
  std::vector<Solid> solids;
  for (const RoundConductor& c : section.conductors)
    solids.push_back({Solid::Kind::conductor, static_cast<int>(&c - section.conductors.data()), c.centre,
                      Core{}, c.outer_radius(), c.radius});
  for (const Body& b : section.bodies)
    solids.push_back({Solid::Kind::body, static_cast<int>(&b - section.bodies.data()), b.centre, b.core,
                      b.outer_radius, 0.0, b.inner_radius});
  for (const Shell& s : section.shells)
    solids.push_back({Solid::Kind::shell, static_cast<int>(&s - section.shells.data()), s.centre, s.core,
                      s.covered_radius(), s.outer_radius, s.inner_radius});
  return solids;
}

Outline tube_outline(const CrossSection& section) {
  return {Eigen::Vector2d::Zero(), section.tube_core, section.tube_inner_radius};
}

namespace {

bool holds(const Solid& holder, const Solid& held) {
  return holder.is_hollow() && room_inside(holder.inner(), held.outer()) >= -k_contact_tolerance;
}

std::optional<Clash> clash_inside(const std::vector<Solid>& solids, int holder, int held) {
  const Solid& around = solids[static_cast<size_t>(holder)];
  const Solid& inside = solids[static_cast<size_t>(held)];
  if (!around.is_metal() || !inside.is_metal() ||
      room_inside(around.inner(), inside.metal()) > k_contact_tolerance)
    return std::nullopt;
  return Clash{Clash::Kind::metal_touches_inside, held, holder, 0.0};
}

std::optional<Clash> clash_between(const std::vector<Solid>& solids, int i, int j) {
  const Solid &a = solids[static_cast<size_t>(i)], &b = solids[static_cast<size_t>(j)];
  if (holds(a, b)) return clash_inside(solids, i, j);
  if (holds(b, a)) return clash_inside(solids, j, i);
  const double gap = gap_between(a.outer(), b.outer());
  if (gap >= -k_contact_tolerance) {
    if (a.is_metal() && b.is_metal() && gap_between(a.metal(), b.metal()) <= k_contact_tolerance)
      return Clash{Clash::Kind::metal_touches, j, i, 0.0};
    return std::nullopt;
  }
  // In the wall of one that could hold it, if its middle is within.
  for (const auto& [holder, held] : {std::pair(i, j), std::pair(j, i)}) {
    const Solid &around = solids[static_cast<size_t>(holder)], &inside = solids[static_cast<size_t>(held)];
    const bool larger = farthest(around.outer(), around.centre) >= farthest(inside.outer(), inside.centre);
    if (around.is_hollow() && larger && signed_distance(around.inner(), inside.centre) < 0.0)
      return Clash{Clash::Kind::crosses_wall, held, holder, -room_inside(around.inner(), inside.outer())};
  }
  return Clash{Clash::Kind::overlap, j, i, -gap};
}

std::optional<Clash> clash_with_surroundings(const CrossSection& section, const std::vector<Solid>& solids,
                                             int part) {
  const Solid& solid = solids[static_cast<size_t>(part)];
  const bool tube = section.surroundings == Surroundings::metal_tube;
  if (!tube && section.surroundings != Surroundings::plane) return std::nullopt;
  const auto room = [&](const Outline& o) {
    return tube ? room_inside(tube_outline(section), o) : lowest(o);
  };
  if (room(solid.outer()) < -k_contact_tolerance)
    return Clash{Clash::Kind::crosses_wall, part, -1, -room(solid.outer())};
  if (solid.is_metal() && room(solid.metal()) <= k_contact_tolerance)
    return Clash{Clash::Kind::metal_touches_inside, part, -1, 0.0};
  return std::nullopt;
}

std::string both(const Solid& a, const Solid& b) {
  if (a.kind != b.kind) return name_of(a) + " and " + name_of(b);
  const std::string plural = a.kind == Solid::Kind::body    ? "bodies"
                             : a.kind == Solid::Kind::shell ? "shells"
                                                            : "conductors";
  return plural + " " + std::to_string(a.index) + " and " + std::to_string(b.index);
}

std::string message(const CrossSection& section, const std::vector<Solid>& solids, const Clash& clash) {
  const Solid& part = solids[static_cast<size_t>(clash.part)];
  const std::string by = " by " + in_mm(clash.by);
  if (clash.other < 0) {
    const bool plane = section.surroundings == Surroundings::plane;
    if (clash.kind == Clash::Kind::crosses_wall)
      return name_of(part) + (plane ? " reaches under the plane" : " sticks out of the tube") + by;
    return "the metal of " + name_of(part) + " touches the " + (plane ? "plane" : "tube");
  }
  const Solid& other = solids[static_cast<size_t>(clash.other)];
  switch (clash.kind) {
    case Clash::Kind::overlap:
      return both(other, part) + " overlap" + by;
    case Clash::Kind::crosses_wall:
      return name_of(part) + " crosses the inner wall of " + name_of(other) + by;
    case Clash::Kind::metal_touches:
      return "the metal of " + both(other, part) + " touches";
    case Clash::Kind::metal_touches_inside:
      break;
  }
  return "the metal of " + name_of(part) + " touches the inside of " + name_of(other);
}

}  // namespace

std::vector<Clash> clashes(const CrossSection& section, const std::vector<Solid>& solids) {
  std::vector<Clash> found;
  for (int i = 0; i < static_cast<int>(solids.size()); ++i) {
    if (const auto clash = clash_with_surroundings(section, solids, i)) found.push_back(*clash);
    for (int j = 0; j < i; ++j)
      if (const auto clash = clash_between(solids, j, i)) found.push_back(*clash);
  }
  return found;
}

std::vector<Solid> nested_solids(const CrossSection& section) {
  std::vector<Solid> solids = solids_of(section);
  if (const auto found = clashes(section, solids); !found.empty())
    throw std::invalid_argument(message(section, solids, found.front()));
  for (Solid& held : solids)
    for (int j = 0; j < static_cast<int>(solids.size()); ++j) {
      const Solid& holder = solids[static_cast<size_t>(j)];
      if (&holder == &held || !holds(holder, held)) continue;
      // Of two that hold it the inner one is held by the other.
      if (held.parent < 0 || holds(solids[static_cast<size_t>(held.parent)], holder)) held.parent = j;
    }
  return solids;
}

}  // namespace engine
