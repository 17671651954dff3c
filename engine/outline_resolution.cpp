#include "engine/outline_resolution.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <optional>

#include "engine/harmonic_orders.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Boundary = OutlineRegion::Boundary;

constexpr double k_unbounded = std::numeric_limits<double>::infinity();
constexpr int k_least_order = 4, k_most_order = 400;
constexpr int k_least_points = 4, k_most_points = 24;  // on a panel; powers of complex places allow no more
constexpr double k_parallel = 0.01;                    // rise over run of sides that count as parallel
constexpr double k_least_gap = 1e-6;                   // m: nearer outlines count as this near, at 1e-4

Eigen::Vector2d as_vector(Complex z) { return {z.real(), z.imag()}; }

/// Decimal digits that the tolerance asks for.
double digits(const OutlineRegion& region) { return std::max(1.0, -std::log10(region.tolerance)); }

// Where a straight side becomes an arc, the charge is less smooth by a trifle, 1e-7 of the capacitance
// with panels as long as the arc's radius.
double junction(const OutlineRegion& region) { return std::min(1.0, std::pow(region.tolerance / 1e-5, 0.3)); }

double reflection_of(const CoveredCircle& circle) {
  if (circle.layers.empty()) return 1.0;
  const Complex e = complex_permittivity(circle.layers.back().dielectric);
  return std::abs((e - circle.medium) / (e + circle.medium));
}

FacingCircle face_of(const CoveredCircle& circle) {
  return {
      {circle.centre.x(), circle.centre.y()}, circle.radius(), circle.metal_radius, reflection_of(circle)};
}

// An outline reflects like a flat mirror where it is nearest: the circle's image there, that much weaker.
FacingCircle mirrored(const FacingCircle& circle, const Surface& surface) {
  const double away = std::abs(signed_distance(surface.outline, as_vector(circle.centre)));
  const double contrast =
      surface.kind == Surface::Kind::dielectric
          ? std::abs((surface.inside - surface.outside) / (surface.inside + surface.outside))
          : 1.0;
  FacingCircle image = circle;
  image.centre += 2.0 * away;
  image.reflection *= contrast * contrast;
  if (surface.kind == Surface::Kind::dielectric) image.core_radius = 0.0;
  return image;
}

std::vector<double> needed_orders(const OutlineRegion& region) {
  std::vector<FacingCircle> circles;
  for (const CoveredCircle& circle : region.circles) circles.push_back(face_of(circle));
  std::vector<FacingWall> walls;
  if (region.boundary == Boundary::round_wall) walls.push_back({region.radius, 1.0});
  const bool plane = region.boundary == Boundary::plane;
  std::vector<double> orders;
  for (size_t i = 0; i < circles.size(); ++i) {
    const double tolerance = region.tolerance / 2.5;
    double order = needed_order(circles, i, plane, walls, tolerance);
    for (const Surface& surface : region.surfaces)
      order =
          std::max(order, needed_order({circles[i], mirrored(circles[i], surface)}, 0, false, {}, tolerance));
    orders.push_back(std::clamp(order, 1.0 * k_least_order, 1.0 * k_most_order));
  }
  return orders;
}

// The image of a circle in a circle of radius `wall` around the origin, if it is anywhere near.
std::optional<HarmonicCircle> inverted(const HarmonicCircle& circle, double wall) {
  const double from_origin = std::norm(circle.centre) - circle.radius * circle.radius;
  if (from_origin <= 0.0) return std::nullopt;
  const double stretch = wall * wall / from_origin;
  HarmonicCircle image = circle;
  image.centre *= stretch;
  image.radius *= stretch;
  return image;
}

// How large a panel may be for what lies near it.
class PanelRule {
 public:
  PanelRule(const OutlineRegion& region, std::vector<HarmonicCircle> circles, double finer)
      : region_(region),
        circles_(std::move(circles)),
        finer_(finer),
        least_gap_(k_least_gap * std::min(1.0, region.tolerance / 1e-4) / (finer * finer)) {
    const size_t own = circles_.size();
    for (size_t i = 0; i < own; ++i) {
      HarmonicCircle image = circles_[i];
      image.centre = std::conj(image.centre);
      if (region.boundary == Boundary::plane) circles_.push_back(image);
      if (region.boundary == Boundary::round_wall)
        if (const auto in_wall = inverted(circles_[i], region.radius)) circles_.push_back(*in_wall);
    }
  }

