// The lowering of one building, part by part: netlists/lower.cpp says in which order.
#pragma once

#include <map>
#include <optional>
#include <set>
#include <string>
#include <utility>
#include <vector>

#include "netlists/joints.h"
#include "netlists/loads.h"
#include "netlists/lower.h"
#include "netlists/plan.h"
#include "netlists/sections.h"
#include "netlists/wiring.h"

namespace netlists {

/// A run, or a part of it, that shares a section from one pair of ends to the other.
struct Piece {
  Stretch stretch;
  double length = 0.0;            // m
  std::vector<std::string> from;  // by run of the stretch: the suffix of its conductors' points there
  std::vector<std::string> to;
};

/// Grows the network of one building and says it once. Its parts are in lower_*.cpp.
class Lowering {
 public:
  Lowering(const Building& building, const LowerOptions& options);

  Lowered lower();

 private:
  using Complex = engine::Complex;

  // ---- points
  std::string bar(const std::string& panel, const std::string& what) const;
  // A wire's point at an end of one of its runs: apart from the rest of the wire if it is cut there.
  std::string wire_point(const PhysicalWire& wire, const std::string& place, int run) const;
  // The point that a name means at a place, seen from a circuit.
  int point_of(const std::string& circuit, const std::string& name, const std::string& place);

  // ---- supplies and panels
  static std::string terminal(const Supply& supply, const std::string& pole);
  // The point all lines of a supply are wound from: its neutral, or the middle of its windings.
  static std::string star(const Supply& supply, const SystemType& system);
  std::vector<std::string> poles(const SystemType& system) const;
  void join_supplies();
  void join_panel(const Panel& panel);

  // ---- wires
  void lay_wire(const PhysicalWire& wire);
  bool reaches(const PhysicalWire& wire, const std::string& place) const;
  bool breaker_on(const Circuit& circuit, std::size_t pole) const;
  void land(const Circuit& circuit);
  void land_wire(const Circuit& circuit, const SystemType& system, const std::string& panel,
                 const PhysicalWire& wire, const std::string& where);
  void tell_breaker(const Circuit& circuit, const SystemType& system);
  // A feeder's lines land in order on the lines of both panels, through its breaker at the first.
  void land_feeder(const Panel& panel);

  // ---- ground as a node of each place
  void join_ground_wires();
  void land_isolated_ground(const PhysicalWire& wire);
  bool has_metal_raceway(const Run& run) const;
  void lay_raceways();

  // ---- switches, bonds, leaks, loads
  void set_switches(const Circuit& circuit);
  void add_bond(const Bond& bond);
  void add_leak(const Leak& leak);
  void add_loads(const Circuit& circuit);
  void add_unlisted_load(const Circuit& circuit);
  void mark_drive(const Circuit& circuit, const Load& load);
  void add_element(const std::string& name, int a, int b, Complex admittance);

  // ---- lines
  void add_lines();
  void add_joint(const Alongside& group, std::vector<double>& taken, std::vector<std::string>& begin);
  std::string shared_place(const std::vector<int>& runs) const;
  int run_index(const std::string& name) const;
  // Where the joint part of a run ends in mid-run, its conductors go on from points of their own.
  int row_point(const StretchRow& row, const std::string& place);
  void add_piece(const Piece& piece);
  int cells(const engine::LineMatrices& matrices, double length) const;
  void moisture_warnings();

  // ---- supplies: sources, strays, what is alive
  struct SupplyState {
    bool alive = false;
    double turn = 0.0;  // rad, added to every pole's angle
  };
  void add_supplies();
  double own_angle(std::size_t index);
  static double secondary_angle(const Supply& supply, double primary);
  Complex pole_volts(std::size_t supply, const SystemType& system, const std::string& pole) const;
  // The no-load voltage across a transformer's primary, or nothing if it is not fed (yet).
  std::optional<Complex> primary_volts(std::size_t index);
  std::pair<int, int> primary_points(const Supply& supply);
  // The end of a circuit's last run that no earlier run of it touches.
  std::string far_place(const Circuit& circuit) const;
  // Points joined by contacts, conductors and bonds; windings of dead supplies aside.
  std::vector<int> galvanic_groups() const;
  void add_supply(std::size_t index);
  void add_poles(std::size_t index, const SystemType& system);
  void add_grounding(const Supply& supply, const SystemType& system);
  void add_transformer(const Supply& supply, const SystemType& system);
  double primary_nominal(const Supply& supply) const;

  // ---- the way back
  void finish();
  struct WirePieces {
    std::vector<std::pair<int, int>> segments;
    std::vector<std::pair<int, std::string>> ends;  // point, place ("" in mid-run)
  };
  // Segments of one wire hang together through its own points only, never through bars or boxes.
  void collect_conductors(const Joints::Nodes& nodes);
  void add_conductor(const std::string& id, const std::vector<std::pair<int, int>>& segments,
                     const Joints::Nodes& nodes);
  void add_access(ConductorPath& path, const std::set<int>& points, const std::string& place,
                  const Joints::Nodes& nodes);
  // All points a wire has at a place: the common one and those behind cuts.
  std::vector<std::pair<int, std::string>> point_names(const std::string& id, const std::string& place) const;
  void describe(ConductorPath& path) const;
  void tell_assumptions();

  const Building& building_;
  Wiring wiring_;
  SectionLibrary sections_;
  unsigned seed_;
  bool assume_loads_;
  Joints joints_;
  Lowered out_;
  std::set<std::string> landed_ground_;  // points of ground wires whose landing is settled
  std::set<int> drive_runs_;
  std::vector<std::vector<StretchRow>> line_rows_;
  std::vector<SupplyState> states_;
  std::vector<std::string> unlisted_;
  std::set<std::string> assumptions_;
  std::set<std::string> places_;
};

}  // namespace netlists
