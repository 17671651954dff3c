#include "engine/harmonic_orders.h"

#include <algorithm>
#include <cmath>
#include <limits>

namespace engine {
namespace {

constexpr double k_unbounded = std::numeric_limits<double>::infinity();

// Bipolar coordinate of a circle of radius r whose limiting points x and r^2/x satisfy x + r^2/x = sum;
// zero where the circles touch. Multipoles about the centre converge like exp(-2 n mu).
double bipolar(double sum, double r) {
  if (sum <= 2 * r) return 0.0;
  return std::log((sum + std::sqrt(sum * sum - 4 * r * r)) / (2 * r));
}

double between_circles(double apart, double r, double other) {
  return bipolar((apart * apart + r * r - other * other) / apart, r);
}

double inside_wall(double offset, double r, double wall) {
  if (offset <= 1e-9 * wall) return k_unbounded;
  return bipolar((wall * wall - r * r - offset * offset) / offset, r);
}

double order_of_gap(double mu, double tolerance) {
  return mu > 0.0 ? std::log(1 / tolerance) / (2 * mu) : k_unbounded;
}

// In a contact the images lose `reflection` at each bounce: between equal circles the error falls like
// exp(-3.3 sqrt(n |ln reflection|)). What counts is the gap's curvature, 1 / r + 1 / other, against that
// of the circle itself; the other one is negative for a wall around it.
double order_of_bounces(double reflection, double r, double other, double tolerance) {
  const double root = std::log(1 / tolerance) / 3.3;
  if (reflection <= 0.0) return 0.0;
  return reflection < 1.0 ? root * root / -std::log(reflection) * (1 + r / other) / 2 : k_unbounded;
}

double order_between(const FacingCircle& self, const FacingCircle& other, double tolerance) {
  const double apart = std::abs(self.centre - other.centre);
  double cores = 0.0;
  if (self.core_radius > 0.0 && other.core_radius > 0.0)
    cores = order_of_gap(between_circles(apart, self.core_radius, other.core_radius), tolerance);
  const double surfaces = std::min(
      order_of_gap(between_circles(apart, self.radius, other.radius), tolerance),
      order_of_bounces(std::sqrt(self.reflection * other.reflection), self.radius, other.radius, tolerance));
  return std::max(cores, surfaces);
}

// A wall is half way to the image, so the circle's and the wall's reflection together stand for one
// bounce between circles that are alike.
double order_at_wall(const FacingCircle& self, const FacingWall& wall, double tolerance) {
  const auto order = [&](double r, double reflection) {
    return std::min(order_of_gap(inside_wall(std::abs(self.centre), r, wall.radius), tolerance),
                    2 * order_of_bounces(reflection * wall.reflection, r, -wall.radius, tolerance));
  };
  const double core = self.core_radius > 0.0 ? order(self.core_radius, 1.0) : 0.0;
  return std::max(core, order(self.radius, self.reflection));
}

}  // namespace

double needed_order(const std::vector<FacingCircle>& circles, size_t self, bool over_plane,
                    const std::vector<FacingWall>& walls, double tolerance) {
  double order = 0.0;
  for (size_t j = 0; j < circles.size(); ++j) {
    if (j != self) order = std::max(order, order_between(circles[self], circles[j], tolerance));
    if (!over_plane) continue;
    FacingCircle image = circles[j];
    image.centre = std::conj(image.centre);
    order = std::max(order, order_between(circles[self], image, tolerance));
  }
  for (const FacingWall& wall : walls) order = std::max(order, order_at_wall(circles[self], wall, tolerance));
  return order + 1;
}

}  // namespace engine
