#include "engine/outline.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>
#include <random>

namespace engine {
namespace {

Outline stadium(double x, double y, double half_span, double radius, double turn = 0.0) {
  return {{x, y}, {{half_span, 0.0}, turn}, radius};
}
Outline rectangle(double width, double height) {
  return {Eigen::Vector2d::Zero(), {{width / 2, height / 2}, 0.0}, 0.0};
}

TEST(Outline, DistancesToACircleAreThoseOfItsCentreLessTheRadius) {
  const Outline circle{{1.0, 2.0}, {}, 3.0};
  EXPECT_DOUBLE_EQ(signed_distance(circle, {1.0, 7.0}), 2.0);
  EXPECT_DOUBLE_EQ(signed_distance(circle, {1.0, 2.0}), -3.0);
  EXPECT_DOUBLE_EQ(lowest(circle), -1.0);
  EXPECT_DOUBLE_EQ(farthest(circle, {1.0, -2.0}), 7.0);
}

TEST(Outline, DistancesToAStadiumAndARectangleByHand) {
  const Outline flat = stadium(0, 0, 3, 1);
  EXPECT_DOUBLE_EQ(signed_distance(flat, {2, 5}), 4.0);
  EXPECT_DOUBLE_EQ(signed_distance(flat, {6, 4}), 4.0);  // 3-4-5 from the end of the line
  EXPECT_DOUBLE_EQ(signed_distance(flat, {2, 0.25}), -0.75);
  EXPECT_DOUBLE_EQ(signed_distance(rectangle(4, 2), {1.5, 0}), -0.5);
  EXPECT_DOUBLE_EQ(signed_distance(rectangle(4, 2), {5, 5}), 5.0);
}

TEST(Outline, GapsBetweenTurnedStadiumsByHand) {
  // One lies, one stands on its end a hand's breadth above; then crossed, which has no corner in another.
  const Outline lying = stadium(0, 0, 4, 1);
  EXPECT_NEAR(gap_between(lying, stadium(2, 6, 3, 0.5, std::numbers::pi / 2)), 6 - 3 - 1.5, 1e-15);
  EXPECT_NEAR(gap_between(lying, stadium(0, 0, 4, 1, std::numbers::pi / 2)), -2.0, 1e-15);
}

TEST(Outline, RoomInsideARectangleByHand) {
  EXPECT_NEAR(room_inside(rectangle(20, 10), stadium(-3, -2, 4, 1.5)), 1.5, 1e-15);
  EXPECT_NEAR(room_inside(rectangle(20, 10), stadium(-6, 0, 4, 1.5)), -1.5, 1e-15);
  EXPECT_NEAR(room_inside(stadium(0, 0, 5, 3), {{6, 0}, {}, 1}), 1.0, 1e-15);
}

// Against the least distance between many points of the two rims.
TEST(Outline, GapsAreTheLeastDistanceBetweenRims) {
  std::mt19937_64 random(7);
  std::uniform_real_distribution<double> uniform(0.0, 1.0);
  const auto rim = [](const Outline& o) {
    std::vector<Eigen::Vector2d> points;
    for (int k = 0; k < 400; ++k) {
      // From the core's rim outwards along the normal: a ray from far away, met by bisection.
      const double angle = 2 * std::numbers::pi * k / 400;
      const Eigen::Vector2d direction(std::cos(angle), std::sin(angle));
      double in = 0.0, out = 20.0;
      for (int i = 0; i < 60; ++i) {
        const double middle = (in + out) / 2;
        (signed_distance(o, o.centre + middle * direction) < 0 ? in : out) = middle;
      }
      points.push_back(o.centre + out * direction);
    }
    return points;
  };
  for (int n = 0; n < 20; ++n) {
    const Outline a{
        {0, 0}, {{2 * uniform(random), uniform(random)}, 3 * uniform(random)}, 0.2 + uniform(random)};
    const Outline b{{4 + 3 * uniform(random), 4 + 3 * uniform(random)},
                    {{2 * uniform(random), uniform(random)}, 3 * uniform(random)},
                    0.2 + uniform(random)};
    double least = 1e9;
    const auto rim_a = rim(a), rim_b = rim(b);
    for (const auto& p : rim_a)
      for (const auto& q : rim_b) least = std::min(least, (p - q).norm());
    ASSERT_GT(least, 0.0);
    EXPECT_NEAR(gap_between(a, b), least, 0.02) << n;
    EXPECT_LE(gap_between(a, b), least + 1e-12) << n;
  }
}

}  // namespace
}  // namespace engine
