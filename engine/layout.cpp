#include "engine/layout.h"

#include <algorithm>
#include <boost/random/uniform_int_distribution.hpp>
#include <cmath>
#include <numbers>
#include <numeric>
#include <optional>
#include <stdexcept>
#include <string>

namespace engine {
namespace {

using Eigen::Vector2d;

constexpr double k_least_gap = 1e-6;          // m, promised
constexpr double k_gap = k_least_gap + 1e-9;  // m, aimed at, so that rounding cannot break the promise
constexpr double k_tolerance = 1e-10;         // m, between "touches" and "does not"
const double k_repose = std::atan(0.5);       // rad, steepest wall that a jacket's friction holds
constexpr int k_entry_tries = 200;            // of one thing, before its places are enumerated

/// Uniform on [0, 1). The standard's own distribution differs from library to library.
double uniform(std::mt19937_64& random) { return static_cast<double>(random() >> 11) * 0x1p-53; }

std::vector<std::size_t> random_order(std::size_t n, std::mt19937_64& random) {
  std::vector<std::size_t> order(n);
  std::iota(order.begin(), order.end(), std::size_t{0});
  for (std::size_t i = n; i > 1; --i) {
    boost::random::uniform_int_distribution<std::size_t> below(0, i - 1);
    std::swap(order[i - 1], order[below(random)]);
  }
  return order;
}

/// A thing of radius r among others moves as its centre does among circles: it stays outside of a circle
/// around every other thing and inside one around the tube's axis.
struct Circle {
  Vector2d centre;
  double radius;
  bool wall;

  double angle_of(const Vector2d& p) const { return std::atan2(p.y() - centre.y(), p.x() - centre.x()); }
  Vector2d at(double angle) const { return centre + radius * Vector2d(std::cos(angle), std::sin(angle)); }
  /// How far p lies on the allowed side, m.
  double room(const Vector2d& p) const {
    const double outside = (p - centre).norm() - radius;
    return wall ? -outside : outside;
  }
  /// Points away from the obstacle.
  Vector2d normal(const Vector2d& p) const {
    const Vector2d out = (p - centre).normalized();
    return wall ? Vector2d(-out) : out;
  }
};

/// The two points common to both circles, if they meet.
std::optional<std::pair<Vector2d, Vector2d>> crossings(const Circle& a, const Circle& b) {
  const Vector2d across = b.centre - a.centre;
  const double d = across.norm();
  if (d == 0.0 || d > a.radius + b.radius || d < std::abs(a.radius - b.radius)) return std::nullopt;
  const double along = 0.5 * (d + (a.radius - b.radius) * (a.radius + b.radius) / d);
  const double square = (a.radius - along) * (a.radius + along);
  const double aside = square > 0.0 ? std::sqrt(square) : 0.0;
  const Vector2d u = across / d;
  const Vector2d middle = a.centre + along * u;
  const Vector2d offset = aside * Vector2d(-u.y(), u.x());
  return std::pair(Vector2d(middle + offset), Vector2d(middle - offset));
}

/// One thing on its way to rest.
class Descent {
 public:
  Descent(const std::vector<Circle>& circles, double friction_angle, const Vector2d& start)
      : circles_(circles), friction_angle_(friction_angle), p_(start) {}

  /// Falls and slides until it rests; nothing if it does not within so many moves, which rounding
  /// could cause, never physics: each move goes down.
  std::optional<Vector2d> rest() {
    for (std::size_t move = 0; move < 4 * circles_.size() + 16; ++move) {
      const std::vector<std::size_t> touching = contacts();
      if (held_by_wall(touching)) return p_;
      if (can_fall(touching)) {
        fall(touching);
      } else if (const auto way = slope(touching)) {
        slide(*way);
      } else {
        return p_;
      }
    }
    return std::nullopt;
  }

 private:
  struct Way {
    std::size_t circle;  // slid along
    double turn;         // +1 anticlockwise around its centre, -1 clockwise
  };

  std::vector<std::size_t> contacts() const {
    std::vector<std::size_t> touching;
    for (std::size_t i = 0; i < circles_.size(); ++i) {
      if (circles_[i].room(p_) < k_tolerance) touching.push_back(i);
    }
    return touching;
  }

  /// The floor of the tube is level enough under the thing for friction to hold it.
  bool held_by_wall(const std::vector<std::size_t>& touching) const {
    return std::any_of(touching.begin(), touching.end(), [&](std::size_t i) {
      return circles_[i].wall && std::abs(std::atan2(p_.x(), -p_.y())) <= friction_angle_ + 1e-9;
    });
  }

