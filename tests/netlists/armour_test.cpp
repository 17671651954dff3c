// Armour of factory cables in the section of a run.
#include <gtest/gtest.h>

#include "netlists/lower.h"
#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

// Armour of interlocked strip conducts along its helix, not through a solid wall of its depth: 0.17 in of
// aluminium wall would have some 0.4 ohm/km where the strip has 31.
TEST(Armour, HasTheResistanceOfItsStrip) {
  const Building building = building_of(R"(
supplies: {T1: {system: 208Y/120}}
panels: {LP1: {supply: T1}}
runs: {C1: {from: LP1, to: Room 1, length: 10 m, raceway: none}}
circuits: {LP1-1: {panel: LP1, slot: 1, cable: MC 12-2, runs: [C1], loads: []}}
)");
  const auto section = run_section(building, "C1", 1).section;
  ASSERT_EQ(section.shells.size(), 1u);
  EXPECT_DOUBLE_EQ(section.shells[0].dc_resistance,
                   building.catalogue.cables.at("MC 12-2").armour->resistance);
  EXPECT_GT(section.shells[0].dc_resistance, 10e-3);  // ohm/m
}

}  // namespace
}  // namespace netlists
