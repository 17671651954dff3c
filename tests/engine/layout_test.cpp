#include "engine/layout.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <map>
#include <numeric>
#include <stdexcept>
#include <string>

namespace engine {
namespace {

using Eigen::Vector2d;
using Radii = std::vector<double>;
using Centres = std::vector<Vector2d>;

constexpr double k_emt_3_4 = 10.465e-3;           // m, inside of trade size 3/4, NEC chapter 9 table 4
constexpr double k_emt_2 = 26.25e-3;              // m, of trade size 2
constexpr double k_thhn_12 = 1.651e-3;            // m, outer radius of THHN 12, NEC chapter 9 table 5
constexpr double k_thhn_10 = 2.083e-3;            // m, of THHN 10
constexpr double k_least_gap = 1e-6;              // m, the header's promise
constexpr double k_contact = k_least_gap + 1e-8;  // m, nearer than this is touching
const double k_repose = std::atan(0.5);           // rad, engine/README.md, "Layouts"

Radii equal_radii(int n, double tube_radius, double fill) {
  return Radii(n, tube_radius * std::sqrt(fill / n));
}

/// Sizes from 1 to `ratio`, scaled to the fill.
Radii mixed_radii(int n, double tube_radius, double fill, double ratio, std::mt19937_64& random) {
  Radii radii(n);
  double area = 0.0;
  for (double& r : radii) {
    r = 1.0 + (ratio - 1.0) * static_cast<double>(random() >> 11) * 0x1p-53;
    area += r * r;
  }
  for (double& r : radii) r *= tube_radius * std::sqrt(fill / area);
  return radii;
}

double wall_gap(const Vector2d& centre, double radius, double tube_radius) {
  return tube_radius - radius - centre.norm();
}

void expect_no_overlap(const Radii& radii, double tube_radius, const Centres& centres) {
  ASSERT_EQ(centres.size(), radii.size());
  for (std::size_t i = 0; i < radii.size(); ++i) {
    EXPECT_GE(wall_gap(centres[i], radii[i], tube_radius), k_least_gap) << "thing " << i;
    for (std::size_t j = 0; j < i; ++j) {
      EXPECT_GE((centres[i] - centres[j]).norm() - radii[i] - radii[j], k_least_gap) << i << " and " << j;
    }
  }
}

/// Unit vectors from the centre of thing i to all that it touches.
Centres contact_directions(const Radii& radii, double tube_radius, const Centres& centres, std::size_t i) {
  Centres directions;
  if (wall_gap(centres[i], radii[i], tube_radius) < k_contact) directions.push_back(centres[i].normalized());
  for (std::size_t j = 0; j < radii.size(); ++j) {
    const Vector2d across = centres[j] - centres[i];
    if (j != i && across.norm() - radii[i] - radii[j] < k_contact) directions.push_back(across.normalized());
  }
  return directions;
}

/// Two frictionless contacts can carry the weight: (0, -1) is a combination of both with no negative share.
bool carried_by(const Vector2d& a, const Vector2d& b) {
  const double d = a.x() * b.y() - a.y() * b.x();
  if (std::abs(d) < 1e-12) return false;
  return b.x() / d > -1e-6 && -a.x() / d > -1e-6;
}

bool rests(const Radii& radii, double tube_radius, const Centres& centres, std::size_t i) {
  const bool on_wall = wall_gap(centres[i], radii[i], tube_radius) < k_contact;
  const double slope = std::abs(std::atan2(centres[i].x(), -centres[i].y()));
  if (on_wall && slope < k_repose + 1e-6) return true;
  const Centres directions = contact_directions(radii, tube_radius, centres, i);
  for (std::size_t p = 0; p < directions.size(); ++p) {
    for (std::size_t q = 0; q < p; ++q) {
      if (carried_by(directions[p], directions[q])) return true;
    }
  }
  return false;
}

void expect_resting(const Radii& radii, double tube_radius, const Centres& centres) {
  for (std::size_t i = 0; i < radii.size(); ++i) {
    EXPECT_TRUE(rests(radii, tube_radius, centres, i))
        << "thing " << i << " of " << radii.size() << " floats";
  }
}

/// Mean and standard error of the mean, added to one value at a time.
struct Mean {
  double n = 0.0, sum = 0.0, squares = 0.0;
  void add(double x) { n += 1.0, sum += x, squares += x * x; }
  double mean() const { return sum / n; }
  double error() const { return std::sqrt((squares / n - mean() * mean()) / (n - 1.0)); }
};

void expect_same_mean(const Mean& a, const Mean& b, const std::string& what) {
  // Four standard errors: chance breaks one test in 16,000, and the seeds are fixed.
  EXPECT_NEAR(a.mean(), b.mean(), 4.0 * std::hypot(a.error(), b.error())) << what;
}

TEST(RestingLayout, NeverOverlapsAndAlwaysRests) {
  std::mt19937_64 random(1);
  for (int n = 1; n <= 60; ++n) {
    for (const double fill : {0.05, 0.2, 0.31, 0.4}) {
      SCOPED_TRACE(std::to_string(n) + " things, fill " + std::to_string(fill));
      const Radii radii = mixed_radii(n, k_emt_2, fill, 2.0, random);
      const Centres centres = resting_layout(radii, k_emt_2, random);
      expect_no_overlap(radii, k_emt_2, centres);
      expect_resting(radii, k_emt_2, centres);
    }
  }
}

// The NEC's largest fill of all, that of nipples; no packing of three equal circles passes 0.646, none of six
// 0.667 (Graham et al. 1998, Discrete Mathematics 181, from memory). One thing may fill what it likes.
TEST(RestingLayout, PacksEqualThingsToSixtyPercent) {
  std::mt19937_64 random(2);
  for (int n = 3; n <= 60; ++n) {
    SCOPED_TRACE(std::to_string(n) + " things");
    const Radii radii = equal_radii(n, k_emt_2, 0.60);
    const Centres centres = resting_layout(radii, k_emt_2, random);
    expect_no_overlap(radii, k_emt_2, centres);
    expect_resting(radii, k_emt_2, centres);
  }
  const Radii one{0.999 * k_emt_2};
  expect_no_overlap(one, k_emt_2, resting_layout(one, k_emt_2, random));
}

// The NEC allows two conductors 31 %; two of equal size cannot pass 50 %.
TEST(RestingLayout, WedgesAPairThatFillsTheBore) {
  std::mt19937_64 random(3);
  for (int trial = 0; trial < 100; ++trial) {
    const Radii radii{0.4999 * k_emt_3_4, 0.4999 * k_emt_3_4};
    const Centres centres = resting_layout(radii, k_emt_3_4, random);
    expect_no_overlap(radii, k_emt_3_4, centres);
    expect_resting(radii, k_emt_3_4, centres);
  }
}

/// Radius of the least circle that holds three discs, by Descartes' theorem on four kissing circles; where
/// the third hides in the gap beside the two larger ones, their two diameters decide.
double least_enclosure(Radii r) {
  std::sort(r.begin(), r.end(), std::greater<>());
  const double a = 1.0 / r[0], b = 1.0 / r[1], c = 1.0 / r[2];
  const double pair = r[0] + r[1];
  if (c >= a + b - 1.0 / pair) return pair;
  return 1.0 / (2.0 * std::sqrt(a * b + b * c + c * a) - a - b - c);
}

// Three things of any sizes go in if, and only if, the tube is larger than the least circle round them.
TEST(RestingLayout, PacksThreeExactlyWhereDescartesSaysTheyFit) {
  std::mt19937_64 random(16);
  int refused = 0;
  for (int trial = 0; trial < 300; ++trial) {
    const Radii radii = mixed_radii(3, k_emt_3_4, 0.5, 4.0, random);
    const double least = least_enclosure(radii);
    SCOPED_TRACE(trial);
    const double roomy = 1.01 * least + 4.0 * k_least_gap;
    const Centres centres = resting_layout(radii, roomy, random);
    expect_no_overlap(radii, roomy, centres);
    expect_resting(radii, roomy, centres);
    if (trial % 30 == 0) {
      EXPECT_THROW(resting_layout(radii, 0.999 * least, random), std::invalid_argument);
      ++refused;
    }
  }
  EXPECT_EQ(refused, 10);
}

TEST(RestingLayout, HoldsOneWireOnTheFloorWithinFriction) {
  std::mt19937_64 random(4);
  Mean slope;
  for (int trial = 0; trial < 2000; ++trial) {
    const Vector2d p = resting_layout(Radii{k_thhn_12}, k_emt_3_4, random).front();
    EXPECT_NEAR(p.norm(), k_emt_3_4 - k_thhn_12, k_contact);
    EXPECT_LT(std::abs(std::atan2(p.x(), -p.y())), k_repose + 1e-9);
    slope.add(p.x());
  }
  EXPECT_NEAR(slope.mean(), 0.0, 4.0 * slope.error());
}

TEST(RestingLayout, RepeatsFromTheSameState) {
  const Radii radii(9, k_thhn_12);
  std::mt19937_64 one(5), two(5), other(6);
  for (int draw = 0; draw < 5; ++draw) {
    const Centres a = resting_layout(radii, k_emt_3_4, one);
    EXPECT_EQ(a, resting_layout(radii, k_emt_3_4, two));
    EXPECT_NE(a, resting_layout(radii, k_emt_3_4, other));
  }
  EXPECT_EQ(one, two);
}

// One seed gives one layout with every compiler and standard library; recorded from this program, so it shows
// a change and no error.
TEST(RestingLayout, StaysAsRecorded) {
  std::mt19937_64 random(1);
  const Centres a = resting_layout(Radii{1.651e-3, 1.651e-3, 2.083e-3, 1.41e-3}, k_emt_3_4, random);
  const Centres expected{{-5.778834585670e-05, -5.552273322322e-03},
                         {-7.569299140351e-04, -8.780433274004e-03},
                         {2.866775529947e-03, -7.875451879029e-03},
                         {6.140229867264e-03, -6.653756463018e-03}};
  for (std::size_t i = 0; i < a.size(); ++i) EXPECT_LT((a[i] - expected[i]).norm(), 1e-12) << i;
  EXPECT_NEAR(row_layout(Radii{1.651e-3, 1.651e-3, 2.083e-3, 1.41e-3}, 1e-3, random)[2].x(), -6.212e-3,
              1e-12);
}

TEST(RestingLayout, HasNoLeftOrRight) {
  std::mt19937_64 random(7);
  const Radii radii{k_thhn_12, k_thhn_12, k_thhn_12, k_thhn_12, k_thhn_10, k_thhn_10};
  std::vector<Mean> x(radii.size()), skew(radii.size());
  for (int draw = 0; draw < 4000; ++draw) {
    const Centres centres = resting_layout(radii, k_emt_3_4, random);
    for (std::size_t i = 0; i < radii.size(); ++i) {
      const double u = centres[i].x() / k_emt_3_4;
      x[i].add(u);
      skew[i].add(u * u * u);
    }
  }
  for (std::size_t i = 0; i < radii.size(); ++i) {
    EXPECT_NEAR(x[i].mean(), 0.0, 4.0 * x[i].error()) << "thing " << i;
    EXPECT_NEAR(skew[i].mean(), 0.0, 4.0 * skew[i].error()) << "thing " << i;
  }
}

TEST(RestingLayout, TreatsEqualThingsAlike) {
  std::mt19937_64 random(8);
  const Radii radii(7, k_thhn_12);
  std::vector<Mean> height(radii.size());
  std::map<std::pair<std::size_t, std::size_t>, Mean> distance;
  for (int draw = 0; draw < 4000; ++draw) {
    const Centres centres = resting_layout(radii, k_emt_3_4, random);
    for (std::size_t i = 0; i < radii.size(); ++i) {
      height[i].add(centres[i].y());
      for (std::size_t j = 0; j < i; ++j) distance[{i, j}].add((centres[i] - centres[j]).norm());
    }
  }
  for (std::size_t i = 1; i < radii.size(); ++i) {
    expect_same_mean(height[i], height[0], "height of " + std::to_string(i));
  }
  for (const auto& [pair, mean] : distance) {
    expect_same_mean(mean, distance[{1, 0}],
                     "distance of " + std::to_string(pair.first) + " and " + std::to_string(pair.second));
  }
}

// What averages over a run stand on: the mean of ln(distance), which inductance goes by.
TEST(RestingLayout, TwoHalvesOfManyDrawsAgree) {
  std::mt19937_64 random(9);
  const Radii radii(5, k_thhn_12);
  std::array<Mean, 2> halves;
  for (int draw = 0; draw < 4000; ++draw) {
    const Centres centres = resting_layout(radii, k_emt_3_4, random);
    halves[draw / 2000].add(std::log((centres[0] - centres[1]).norm() / k_emt_3_4));
  }
  expect_same_mean(halves[0], halves[1], "ln(distance)");
  EXPECT_LT(halves[0].error(), 0.02);
}

// Every pair of a long run must lie side by side now and far apart then: an order that sticks, or a heap of
// one shape only, would show here.
TEST(RestingLayout, MixesTheNeighbours) {
  std::mt19937_64 random(10);
  const Radii radii(9, k_thhn_12);
  int touching = 0;
  int apart = 0;
  for (int draw = 0; draw < 1000; ++draw) {
    const Centres centres = resting_layout(radii, k_emt_3_4, random);
    const double gap = (centres[0] - centres[1]).norm() - 2.0 * k_thhn_12;
    touching += gap < k_contact;
    apart += gap > 2.0 * k_thhn_12;
  }
  // Nine equal circles at rest have 11 to 20 contacts among 36 pairs.
  EXPECT_GT(touching, 250);
  EXPECT_LT(touching, 600);
  EXPECT_GT(apart, 200);
}

std::string refusal(const Radii& radii, double tube_radius) {
  std::mt19937_64 random(11);
  try {
    resting_layout(radii, tube_radius, random);
  } catch (const std::invalid_argument& error) {
    return error.what();
  }
  return "not refused";
}

TEST(RestingLayout, RefusesWhatCannotGoIn) {
  using testing::HasSubstr;
  EXPECT_THAT(refusal(Radii(3, 4.7e-3), 10e-3), HasSubstr("3 round things"));  // 0.4641 R is the most
  EXPECT_THAT(refusal(Radii(3, 4.7e-3), 10e-3), HasSubstr("fill 66 %"));
  EXPECT_THAT(refusal(Radii(60, 1.2e-3), 10e-3), HasSubstr("fill 86 %"));
  EXPECT_THAT(refusal(Radii(9000, 1.2e-3), 10e-3), HasSubstr("9000 round things"));
  EXPECT_THAT(refusal({1e-3, 10e-3}, 10e-3), HasSubstr("thing 1 of radius 10.000000 mm does not go into"));
  EXPECT_THAT(refusal({1e-3, -1e-3}, 10e-3), HasSubstr("thing 1 has no radius"));
  EXPECT_THAT(refusal({std::nan(""), 1e-3}, 10e-3), HasSubstr("thing 0 has no radius"));
  EXPECT_THAT(refusal({1e-3}, std::nan("")), HasSubstr("does not go into"));
}

TEST(RestingLayout, LeavesAnEmptyTubeEmpty) {
  std::mt19937_64 random(12);
  EXPECT_TRUE(resting_layout(Radii{}, k_emt_3_4, random).empty());
}

TEST(RowLayout, LiesSideBySideAboutTheMiddle) {
  std::mt19937_64 random(13);
  const Radii radii{k_thhn_12, k_thhn_10, 0.5e-3, 3e-3};
  for (int draw = 0; draw < 50; ++draw) {
    const Centres centres = row_layout(radii, 2e-3, random);
    std::vector<std::size_t> order(radii.size());
    std::iota(order.begin(), order.end(), std::size_t{0});
    std::sort(order.begin(), order.end(), [&](auto a, auto b) { return centres[a].x() < centres[b].x(); });
    for (std::size_t k = 1; k < order.size(); ++k) {
      const std::size_t a = order[k - 1], b = order[k];
      EXPECT_NEAR(centres[b].x() - radii[b] - (centres[a].x() + radii[a]), 2e-3, 1e-15);
      EXPECT_EQ(centres[b].y(), 0.0);
    }
    const std::size_t first = order.front(), last = order.back();
    EXPECT_NEAR(centres[first].x() - radii[first], -(centres[last].x() + radii[last]), 1e-15);
  }
}

// Pearson's chi-square over the six orders of three things; 20.5 is its 99.9 % point for 5 degrees of
// freedom.
TEST(RowLayout, TakesEveryOrderEquallyOften) {
  std::mt19937_64 random(14);
  std::map<std::array<bool, 3>, int> count;
  for (int draw = 0; draw < 6000; ++draw) {
    const Centres c = row_layout(Radii(3, 1e-3), 1e-6, random);
    ++count[{c[0].x() < c[1].x(), c[1].x() < c[2].x(), c[0].x() < c[2].x()}];
  }
  ASSERT_EQ(count.size(), 6U);
  double chi_square = 0.0;
  for (const auto& [order, n] : count) chi_square += (n - 1000.0) * (n - 1000.0) / 1000.0;
  EXPECT_LT(chi_square, 20.5);
}

TEST(RowLayout, RefusesATooSmallGap) {
  std::mt19937_64 random(15);
  EXPECT_THROW(row_layout(Radii{1e-3}, 0.5e-6, random), std::invalid_argument);
  EXPECT_THROW(row_layout(Radii{0.0}, 1e-3, random), std::invalid_argument);
  EXPECT_TRUE(row_layout(Radii{}, 1e-3, random).empty());
}

}  // namespace
}  // namespace engine