  /// A direction that leads into no obstacle that is touched.
  bool open(const Vector2d& direction, const std::vector<std::size_t>& touching, std::size_t except) const {
    return std::all_of(touching.begin(), touching.end(), [&](std::size_t i) {
      return i == except || direction.dot(circles_[i].normal(p_)) > -1e-9;
    });
  }

  bool can_fall(const std::vector<std::size_t>& touching) const {
    return open(-Vector2d::UnitY(), touching, circles_.size());
  }

  /// Straight down to the next obstacle.
  void fall(const std::vector<std::size_t>& touching) {
    double y = -std::numeric_limits<double>::infinity();
    for (std::size_t i = 0; i < circles_.size(); ++i) {
      const Circle& c = circles_[i];
      const bool left_behind = !c.wall && std::find(touching.begin(), touching.end(), i) != touching.end();
      const double dx = p_.x() - c.centre.x();
      if (left_behind || std::abs(dx) >= c.radius) continue;
      const double dy = std::sqrt((c.radius - dx) * (c.radius + dx));
      const double stop = c.wall ? c.centre.y() - dy : c.centre.y() + dy;
      if (c.wall || c.centre.y() < p_.y()) y = std::max(y, stop);
    }
    p_.y() = std::min(p_.y(), y);
  }

  /// The touched circle along which the thing slides down, the steepest if there are two.
  std::optional<Way> slope(const std::vector<std::size_t>& touching) const {
    std::optional<Way> best;
    double steepest = -1e-9;
    for (const std::size_t i : touching) {
      const double angle = circles_[i].angle_of(p_);
      const double turn = std::cos(angle) > 0.0 ? -1.0 : 1.0;  // downwards
      const Vector2d tangent = turn * Vector2d(-std::sin(angle), std::cos(angle));
      if (tangent.y() < steepest && open(tangent, touching, i)) {
        steepest = tangent.y();
        best = Way{i, turn};
      }
    }
    return best;
  }

  /// Along a circle down to what comes first: another obstacle; on a thing, its equator, beyond which one
  /// falls; on the wall, the place where friction holds.
  void slide(const Way& way) {
    const Circle& on = circles_[way.circle];
    const double start = on.angle_of(p_);
    const auto travel_to = [&](double angle) {
      const double turned = std::remainder(way.turn * (angle - start), 2.0 * std::numbers::pi);
      return turned < 0.0 ? turned + 2.0 * std::numbers::pi : turned;
    };
    const double down = -0.5 * std::numbers::pi;
    const double end =
        on.wall ? down - way.turn * friction_angle_ : (way.turn < 0.0 ? 0.0 : std::numbers::pi);
    double least = travel_to(end);
    Vector2d stop = on.at(end);
    for (std::size_t i = 0; i < circles_.size(); ++i) {
      if (i == way.circle) continue;
      const auto points = crossings(on, circles_[i]);
      if (!points) continue;
      for (const Vector2d& q : {points->first, points->second}) {
        const double travel = travel_to(on.angle_of(q));
        if (travel * on.radius > 2.0 * k_tolerance && travel < least) {
          least = travel;
          stop = q;
        }
      }
    }
    p_ = stop;
  }

