#include "engine/round_region.h"

#include <algorithm>
#include <cmath>

namespace engine {
namespace {

using Complex = std::complex<double>;
using Eigen::MatrixXcd;

constexpr double k_smallest_order = 4.0;  // so that lower ones are left to compare with

std::vector<FacingWall> metal_walls(const Region& region) {
  if (region.boundary != Region::Boundary::metal_wall) return {};
  return {{region.radius, 1.0}};
}

}  // namespace

Complex rise_through(double metal_radius, const std::vector<Layer>& layers) {
  Complex rise = 0.0;
  double radius = metal_radius;
  for (const Layer& layer : layers) {
    rise += std::log(layer.outer_radius / radius) / complex_permittivity(layer.dielectric);
    radius = layer.outer_radius;
  }
  return rise;
}

Region RoundRegions::region_of(int enclosure) {
  const CrossSection& section = tree_.section();
  Region region;
  region.tolerance = section.tolerance;
  if (enclosure != k_surroundings) {
    const Shell& shell = tree_.shell(enclosure);
    region.boundary = Region::Boundary::metal_wall;
    region.radius = shell.inner_radius;
    region.medium = complex_permittivity(shell.filler);
    fill(region, enclosure, shell.centre, metal_walls(region));
    return region;
  }
  if (section.surroundings == Surroundings::metal_tube) {
    region.boundary = Region::Boundary::metal_wall;
    region.radius = section.tube_inner_radius;
  } else {
    region.boundary =
        section.surroundings == Surroundings::plane ? Region::Boundary::plane : Region::Boundary::open;
    region.radius = tree_.extent();
  }
  fill(region, k_surroundings, Eigen::Vector2d::Zero(), metal_walls(region));
  return region;
}

void RoundRegions::fill(Region& region, int parent, const Eigen::Vector2d& origin,
                        const std::vector<FacingWall>& walls) {
  const std::vector<int> members = tree_.children_of(parent);
  std::vector<FacingCircle> facing;
  for (int member : members) facing.push_back(face_of(member, origin, region.medium));
  int unknowns = 0;
  for (size_t i = 0; i < members.size(); ++i) {
    const bool over_plane = region.boundary == Region::Boundary::plane;
    const Orders orders = scaled(needed_order(facing, i, over_plane, walls, tree_.section().tolerance / 2.5));
    region.circles.push_back(response_of(members[i], region.medium, orders));
    region.circles.back().circle = {facing[i].centre, facing[i].radius, orders};
    if (orders.back() > largest_orders_.back()) largest_orders_ = orders;
    unknowns += 2 * orders.back();
  }
  largest_system_ = std::max(largest_system_, unknowns);
}

Orders RoundRegions::scaled(double order) const {
  const double full = std::clamp(std::ceil(order), k_smallest_order, 1.0 * k_largest_order) * scale_;
  Orders orders;
  for (size_t level = 0; level < k_levels; ++level)
    orders[level] = std::min(
        static_cast<int>(level + 1 < k_levels ? std::round(full * k_fractions[level]) : std::ceil(full)),
        k_largest_order);
  return orders;
}

FacingCircle RoundRegions::face_of(int member, const Eigen::Vector2d& origin, Complex medium) const {
  const Solid& circle = tree_.solid(member);
  const Eigen::Vector2d z = circle.centre - origin;
  return {{z.x(), z.y()}, circle.outer_radius, core_radius(member), surface_reflection(member, medium)};
}

double RoundRegions::core_radius(int member) const {
  const Solid& circle = tree_.solid(member);
  double radius = circle.metal_radius;
  if (circle.kind == Solid::Kind::body)
    for (int child : tree_.children_of(member))
      radius = std::max(radius, (tree_.solid(child).centre - circle.centre).norm() + core_radius(child));
  return radius;
}

double RoundRegions::surface_reflection(int member, Complex medium) const {
  const Solid& circle = tree_.solid(member);
  const auto against_medium = [&](const Dielectric& d) {
    const Complex e = complex_permittivity(d);
    return std::abs((e - medium) / (e + medium));
  };
  if (circle.kind == Solid::Kind::body) return against_medium(tree_.body(member).wall);
  const std::vector<Layer>& layers = tree_.layers_of(member);
  return layers.empty() ? 1.0 : against_medium(layers.back().dielectric);
}

CircleResponse RoundRegions::response_of(int member, Complex medium, const Orders& orders) {
  const Solid& circle = tree_.solid(member);
  if (circle.kind == Solid::Kind::body) return response_of_body(member, medium, orders);
  CircleResponse response;
  response.reflection = metal_reflection(circle.metal_radius, tree_.layers_of(member), medium, orders.back());
  response.conductors = {tree_.number_of(member)};
  response.potentials.fill(
      MatrixXcd::Constant(1, 1, rise_through(circle.metal_radius, tree_.layers_of(member))));
  return response;
}

CircleResponse RoundRegions::response_of_body(int member, Complex medium, const Orders& orders) {
  const Body& body = tree_.body(member);
  if (tree_.children_of(member).empty()) {
    CircleResponse response;
    response.reflection.resize(orders.back());
    for (int k = 1; k <= orders.back(); ++k)
      response.reflection(k - 1) = wall_response(body, medium, k).back_outside;
    return response;
  }
  Region inside{Region::Boundary::body_wall,
                body.inner_radius,
                complex_permittivity(body.filler),
                tree_.section().tolerance,
                {}};
  const Complex wall = complex_permittivity(body.wall);
  const std::vector<FacingWall> walls = {
      {body.inner_radius, std::abs(inner_surface_reflection(body, medium))},
      {body.outer_radius, std::abs((wall - medium) / (wall + medium))}};
  fill(inside, member, body.centre, walls);
  return body_response(body, inside, medium, orders, wall_order(body, inside));
}

// Harmonics of the wall's outer surface: until its echo has died away on its way through the wall and
// back, or until every harmonic of the circles is resolved.
int RoundRegions::wall_order(const Body& body, const Region& inside) const {
  double reach = 0.0, resolved = 0.0;
  for (const CircleResponse& response : inside.circles) {
    const HarmonicCircle& circle = response.circle;
    reach = std::max(reach, std::abs(circle.centre) + circle.radius);
    resolved = std::max(resolved, 10 + 1.5 * circle.order() * body.inner_radius / circle.radius);
  }
  const double echo = std::log(1000 / tree_.section().tolerance) / (2 * std::log(body.outer_radius / reach));
  return std::clamp(static_cast<int>(std::ceil(std::min(std::abs(echo) * scale_, resolved))), 1,
                    2 * k_largest_order);
}

}  // namespace engine
