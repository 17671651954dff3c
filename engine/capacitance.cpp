#include "engine/capacitance.h"

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <numbers>
#include <string>

#include "engine/constants.h"
#include "engine/field_region.h"
#include "engine/harmonic_orders.h"
#include "engine/nesting.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Eigen::MatrixXcd;
using Eigen::MatrixXd;

constexpr int k_largest_order = 400;      // beyond it powers of radii underflow
constexpr int k_largest_system = 4000;    // unknowns of a region: some seconds
constexpr double k_growth = 4.0 / 3.0;    // of all orders where the tolerance is not met
constexpr double k_smallest_order = 4.0;  // so that lower ones are left to compare with

// What the walls' echoes and the sum of the losses leave out, of the tolerance: the levels do not show it.
constexpr double k_left_out = 0.01;

// Fractions of the full order at which a section is solved too, for the estimate of the error.
constexpr std::array<double, k_levels> k_fractions = {0.6, 0.8, 1.0};

/// Solves a section at orders that are `scale` times what the geometry asks for.
class SectionSolver {
 public:
  explicit SectionSolver(const CrossSection& section)
      : section_(section), circles_(nested_circles(section)), children_(circles_.size() + 1) {
    for (size_t i = 0; i < circles_.size(); ++i)
      children_of(circles_[i].parent).push_back(static_cast<int>(i));
  }

  /// F/m, of all conductors: counted from the plane or the tube; in the open, of zero net charge.
  LevelMatrices capacitance(double scale) {
    scale_ = scale;
    largest_orders_ = {};
    largest_system_ = 0;
    const int n = section_.conductor_count();
    LevelMatrices total;
    total.fill(MatrixXcd::Zero(n, n));
    add(total, surrounding_region(), -1);
    for (size_t i = 0; i < circles_.size(); ++i)
      if (circles_[i].kind == Circle::Kind::shell)
        add(total, shell_region(static_cast<int>(i)), number_of(circles_[i]));
    return total;
  }

  const Orders& largest_orders() const { return largest_orders_; }
  int largest_system() const { return largest_system_; }

 private:
  std::vector<int>& children_of(int parent) { return children_[static_cast<size_t>(parent + 1)]; }

  int number_of(const Circle& circle) const {
    return circle.index +
           (circle.kind == Circle::Kind::shell ? static_cast<int>(section_.conductors.size()) : 0);
  }

  // A region's conductors among all; what they hold of charge is counted on the shell around them too.
  static void add(LevelMatrices& total, const Region& region, int shell) {
    std::vector<int> numbers;
    for (const CircleResponse& circle : region.circles)
      numbers.insert(numbers.end(), circle.conductors.begin(), circle.conductors.end());
    if (numbers.empty()) return;
    const LevelMatrices potentials = potential_coefficients(region);
    for (size_t level = 0; level < k_levels; ++level)
      add(total[level], potentials[level], numbers, region.boundary == Region::Boundary::open, shell);
  }

  static void add(MatrixXcd& total, const MatrixXcd& potentials, const std::vector<int>& numbers, bool open,
                  int shell) {
    MatrixXcd c = potentials.inverse() * (2 * std::numbers::pi * k_epsilon_0);
    if (open) {
      // No net charge: the generalised capacitance matrix after Clements, Paul and Adams.
      const Eigen::VectorXcd sums = c.rowwise().sum();
      c -= sums * sums.transpose() / sums.sum();
    }
    total(numbers, numbers) += c;
    if (shell < 0) return;
    const Eigen::VectorXcd sums = c.rowwise().sum();
    for (size_t i = 0; i < numbers.size(); ++i) {
      total(numbers[i], shell) -= sums(static_cast<Eigen::Index>(i));
      total(shell, numbers[i]) -= sums(static_cast<Eigen::Index>(i));
    }
    total(shell, shell) += sums.sum();
  }

  Region surrounding_region() {
    Region region;
    region.tolerance = section_.tolerance;
    if (section_.surroundings == Surroundings::metal_tube) {
      region.boundary = Region::Boundary::metal_wall;
      region.radius = section_.tube_inner_radius;
    } else {
      region.boundary =
          section_.surroundings == Surroundings::plane ? Region::Boundary::plane : Region::Boundary::open;
      region.radius = extent();
    }
    fill(region, -1, Eigen::Vector2d::Zero(), metal_walls(region));
    return region;
  }

  Region shell_region(int circle) {
    const Shell& shell = section_.shells[static_cast<size_t>(circles_[static_cast<size_t>(circle)].index)];
    Region region{Region::Boundary::metal_wall,
                  shell.inner_radius,
                  complex_permittivity(shell.filler),
                  section_.tolerance,
                  {}};
    fill(region, circle, shell.centre, metal_walls(region));
    return region;
  }

  static std::vector<FacingWall> metal_walls(const Region& region) {
    if (region.boundary != Region::Boundary::metal_wall) return {};
    return {{region.radius, 1.0}};
  }

  // A length well beyond the outermost circle, so that all potentials per charge are positive.
  double extent() const {
    double reach = 0.0;
    for (const Circle& circle : circles_)
      reach = std::max(reach, (circle.centre - circles_[0].centre).norm() + circle.outer_radius);
    return 10 * reach;
  }

