#include "engine/outline.h"

#include <algorithm>
#include <cmath>
#include <limits>

namespace engine {
namespace {

using Eigen::Vector2d;

Vector2d turned(const Vector2d& v, double angle) {
  if (angle == 0.0) return v;  // keeps straight things exactly straight
  return {v.x() * std::cos(angle) - v.y() * std::sin(angle),
          v.x() * std::sin(angle) + v.y() * std::cos(angle)};
}

double to_core(const Outline& outline, const Vector2d& point) {
  return std::max(0.0, signed_distance({outline.centre, outline.core, 0.0}, point));
}

// The separating axis theorem on two rectangles.
bool cores_overlap(const Outline& a, const Outline& b) {
  const auto ca = a.corners(), cb = b.corners();
  for (const double turn : {a.core.turn, b.core.turn})
    for (const Vector2d& unit : {Vector2d(1.0, 0.0), Vector2d(0.0, 1.0)}) {
      const Vector2d axis = turned(unit, turn);
      const auto range = [&](const std::array<Vector2d, 4>& corners) {
        const auto [low, high] = std::minmax(
            {corners[0].dot(axis), corners[1].dot(axis), corners[2].dot(axis), corners[3].dot(axis)});
        return std::pair(low, high);
      };
      const auto [a_low, a_high] = range(ca);
      const auto [b_low, b_high] = range(cb);
      if (a_high < b_low || b_high < a_low) return false;
    }
  return true;
}

double between_cores(const Outline& a, const Outline& b) {
  if (cores_overlap(a, b)) return 0.0;
  double least = std::numeric_limits<double>::infinity();
  for (const Vector2d& corner : a.corners()) least = std::min(least, to_core(b, corner));
  for (const Vector2d& corner : b.corners()) least = std::min(least, to_core(a, corner));
  return least;
}

}  // namespace

std::array<Vector2d, 4> Outline::corners() const {
  const double w = core.half_size.x(), h = core.half_size.y();
  return {centre + turned({w, h}, core.turn), centre + turned({-w, h}, core.turn),
          centre + turned({-w, -h}, core.turn), centre + turned({w, -h}, core.turn)};
}

double signed_distance(const Outline& outline, const Vector2d& point) {
  const Vector2d local = turned(point - outline.centre, -outline.core.turn);
  const Vector2d beyond = local.cwiseAbs() - outline.core.half_size;
  return beyond.cwiseMax(0.0).norm() + std::min(beyond.maxCoeff(), 0.0) - outline.rounding;
}

double gap_between(const Outline& a, const Outline& b) {
  return between_cores(a, b) - a.rounding - b.rounding;
}

double room_inside(const Outline& holder, const Outline& held) {
  double farthest = -std::numeric_limits<double>::infinity();
  for (const Vector2d& corner : held.corners())
    farthest = std::max(farthest, signed_distance(holder, corner));
  return -(farthest + held.rounding);
}

std::array<Vector2d, 2> bounds(const Outline& outline) {
  const auto corners = outline.corners();
  Vector2d low = corners[0], high = corners[0];
  for (const Vector2d& corner : corners) {
    low = low.cwiseMin(corner);
    high = high.cwiseMax(corner);
  }
  return {low.array() - outline.rounding, high.array() + outline.rounding};
}

double lowest(const Outline& outline) { return bounds(outline)[0].y(); }

double farthest(const Outline& outline, const Vector2d& origin) {
  double most = 0.0;
  for (const Vector2d& corner : outline.corners()) most = std::max(most, (corner - origin).norm());
  return most + outline.rounding;
}

}  // namespace engine
