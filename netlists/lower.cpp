#include "netlists/lower.h"

#include "netlists/lowering.h"
#include "netlists/stage.h"

namespace netlists {

Lowering::Lowering(const Building& building, const LowerOptions& options)
    : building_(building),
      wiring_(wiring(building)),
      sections_(building, wiring_, options.seed, options.sections),
      seed_(options.seed),
      assume_loads_(options.unlisted_loads) {}

Lowered Lowering::lower() {
  join_supplies();
  for (const Panel& panel : building_.panels) join_panel(panel);
  for (const PhysicalWire& wire : wiring_.wires) lay_wire(wire);
  for (const Circuit& circuit : building_.circuits) land(circuit);
  for (const Panel& panel : building_.panels) land_feeder(panel);
  lay_raceways();
  join_ground_wires();
  for (const Circuit& circuit : building_.circuits) set_switches(circuit);
  for (const Bond& bond : building_.bonds) add_bond(bond);
  for (const Leak& leak : building_.leaks) add_leak(leak);
  for (const Circuit& circuit : building_.circuits) add_loads(circuit);
  add_lines();
  add_supplies();
  finish();
  return std::move(out_);
}

Lowered lower(const Building& building, const std::string& stage, unsigned seed) {
  const Building staged = in_stage(building, stage);
  return lower_staged(staged, {seed, nullptr, false});
}

Lowered lower_staged(const Building& staged, const LowerOptions& options) {
  return Lowering(staged, options).lower();
}

}  // namespace netlists
