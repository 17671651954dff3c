#include <algorithm>
#include <boost/random/uniform_real_distribution.hpp>
#include <cmath>
#include <optional>
#include <stdexcept>
#include <string>
#include <tuple>
#include <utility>

#include "engine/layout.h"

namespace engine {
namespace {

using Eigen::Vector2d;

constexpr double k_gap = 1e-6;        // m, between whatever touches
constexpr double k_rounding = 1e-12;  // m
constexpr int k_tries = 200;          // places to let one thing go from
constexpr int k_orders = 30;          // to let all of them go in
constexpr int k_moves = 1000;         // of one thing on its way down

struct Disc {
  Vector2d centre;
  double radius;
};

// One thing on its way down among those that rest; its centre moves on circles around theirs.
class Falling {
 public:
  Falling(const std::vector<Disc>& resting, const Vector2d& half_size, double radius)
      : resting_(resting),
        side_(half_size.x() - radius - k_gap),
        floor_(radius + k_gap - half_size.y()),
        radius_(radius) {}

  double side() const { return side_; }

  // Where it comes to rest after it was let go at x, far above all.
  std::optional<Vector2d> rest_from(double x) const {
    auto [at, on] = drop({x, 1e9});
    for (int move = 0; on >= 0 && move < k_moves; ++move) {
      const auto [next, onto, held] = roll(at, on);
      if (held) return next;
      std::tie(at, on) = std::pair(next, onto);
    }
    return on < 0 ? std::optional(at) : std::nullopt;
  }

 private:
  struct Roll {
    Vector2d at;
    int on;     // number of what it meets; -1: the floor
    bool held;  // it can move no farther
  };

  double reach(int k) const { return radius_ + resting_[static_cast<size_t>(k)].radius + k_gap; }
  const Vector2d& centre(int k) const { return resting_[static_cast<size_t>(k)].centre; }
  int count() const { return static_cast<int>(resting_.size()); }

  // Straight down from `at`: what is met first.
  std::pair<Vector2d, int> drop(const Vector2d& at) const {
    std::pair<Vector2d, int> found{{at.x(), floor_}, -1};
    for (int k = 0; k < count(); ++k) {
      const double across = at.x() - centre(k).x(), room = reach(k) * reach(k) - across * across;
      if (room <= 0.0) continue;
      const double y = centre(k).y() + std::sqrt(room);
      if (y <= at.y() + k_rounding && y > found.first.y()) found = {{at.x(), y}, k};
    }
    return found;
  }

  // Down the side of k until something is in the way, or past its widest place and on down.
  Roll roll(const Vector2d& at, int k) const {
    const double way = at.x() >= centre(k).x() ? 1.0 : -1.0, r = reach(k);
    Roll next{{centre(k).x() + way * r, centre(k).y()}, k, false};
    bool free = true;
    const auto meet = [&](const Vector2d& where, int what, bool held) {
      const bool ahead = (where.x() - at.x()) * way > k_rounding;
      if (!ahead || where.y() < next.at.y() || where.y() > at.y() + k_rounding) return;
      next = {where, what, held};
      free = false;
    };
    if (const double across = way * side_ - centre(k).x(); std::abs(across) < r)
      meet({way * side_, centre(k).y() + std::sqrt(r * r - across * across)}, k, true);
    if (const double up = floor_ - centre(k).y(); up >= 0.0 && up < r)
      meet({centre(k).x() + way * std::sqrt(r * r - up * up), floor_}, -1, true);
    for (int j = 0; j < count(); ++j)
      if (j != k) meet_between(k, j, meet);
    if (!free) return next;
    if (std::abs(at.x() - side_ * way) <= k_rounding) return {at, k, true};
    const auto [where, on] = drop(next.at);
    return {where, on, on < 0};
  }

  // The two places where both k and j are touched. Between them it is held; else it goes on down j.
  template <typename Meet>
  void meet_between(int k, int j, Meet meet) const {
    const Vector2d apart = centre(j) - centre(k);
    const double d = apart.norm(), along = (d * d + reach(k) * reach(k) - reach(j) * reach(j)) / (2 * d);
    const double up = reach(k) * reach(k) - along * along;
    if (up < 0.0) return;
    const Vector2d foot = centre(k) + along / d * apart,
                   side = std::sqrt(up) / d * Vector2d(-apart.y(), apart.x());
    for (const Vector2d& where : {Vector2d(foot + side), Vector2d(foot - side)})
      meet(where, j, (centre(k).x() - where.x()) * (centre(j).x() - where.x()) < 0.0);
  }

  const std::vector<Disc>& resting_;
  double side_, floor_;  // m, of the centre: farthest from the middle, and lowest
  double radius_;
};

bool fits(const std::vector<Disc>& resting, const Disc& disc, double half_height) {
  if (disc.centre.y() + disc.radius > half_height - k_gap) return false;
  return std::all_of(resting.begin(), resting.end(), [&](const Disc& other) {
    return (other.centre - disc.centre).norm() >= other.radius + disc.radius + k_gap - k_rounding;
  });
}

std::optional<Vector2d> place_for(const std::vector<Disc>& resting, const Vector2d& half_size, double radius,
                                  std::mt19937_64& random) {
  const Falling falling(resting, half_size, radius);
  if (falling.side() < 0.0) return std::nullopt;
  boost::random::uniform_real_distribution<double> somewhere(-falling.side(),
                                                             std::nextafter(falling.side(), 1e9));
  for (int i = 0; i < k_tries; ++i)
    if (const auto at = falling.rest_from(somewhere(random)))
      if (fits(resting, {*at, radius}, half_size.y())) return at;
  return std::nullopt;
}

std::vector<size_t> shuffled(size_t count, std::mt19937_64& random) {
  std::vector<size_t> order(count);
  for (size_t i = 0; i < count; ++i) order[i] = i;
  for (size_t i = count; i > 1; --i) {
    boost::random::uniform_real_distribution<double> below(0.0, static_cast<double>(i));
    std::swap(order[i - 1], order[std::min(i - 1, static_cast<size_t>(below(random)))]);
  }
  return order;
}

}  // namespace

std::vector<Vector2d> resting_layout(std::span<const double> radii, const Vector2d& half_size,
                                     std::mt19937_64& random) {
  for (int attempt = 0; attempt < k_orders; ++attempt) {
    std::vector<size_t> order = shuffled(radii.size(), random);
    if (attempt >= k_orders / 3)  // where chance does not make room for the large ones they go in first
      std::stable_sort(order.begin(), order.end(), [&](size_t a, size_t b) { return radii[a] > radii[b]; });
    std::vector<Disc> resting;
    std::vector<Vector2d> centres(radii.size());
    for (const size_t k : order) {
      const auto at = place_for(resting, half_size, radii[k], random);
      if (!at) break;
      resting.push_back({*at, radii[k]});
      centres[k] = *at;
    }
    if (resting.size() == radii.size()) return centres;
  }
  throw std::invalid_argument(std::to_string(radii.size()) + " things do not fit into a wireway of " +
                              std::to_string(2e3 * half_size.x()) + " mm x " +
                              std::to_string(2e3 * half_size.y()) + " mm");
}

}  // namespace engine