  double largest(const Panel& panel) const {
    const std::array<Complex, 5> places = {panel.begin, (panel.begin + panel.middle) / 2.0, panel.middle,
                                           (panel.middle + panel.end) / 2.0, panel.end};
    double least = k_unbounded;
    for (const Complex place : places) least = std::min(least, beside_circles(place));
    for (size_t k = 0; k < region_.surfaces.size(); ++k) {
      if (static_cast<int>(k) != panel.outline)
        least = std::min(least, beside(static_cast<int>(k), panel, places));
      if (region_.boundary == Boundary::plane || region_.boundary == Boundary::round_wall)
        least = std::min(least, beside(static_cast<int>(k), panel, reflected(places)));
    }
    return least / finer_;
  }

 private:
  using Places = std::array<Complex, 5>;

  // Fields of N harmonics change over 1/N of a radius, and not faster than over the distance.
  double beside_circles(Complex place) const {
    double least = k_unbounded;
    for (const HarmonicCircle& circle : circles_) {
      const double away = std::abs(std::abs(place - circle.centre) - circle.radius);
      least = std::min(least, std::max(3 * away, 8 * circle.radius / circle.order()));
    }
    return least;
  }

  Places reflected(Places places) const {
    const double r2 = region_.radius * region_.radius, nowhere = 1e3 * region_.radius;
    for (Complex& place : places)
      place = region_.boundary == Boundary::plane ? std::conj(place)
              : place == 0.0                      ? nowhere
                                                  : r2 / std::conj(place);
    return places;
  }

  // The charge between two outlines changes over the gap, or over the square root of gap times radius;
  // between parallel sides it does not, but for their ends.
  double beside(int other, const Panel& panel, const Places& places) const {
    const Outline& outline = region_.surfaces[static_cast<size_t>(other)].outline;
    const auto away = [&](Complex place) {
      return std::max(std::abs(signed_distance(outline, as_vector(place))), least_gap_);
    };
    double least = k_unbounded, most = 0.0;
    for (const Complex place : places) {
      least = std::min(least, away(place));
      most = std::max(most, away(place));
    }
    const double radius =
        std::min(size(outline), size(region_.surfaces[static_cast<size_t>(panel.outline)].outline));
    const double limit = 2 * std::max(least, std::sqrt(least * radius));
    const bool straight = std::abs(panel.middle - (panel.begin + panel.end) / 2.0) < 1e-9 * panel.length;
    if (!straight) return limit;
    const Complex before = 2.0 * places.front() - places.back(), after = 2.0 * places.back() - places.front();
    most = std::max({most, away(before), away(after)});
    return most - least < k_parallel * panel.length ? std::max(limit, 3 * panel.to_end) : limit;
  }

  static double size(const Outline& outline) {
    return outline.rounding > 0.0 ? outline.rounding : outline.core.half_size.minCoeff();
  }

  const OutlineRegion& region_;
  std::vector<HarmonicCircle> circles_;
  double finer_;      // than the rule
  double least_gap_;  // m
};

}  // namespace

OutlineResolution resolution_of(const OutlineRegion& region, double resolution) {
  OutlineResolution result;
  const std::vector<double> orders = needed_orders(region);
  int unknowns = 0;
  for (size_t i = 0; i < region.circles.size(); ++i) {
    const int order = std::min(static_cast<int>(std::ceil(orders[i] * resolution)), k_most_order);
    const Eigen::Vector2d& z = region.circles[i].centre;
    result.circles.push_back({{z.x(), z.y()}, region.circles[i].radius(), {order, order, order}});
    unknowns += 2 * order;
  }
  const double wanted = (4 + 1.2 * digits(region)) * resolution;
  const int points = std::clamp(static_cast<int>(std::round(wanted)), k_least_points, k_most_points);
  // Panels shrink with the resolution too, so that a solution at less shows what they leave out.
  const double finer = resolution * std::max(1.0, wanted / k_most_points);
  const PanelRule rule(region, result.circles, finer);
  std::vector<Outline> outlines;
  for (const Surface& surface : region.surfaces) outlines.push_back(surface.outline);
  result.outlines = panelled(outlines, points, junction(region) / finer, k_most_outline_unknowns - unknowns,
                             [&](const Panel& panel) { return rule.largest(panel); });
  return result;
}

}  // namespace engine