  void fill(Region& region, int parent, const Eigen::Vector2d& origin, const std::vector<FacingWall>& walls) {
    const std::vector<int> members = children_of(parent);
    std::vector<FacingCircle> facing;
    for (int member : members) facing.push_back(face_of(member, origin, region.medium));
    int unknowns = 0;
    for (size_t i = 0; i < members.size(); ++i) {
      const bool over_plane = region.boundary == Region::Boundary::plane;
      const Orders orders = scaled(needed_order(facing, i, over_plane, walls, section_.tolerance / 2.5));
      region.circles.push_back(response_of(members[i], region.medium, orders));
      region.circles.back().circle = {facing[i].centre, facing[i].radius, orders};
      if (orders.back() > largest_orders_.back()) largest_orders_ = orders;
      unknowns += 2 * orders.back();
    }
    largest_system_ = std::max(largest_system_, unknowns);
  }

  Orders scaled(double order) const {
    const double full = std::clamp(std::ceil(order), k_smallest_order, 1.0 * k_largest_order) * scale_;
    Orders orders;
    for (size_t level = 0; level < k_levels; ++level)
      orders[level] = std::min(
          static_cast<int>(level + 1 < k_levels ? std::round(full * k_fractions[level]) : std::ceil(full)),
          k_largest_order);
    return orders;
  }

  FacingCircle face_of(int member, const Eigen::Vector2d& origin, Complex medium) {
    const Circle& circle = circles_[static_cast<size_t>(member)];
    const Eigen::Vector2d z = circle.centre - origin;
    return {{z.x(), z.y()}, circle.outer_radius, core_radius(member), surface_reflection(circle, medium)};
  }

  double core_radius(int member) {
    const Circle& circle = circles_[static_cast<size_t>(member)];
    double radius = circle.metal_radius;
    if (circle.kind == Circle::Kind::body)
      for (int child : children_of(member))
        radius = std::max(radius, (circles_[static_cast<size_t>(child)].centre - circle.centre).norm() +
                                      core_radius(child));
    return radius;
  }

  double surface_reflection(const Circle& circle, Complex medium) const {
    const auto against_medium = [&](const Dielectric& d) {
      const Complex e = complex_permittivity(d);
      return std::abs((e - medium) / (e + medium));
    };
    if (circle.kind == Circle::Kind::body)
      return against_medium(section_.bodies[static_cast<size_t>(circle.index)].wall);
    const std::vector<Layer>& layers = layers_of(circle);
    return layers.empty() ? 1.0 : against_medium(layers.back().dielectric);
  }

  const std::vector<Layer>& layers_of(const Circle& circle) const {
    return circle.kind == Circle::Kind::conductor
               ? section_.conductors[static_cast<size_t>(circle.index)].layers
               : section_.shells[static_cast<size_t>(circle.index)].layers;
  }

  CircleResponse response_of(int member, Complex medium, const Orders& orders) {
    const Circle& circle = circles_[static_cast<size_t>(member)];
    if (circle.kind == Circle::Kind::body) return response_of_body(member, medium, orders);
    CircleResponse response;
    response.reflection = metal_reflection(circle.metal_radius, layers_of(circle), medium, orders.back());
    response.conductors = {number_of(circle)};
    Complex rise = 0.0;  // of potential through the layers, per charge
    double radius = circle.metal_radius;
    for (const Layer& layer : layers_of(circle)) {
      rise += std::log(layer.outer_radius / radius) / complex_permittivity(layer.dielectric);
      radius = layer.outer_radius;
    }
    response.potentials.fill(MatrixXcd::Constant(1, 1, rise));
    return response;
  }

