#include "engine/nesting.h"

#include <iomanip>
#include <sstream>
#include <stdexcept>
#include <string>

namespace engine {

std::string name_of(const Circle& circle) {
  const char* kind = circle.kind == Circle::Kind::conductor ? "conductor"
                     : circle.kind == Circle::Kind::body    ? "body"
                                                            : "shell";
  return std::string(kind) + " " + std::to_string(circle.index);
}

std::string in_mm(double length) {
  std::ostringstream text;
  text << std::setprecision(9) << length * 1e3 << " mm";
  return text.str();
}

namespace {

std::string pair_name(const Circle& a, const Circle& b) {
  if (a.kind != b.kind) return name_of(a) + " and " + name_of(b);
  const std::string plural = a.kind == Circle::Kind::body    ? "bodies"
                             : a.kind == Circle::Kind::shell ? "shells"
                                                             : "conductors";
  return plural + " " + std::to_string(a.index) + " and " + std::to_string(b.index);
}

std::vector<Circle> circles_of(const CrossSection& section) {
  std::vector<Circle> circles;
  const auto add = [&](Circle::Kind kind, size_t index, const Eigen::Vector2d& centre, double outer,
                       double metal, double inner) {
    circles.push_back({kind, static_cast<int>(index), centre, outer, metal, inner, -1});
  };
  for (size_t i = 0; i < section.conductors.size(); ++i) {
    const RoundConductor& c = section.conductors[i];
    add(Circle::Kind::conductor, i, c.centre, c.outer_radius(), c.radius, 0.0);
  }
  for (size_t i = 0; i < section.bodies.size(); ++i) {
    const RoundBody& b = section.bodies[i];
    add(Circle::Kind::body, i, b.centre, b.outer_radius, 0.0, b.inner_radius);
  }
  for (size_t i = 0; i < section.shells.size(); ++i) {
    const Shell& s = section.shells[i];
    add(Circle::Kind::shell, i, s.centre, s.covered_radius(), s.outer_radius, s.inner_radius);
  }
  return circles;
}

bool holds(const Circle& holder, const Circle& held) {
  return (holder.centre - held.centre).norm() + held.outer_radius <=
         holder.inner_radius + k_contact_tolerance;
}

[[noreturn]] void refuse_crossing(const Circle& a, const Circle& b, double apart) {
  const Circle& holder = a.inner_radius > b.inner_radius ? a : b;
  const Circle& held = &holder == &a ? b : a;
  if (apart < holder.inner_radius)
    throw std::invalid_argument(name_of(held) + " crosses the inner wall of " + name_of(holder) +
                                ": it reaches " + in_mm(apart + held.outer_radius) +
                                " from the centre, the inner radius is " + in_mm(holder.inner_radius));
  throw std::invalid_argument(pair_name(a, b) + " overlap: centres " + in_mm(apart) +
                              " apart, radii sum to " + in_mm(a.outer_radius + b.outer_radius));
}

void require_metal_apart(const Circle& a, const Circle& b, double apart) {
  if (a.metal_radius == 0.0 || b.metal_radius == 0.0) return;
  if (apart - a.metal_radius - b.metal_radius <= k_contact_tolerance)
    throw std::invalid_argument("the metal of " + pair_name(a, b) + " touches: centres " + in_mm(apart) +
                                " apart, metal radii sum to " + in_mm(a.metal_radius + b.metal_radius));
}

void require_metal_inside(const Circle& holder, const Circle& held, double apart) {
  if (holder.kind != Circle::Kind::shell || held.metal_radius == 0.0) return;
  if (holder.inner_radius - apart - held.metal_radius <= k_contact_tolerance)
    throw std::invalid_argument("the metal of " + name_of(held) + " touches the inside of " +
                                name_of(holder) + ": it reaches " + in_mm(apart + held.metal_radius) +
                                " from the centre, the inner radius is " + in_mm(holder.inner_radius));
}

void require_compatible(const Circle& a, const Circle& b) {
  const double apart = (a.centre - b.centre).norm();
  if (holds(a, b)) return require_metal_inside(a, b, apart);
  if (holds(b, a)) return require_metal_inside(b, a, apart);
  if (apart < a.outer_radius + b.outer_radius - k_contact_tolerance) refuse_crossing(a, b, apart);
  require_metal_apart(a, b, apart);
}

}  // namespace

std::vector<Circle> nested_circles(const CrossSection& section) {
  std::vector<Circle> circles = circles_of(section);
  const int count = static_cast<int>(circles.size());
  for (int i = 0; i < count; ++i)
    for (int j = 0; j < i; ++j) require_compatible(circles[j], circles[i]);
  for (Circle& held : circles)
    for (int j = 0; j < count; ++j)
      if (&circles[j] != &held && holds(circles[j], held) &&
          (held.parent < 0 || circles[j].inner_radius < circles[held.parent].inner_radius))
        held.parent = j;
  return circles;
}

}  // namespace engine