  const std::vector<Circle>& circles_;
  double friction_angle_;
  Vector2d p_;
};

bool free_of(const std::vector<Circle>& circles, const Vector2d& p, double slack) {
  return std::all_of(circles.begin(), circles.end(), [&](const Circle& c) { return c.room(p) >= -slack; });
}

/// A free point to let the thing go from: uniform over all free points if they are not too rare, else one of
/// the corners between two obstacles, which exist wherever there is any room beside them.
std::optional<Vector2d> entry(const std::vector<Circle>& circles, std::mt19937_64& random) {
  const Circle& wall = circles.front();
  for (int i = 0; i < k_entry_tries; ++i) {
    const double distance = wall.radius * std::sqrt(uniform(random));
    const double angle = 2.0 * std::numbers::pi * uniform(random);
    const Vector2d p = distance * Vector2d(std::cos(angle), std::sin(angle));
    if (free_of(circles, p, 0.0)) return p;
  }
  std::vector<Vector2d> corners;
  for (std::size_t i = 0; i < circles.size(); ++i) {
    for (std::size_t j = 0; j < i; ++j) {
      const auto points = crossings(circles[i], circles[j]);
      if (!points) continue;
      for (const Vector2d& p : {points->first, points->second}) {
        if (free_of(circles, p, 0.1 * k_tolerance)) corners.push_back(p);
      }
    }
  }
  if (corners.empty()) return std::nullopt;
  boost::random::uniform_int_distribution<std::size_t> any(0, corners.size() - 1);
  return corners[any(random)];
}

/// Lets the things go one by one in the given order.
std::optional<std::vector<Vector2d>> settle(std::span<const double> radii, double tube_radius,
                                            const std::vector<std::size_t>& order, std::mt19937_64& random) {
  std::vector<Vector2d> centres(radii.size(), Vector2d::Zero());
  std::vector<std::size_t> placed;
  for (const std::size_t k : order) {
    std::vector<Circle> circles{{Vector2d::Zero(), tube_radius - radii[k] - k_gap, true}};
    for (const std::size_t i : placed) circles.push_back({centres[i], radii[i] + radii[k] + k_gap, false});
    const auto start = entry(circles, random);
    if (!start) return std::nullopt;
    const double friction_angle = k_repose * uniform(random);
    const auto end = Descent(circles, friction_angle, *start).rest();
    if (!end || !free_of(circles, *end, 0.5 * (k_gap - k_least_gap))) return std::nullopt;
    centres[k] = *end;
    placed.push_back(k);
  }
  return centres;
}

/// Tries to pack everything: many where each is quick and room is short, few where it takes long.
int orders_to_try(std::size_t things) {
  return std::max(12, 3000 / static_cast<int>(std::max<std::size_t>(things, 1)));
}

double fill(std::span<const double> radii, double tube_radius) {
  double area = 0.0;
  for (const double r : radii) area += r * r;
  return area / (tube_radius * tube_radius);
}

std::string millimetres(double metres) { return std::to_string(1e3 * metres) + " mm"; }

[[noreturn]] void refuse(std::span<const double> radii, double tube_radius) {
  throw std::invalid_argument("found no way to lay " + std::to_string(radii.size()) +
                              " round things in a tube of radius " + millimetres(tube_radius) +
                              ": they fill " + std::to_string(std::lround(100.0 * fill(radii, tube_radius))) +
                              " % of it");
}

void require_positive(std::span<const double> radii) {
  for (std::size_t i = 0; i < radii.size(); ++i) {
    if (!(radii[i] > 0.0 && std::isfinite(radii[i]))) {
      throw std::invalid_argument("thing " + std::to_string(i) + " has no radius: " + millimetres(radii[i]));
    }
  }
}

}  // namespace

std::vector<Eigen::Vector2d> resting_layout(std::span<const double> radii, double tube_radius,
                                            std::mt19937_64& random) {
  require_positive(radii);
  for (std::size_t i = 0; i < radii.size(); ++i) {
    if (!(radii[i] + k_gap < tube_radius)) {
      throw std::invalid_argument("thing " + std::to_string(i) + " of radius " + millimetres(radii[i]) +
                                  " does not go into a tube of radius " + millimetres(tube_radius));
    }
  }
  if (fill(radii, tube_radius) > 1.0) refuse(radii, tube_radius);
  const int orders = orders_to_try(radii.size());
  for (int attempt = 0; attempt < orders; ++attempt) {
    std::vector<std::size_t> order = random_order(radii.size(), random);
    // Where chance does not make room for the large ones they go in first.
    if (attempt >= orders / 3) {
      std::stable_sort(order.begin(), order.end(), [&](auto a, auto b) { return radii[a] > radii[b]; });
    }
    if (const auto centres = settle(radii, tube_radius, order, random)) return *centres;
  }
  refuse(radii, tube_radius);
}

std::vector<Eigen::Vector2d> row_layout(std::span<const double> radii, double gap, std::mt19937_64& random) {
  require_positive(radii);
  if (!(gap >= k_least_gap && std::isfinite(gap))) {
    throw std::invalid_argument("a row needs a gap of at least 0.001 mm, not " + millimetres(gap));
  }
  std::vector<Eigen::Vector2d> centres(radii.size(), Eigen::Vector2d::Zero());
  double x = 0.0;  // m, right edge so far
  for (const std::size_t k : random_order(radii.size(), random)) {
    centres[k].x() = x + gap + radii[k];
    x = centres[k].x() + radii[k];
  }
  for (auto& c : centres) c.x() -= 0.5 * (x + gap);
  return centres;
}

}  // namespace engine