  CircleResponse response_of_body(int member, Complex medium, const Orders& orders) {
    const RoundBody& body = section_.bodies[static_cast<size_t>(circles_[static_cast<size_t>(member)].index)];
    if (children_of(member).empty()) {
      CircleResponse response;
      response.reflection.resize(orders.back());
      for (int k = 1; k <= orders.back(); ++k)
        response.reflection(k - 1) = wall_response(body, medium, k).back_outside;
      return response;
    }
    Region inside{Region::Boundary::body_wall,
                  body.inner_radius,
                  complex_permittivity(body.filler),
                  section_.tolerance,
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
  int wall_order(const RoundBody& body, const Region& inside) const {
    double reach = 0.0, resolved = 0.0;
    for (const CircleResponse& response : inside.circles) {
      const HarmonicCircle& circle = response.circle;
      reach = std::max(reach, std::abs(circle.centre) + circle.radius);
      resolved = std::max(resolved, 10 + 1.5 * circle.order() * body.inner_radius / circle.radius);
    }
    const double echo = std::log(1000 / section_.tolerance) / (2 * std::log(body.outer_radius / reach));
    return std::clamp(static_cast<int>(std::ceil(std::min(std::abs(echo) * scale_, resolved))), 1,
                      2 * k_largest_order);
  }

  const CrossSection& section_;
  std::vector<Circle> circles_;
  std::vector<std::vector<int>> children_;
  double scale_ = 1.0;
  Orders largest_orders_ = {};
  int largest_system_ = 0;
};

MatrixXcd without_reference(const CrossSection& section, const MatrixXcd& all) {
  if (section.surroundings != Surroundings::open) return all;
  std::vector<int> rows;
  for (int i = 0; i < section.conductor_count(); ++i)
    if (i != section.reference) rows.push_back(i);
  return all(rows, rows);
}

double relative_difference(const MatrixXcd& a, const MatrixXcd& b) {
  if (a.size() == 0) return 0.0;
  const Eigen::VectorXd size = a.real().diagonal().cwiseSqrt().cwiseInverse();
  return (size.asDiagonal() * (a - b).real() * size.asDiagonal()).cwiseAbs().maxCoeff();
}

// The error at full order, told from how far the two lower levels lie off. Model: error falls like
// exp(-c sqrt(order)), the slowest the laws allow; c follows from the two differences.
double extrapolated_error(const LevelMatrices& c, const Orders& orders) {
  constexpr double k_rounding = 1e-14, k_safety = 2.5;
  const double low = relative_difference(c[2], c[0]), high = relative_difference(c[2], c[1]);
  if (high <= k_rounding) return k_rounding;
  const double x = 1 - std::sqrt(1.0 * orders[1] / orders[2]), y = 1 - std::sqrt(1.0 * orders[0] / orders[2]);
  const auto ratio = [&](double rate) { return std::expm1(rate * x) / std::expm1(rate * y); };  // falls
  double least = 1.0, most = 60.0;
  if (high / low >= ratio(least)) return std::max(low, high);  // hardly converges
  for (int i = 0; i < 50; ++i) {
    const double middle = (least + most) / 2;
    (ratio(middle) > high / low ? least : most) = middle;
  }
  // Nor does it fall faster than if it had begun at 1.
  const double from_one = std::pow(high, 1 / (1 - x));
  return std::max({k_rounding, from_one, high / std::expm1(least * x)}) * k_safety;
}

struct Solved {
  MatrixXcd capacitance;  // F/m, without the reference
  int order = 0;
  double error = 0.0;
};

// Grows the orders until the error, told from lower orders, is within the tolerance, or the work gets
// out of hand; then the error says so.
Solved solve(const CrossSection& section) {
  SectionSolver solver(section);
  for (double scale = 1.0;; scale *= k_growth) {
    LevelMatrices c = solver.capacitance(scale);
    for (MatrixXcd& matrix : c) matrix = without_reference(section, matrix);
    const Orders& orders = solver.largest_orders();
    const double error = extrapolated_error(c, orders) + k_left_out * section.tolerance;
    const bool exhausted =
        k_growth * solver.largest_system() > k_largest_system || k_growth * orders.back() > k_largest_order;
    if (error <= section.tolerance || exhausted) return {c.back(), orders.back(), error};
  }
}

// The same metal without any insulation.
CrossSection bare(const CrossSection& section) {
  CrossSection result = section;
  result.bodies.clear();
  for (RoundConductor& conductor : result.conductors) conductor.layers.clear();
  for (Shell& shell : result.shells) {
    shell.layers.clear();
    shell.filler = {};
  }
  return result;
}

// The truth is symmetric, has no positive off-diagonal and no negative row sum; rounding and what the
// tolerance leaves may break that by as much as themselves. Take the mean of both halves, clip, and raise
// the diagonal until a row sums to no less than zero in whichever order it is added up.
MatrixXd in_maxwell_form(const MatrixXd& computed) {
  MatrixXd c = (computed + computed.transpose()) / 2;
  const double rounding = 2.0 * static_cast<double>(c.rows()) * std::numeric_limits<double>::epsilon();
  for (Eigen::Index i = 0; i < c.rows(); ++i) {
    double others = 0.0;
    for (Eigen::Index j = 0; j < c.cols(); ++j)
      if (i != j) others -= c(i, j) = std::min(c(i, j), 0.0);
    c(i, i) = std::max(c(i, i), others * (1 + rounding));
  }
  return c;
}

MatrixXd inverse(const MatrixXd& positive_definite) {
  const Eigen::Index n = positive_definite.rows();
  if (n == 0) return positive_definite;
  const MatrixXd result = positive_definite.llt().solve(MatrixXd::Identity(n, n));
  return (result + result.transpose()) / 2;
}

}  // namespace

FieldMatrices field_matrices(const CrossSection& section, Inductance inductance) {
  require_valid(section);
  const Solved solved = solve(section);
  FieldMatrices matrices;
  matrices.capacitance = in_maxwell_form(solved.capacitance.real());
  const MatrixXd loss = -solved.capacitance.imag();
  matrices.loss_capacitance = (loss + loss.transpose()) / 2;
  if (inductance == Inductance::with) {
    matrices.external_inductance = k_mu_0 * k_epsilon_0 * inverse(solve(bare(section)).capacitance.real());
  }
  matrices.order = solved.order;
  matrices.estimated_relative_error = solved.error;
  return matrices;
}

}  // namespace engine
