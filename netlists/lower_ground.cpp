// Ground as a node of each place: ground wires, boxes, raceways.
#include "netlists/lowering.h"

namespace netlists {

void Lowering::join_ground_wires() {
  for (const PhysicalWire& wire : wiring_.wires) {
    if (!wire.ground && !wire.armour) {
      if (wire.isolated_ground) land_isolated_ground(wire);
      continue;
    }
    for (const int run : wire.runs) {
      for (const std::string& place : {building_.runs[run].from.text, building_.runs[run].to.text}) {
        const std::string point = wire_point(wire, place, run);
        if (point != wire.id + "@" + place || landed_ground_.count(point)) continue;
        if (wire.armour && !metal_box(building_, place)) continue;
        joints_.join(joints_.point(point), joints_.point("ground@" + place));
      }
    }
  }
}

void Lowering::land_isolated_ground(const PhysicalWire& wire) {
  const std::string panel = wire.circuit >= 0 && building_.circuits[wire.circuit].panel
                                ? building_.circuits[wire.circuit].panel->text
                                : "";
  if (!panel.empty() && reaches(wire, panel)) {
    joints_.join(joints_.point(wire.id + "@" + panel), joints_.point(bar(panel, "ground")));
  }
}

bool Lowering::has_metal_raceway(const Run& run) const {
  const auto raceway = building_.catalogue.raceways.find(run.raceway.text);
  return raceway != building_.catalogue.raceways.end() && raceway->second.metal();
}

void Lowering::lay_raceways() {
  for (const Run& run : building_.runs) {
    if (!has_metal_raceway(run)) continue;
    const auto end = [&](const std::string& place, bool bonded) {
      const int point = joints_.point(raceway_id(run) + "@" + place);
      if (bonded && metal_box(building_, place)) joints_.join(point, joints_.point("ground@" + place));
    };
    end(run.from.text, run.bonded == Bonded::both || run.bonded == Bonded::from);
    end(run.to.text, run.bonded == Bonded::both || run.bonded == Bonded::to);
  }
}

}  // namespace netlists
