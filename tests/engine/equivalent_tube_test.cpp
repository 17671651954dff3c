#include "engine/equivalent_tube.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "engine/impedance.h"
#include "tests/engine/sample_sections.h"

namespace engine {
namespace {

TEST(EquivalentTube, ARoundTubeIsItsOwn) {
  const TubeWall wall = equivalent_tube({}, 10e-3, 12e-3);
  EXPECT_EQ(wall.inner_radius, 10e-3);
  EXPECT_EQ(wall.outer_radius, 12e-3);
}

// The mean of ln(distance) from the middle to a side x = a, |y| < a of a square is, by parts,
// ln(a) + (ln 2)/2 - 1 + pi/4.
TEST(EquivalentTube, ASquareHasItsMeanDistanceAndItsMetal) {
  const double a = 50e-3, wall = 1.5e-3;
  const TubeWall tube = equivalent_tube({{a, a}, 0.0}, 0.0, wall);
  EXPECT_NEAR(std::log(tube.inner_radius), std::log(a) + std::log(2.0) / 2 - 1 + std::numbers::pi / 4, 1e-9);
  const double area =
      std::numbers::pi * (tube.outer_radius - tube.inner_radius) * (tube.outer_radius + tube.inner_radius);
  EXPECT_NEAR(area, 4 * 2 * a * wall + std::numbers::pi * wall * wall, 1e-12);
}

// A wireway carries back the current of a wire in its middle: at 1 Hz all metal carries alike.
TEST(SeriesImpedance, AWirewayReturnsCurrentByAllItsMetal) {
  CrossSection section;
  section.surroundings = Surroundings::metal_tube;
  section.tube_core.half_size = {50e-3, 50e-3};
  section.tube_outer_radius = 1.5e-3;
  section.tube_metal = {5.8e6, 1.0, 0.0};
  section.conductors = {wire(0, 0, 2e-3)};
  section.conductors[0].metal.temperature_coefficient = 0.0;
  ImpedanceConditions conditions;
  conditions.frequency = 1.0;
  const double copper = 1 / (58.0e6 * std::numbers::pi * 4e-6);
  const double steel = 1 / (5.8e6 * (8 * 50e-3 * 1.5e-3 + std::numbers::pi * 2.25e-6));
  EXPECT_NEAR(series_impedance(section, conditions)(0, 0).real(), copper + steel, 1e-3 * steel);
}

}  // namespace
}  // namespace engine
