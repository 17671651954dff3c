#include "engine/equivalent_tube.h"

#include <boost/math/quadrature/gauss.hpp>
#include <cmath>
#include <numbers>

#include "engine/outline.h"
#include "engine/panels.h"

namespace engine {
namespace {

double area(const Outline& outline) {
  const double w = outline.core.half_size.x(), h = outline.core.half_size.y(), r = outline.rounding;
  return 4 * w * h + 4 * (w + h) * r + std::numbers::pi * r * r;
}

double geometric_mean_distance(const Outline& outline) {
  double length = 0.0, sum = 0.0;
  for (const Piece& piece : pieces_of(outline)) {
    length += piece.length();
    const auto logarithm = [&](double part) { return std::log(std::abs(piece.point(part))); };
    sum += piece.length() * boost::math::quadrature::gauss<double, 40>::integrate(logarithm, 0.0, 1.0);
  }
  return std::exp(sum / length);
}

}  // namespace

TubeWall equivalent_tube(const Core& core, double inner_radius, double outer_radius) {
  if (core.is_point()) return {inner_radius, outer_radius};
  const Outline inner{Eigen::Vector2d::Zero(), core, inner_radius}, outer{inner.centre, core, outer_radius};
  const double radius = geometric_mean_distance(inner);
  return {radius, std::sqrt(radius * radius + (area(outer) - area(inner)) / std::numbers::pi)};
}

}  // namespace engine
