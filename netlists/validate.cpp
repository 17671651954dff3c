#include <algorithm>

#include "netlists/checks.h"
#include "netlists/lower.h"

namespace netlists {

std::vector<Fault> validate(const Building& building) {
  Checks checks(building);
  if (building.circuits.empty() && checks.wiring.wires.empty())
    checks.error({building.file, 0, 0}, "the model has no conductors: it names no circuits");
  if (building.supplies.empty())
    checks.warn({building.file, 0, 0}, "the model has no supplies: nothing in it is live");
  check_names(checks);
  check_stages(checks);
  check_panels(checks);
  check_trees(checks);
  check_fill(checks);
  sort_by_place(checks.faults);
  return std::move(checks.faults);
}

}  // namespace netlists
