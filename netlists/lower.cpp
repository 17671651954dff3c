#include "netlists/lower.h"

#include <fmt/format.h>

#include <algorithm>
#include <boost/random/uniform_real_distribution.hpp>
#include <cmath>
#include <numbers>
#include <random>
#include <set>
#include <stdexcept>

#include "netlists/joints.h"
#include "netlists/loads.h"
#include "netlists/plan.h"
#include "netlists/sections.h"
#include "netlists/stage.h"
#include "netlists/wiring.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_default_stray = 1e-9;               // F, a line of an ungrounded supply to ground
constexpr double k_default_winding_to_winding = 1e-9;  // F, of an unscreened transformer, in all
constexpr double k_magnetising_share = 0.05;  // no-load current of a small transformer over its rated one
constexpr double k_default_rating = 1000.0;   // VA, of a transformer that gives none
constexpr double k_pi_error = 1e-6;           // relative error allowed a cell, (gamma l)^2 / 12

/// A run, or a part of it, that shares a section from one pair of ends to the other.
struct Piece {
  Stretch stretch;
  double length = 0.0;            // m
  std::vector<std::string> from;  // by run of the stretch: the suffix of its conductors' points there
  std::vector<std::string> to;
};

class Lowering {
 public:
  Lowering(const Building& building, unsigned seed)
      : building_(building), wiring_(wiring(building)), sections_(building, wiring_, seed), seed_(seed) {}

  Lowered lower() {
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

 private:
  // ---- points ----------------------------------------------------------------------------------

  std::string bar(const std::string& panel, const std::string& what) const {
    return what == "ground" ? "ground@" + panel : panel + "." + what;
  }

  // A wire's point at an end of one of its runs: apart from the rest of the wire if it is cut there.
  std::string wire_point(const PhysicalWire& wire, const std::string& place, int run) const {
    const std::string& run_name = building_.runs[run].name.text;
    for (const Cut& cut : building_.cuts) {
      const int meant = wiring_.find("", cut.wire.text);
      if (meant >= 0 && &wiring_.wires[meant] == &wire && cut.at.text == place && cut.side.text == run_name) {
        return wire.id + "/" + run_name + "@" + place;
      }
    }
    return wire.id + "@" + place;
  }

  // The point that a name means at a place, seen from a circuit.
  int point_of(const std::string& circuit, const std::string& name, const std::string& place) {
    const int wire = wiring_.find(circuit, name);
    if (wire >= 0) return joints_.point(wiring_.wires[wire].id + "@" + place);
    if (name == "earth") return 0;
    if (name == "ground" || name == "neutral") {
      return joints_.point(name == "ground" ? "ground@" + place : bar(place, name));
    }
    return joints_.point(name + "@" + place);  // a raceway
  }

  // ---- supplies and panels ---------------------------------------------------------------------

  static std::string terminal(const Supply& supply, const std::string& pole) {
    return supply.name.text + "." + pole;
  }

  // The point all lines of a supply are wound from: its neutral, or the middle of its windings.
  static std::string star(const Supply& supply, const SystemType& system) {
    return terminal(supply, system.neutral && system.neutral_volts == 0.0 ? "neutral" : "middle of windings");
  }

  std::vector<std::string> poles(const SystemType& system) const {
    std::vector<std::string> names;
    for (const Pole& line : system.lines) names.push_back(line.name);
    if (system.neutral) names.emplace_back("neutral");
    return names;
  }

  void join_supplies() {
    for (const Supply& supply : building_.supplies) {
      const SystemType* system = system_of(building_, supply);
      if (!system) throw std::invalid_argument("supply '" + supply.name.text + "': unknown system");
      const std::string grounded = grounded_pole(building_, supply);
      if (!grounded.empty()) joints_.join(joints_.point(terminal(supply, grounded)), 0);
      if (floats(building_, supply)) out_.floating_supplies.push_back(supply.name.text);
    }
  }

  void join_panel(const Panel& panel) {
    const Supply* supply = root_supply(building_, panel);
    if (!supply || !panel.supply) return;
    for (const std::string& pole : poles(*system_of(building_, *supply))) {
      joints_.join(joints_.point(bar(panel.name.text, pole)), joints_.point(terminal(*supply, pole)));
    }
    joints_.join(joints_.point(bar(panel.name.text, "ground")), 0);
    assumptions_.insert(
        fmt::format("panel '{}' stands at supply '{}': no feeder between them, its ground bar is earth",
                    panel.name.text, supply->name.text));
  }

  // ---- wires ------------------------------------------------------------------------------------

  void lay_wire(const PhysicalWire& wire) {
    for (const int run : wire.runs) {
      joints_.point(wire_point(wire, building_.runs[run].from.text, run));
      joints_.point(wire_point(wire, building_.runs[run].to.text, run));
    }
  }

  bool reaches(const PhysicalWire& wire, const std::string& place) const {
    return std::any_of(wire.runs.begin(), wire.runs.end(), [&](int run) {
      return building_.runs[run].from.text == place || building_.runs[run].to.text == place;
    });
  }

  bool breaker_on(const Circuit& circuit, std::size_t pole) const {
    return pole >= circuit.breaker.size() || circuit.breaker[pole];
  }

  void land(const Circuit& circuit) {
    if (!circuit.panel) return;
    const Panel* panel = find_panel(building_, circuit.panel->text);
    const Supply* supply = panel ? root_supply(building_, *panel) : nullptr;
    if (!supply) return;
    const SystemType& system = *system_of(building_, *supply);
    std::vector<const PhysicalWire*> wires;
    std::vector<std::string> names;
    for (const Wire& wire : circuit.wires) {
      const int index = wiring_.find(circuit.name.text, wire.name.text);
      if (index < 0 || !wire.alias.empty() || !reaches(wiring_.wires[index], panel->name.text)) continue;
      wires.push_back(&wiring_.wires[index]);
      names.push_back(wire.name.text);
    }
    const std::vector<std::string> lands = landings(circuit, names);
    for (std::size_t i = 0; i < wires.size(); ++i)
      land_wire(circuit, system, panel->name.text, *wires[i], lands[i]);
    tell_breaker(circuit, system);
  }

  void land_wire(const Circuit& circuit, const SystemType& system, const std::string& panel,
                 const PhysicalWire& wire, const std::string& where) {
    const int point = joints_.point(wire.id + "@" + panel);
    if (where == "neutral" || where == "ground") {
      joints_.join(point, joints_.point(bar(panel, where)));
      if (where == "ground") landed_ground_.insert(wire.id + "@" + panel);
      return;
    }
    if (where.empty()) {
      if (wire.ground) landed_ground_.insert(wire.id + "@" + panel);  // told not to land: stays apart there
      return;
    }
    std::string line;
    std::size_t pole = 0;
    if (where.rfind("pole ", 0) == 0) {
      pole = static_cast<std::size_t>(std::stoi(where.substr(5)));
      line = line_of_pole(system, circuit, pole);
    } else {
      line = where.substr(5);
      while (pole < circuit.poles.size() && line_of_pole(system, circuit, pole) != line) ++pole;
    }
    if (breaker_on(circuit, pole)) joints_.join(point, joints_.point(bar(panel, line)));
  }

  void tell_breaker(const Circuit& circuit, const SystemType& system) {
    std::string text;
    for (std::size_t i = 0; i < circuit.poles.size(); ++i) {
      text += fmt::format("{}{} {}", i ? ", " : "", line_of_pole(system, circuit, i),
                          breaker_on(circuit, i) ? "on" : "off");
    }
    if (!text.empty()) out_.states.push_back(fmt::format("{} breaker: {}", circuit.name.text, text));
  }

  // A feeder's lines land in order on the lines of both panels, through its breaker at the first.
  void land_feeder(const Panel& panel) {
    if (!panel.feeder) return;
    const Supply* supply = root_supply(building_, panel);
    if (!supply) return;
    const SystemType& system = *system_of(building_, *supply);
    std::size_t line = 0;
    for (const Wire& wire : panel.feeder->wires) {
      const int index = wiring_.find(panel.name.text, wire.name.text);
      if (index < 0) continue;
      const bool neutral = names_neutral(wire.name.text);
      const bool ground = names_ground(wire.name.text);
      if (!neutral && !ground && line >= system.lines.size()) continue;
      const std::string pole = neutral ? "neutral" : ground ? "ground" : system.lines[line++].name;
      const std::string& id = wiring_.wires[index].id;
      const std::string near_end = id + "@" + panel.feeder->from.text;
      const std::string far_end = id + "@" + panel.name.text;
      if (wiring_.wires[index].runs.empty()) joints_.join(joints_.point(near_end), joints_.point(far_end));
      joints_.join(joints_.point(far_end), joints_.point(bar(panel.name.text, pole)));
      if (neutral || ground || panel.feeder->breaker_on) {
        joints_.join(joints_.point(near_end), joints_.point(bar(panel.feeder->from.text, pole)));
      }
    }
    out_.states.push_back(
        fmt::format("{} feeder breaker: {}", panel.name.text, panel.feeder->breaker_on ? "on" : "off"));
  }

  // ---- ground as a node of each place ------------------------------------------------------------

  void join_ground_wires() {
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

  void land_isolated_ground(const PhysicalWire& wire) {
    const std::string panel = wire.circuit >= 0 && building_.circuits[wire.circuit].panel
                                  ? building_.circuits[wire.circuit].panel->text
                                  : "";
    if (!panel.empty() && reaches(wire, panel)) {
      joints_.join(joints_.point(wire.id + "@" + panel), joints_.point(bar(panel, "ground")));
    }
  }

  bool has_metal_raceway(const Run& run) const {
    const auto raceway = building_.catalogue.raceways.find(run.raceway.text);
    return raceway != building_.catalogue.raceways.end() && raceway->second.metal();
  }

  void lay_raceways() {
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

  // ---- switches, bonds, leaks, loads ----------------------------------------------------------------

  void set_switches(const Circuit& circuit) {
    for (const Switch& item : circuit.switches) {
      std::vector<int> at;
      for (const Name& wire : item.wires) at.push_back(point_of(circuit.name.text, wire.text, item.at.text));
      const std::string name = circuit.name.text + "." + (item.name.empty() ? "switch" : item.name);
      if (item.kind == SwitchKind::contact) {
        if (item.closed) joints_.join(at[0], at[1]);
        out_.states.push_back(
            fmt::format("{} at {}: {}", name, item.at.text, item.closed ? "closed" : "open"));
        continue;
      }
      if (item.kind == SwitchKind::three_way) {
        joints_.join(at[0], at[static_cast<std::size_t>(item.position)]);
      } else {
        joints_.join(at[0], item.position == 1 ? at[2] : at[3]);
        joints_.join(at[1], item.position == 1 ? at[3] : at[2]);
      }
      out_.states.push_back(fmt::format("{} at {}: position {}", name, item.at.text, item.position));
    }
  }

  void add_bond(const Bond& bond) {
    for (std::size_t i = 1; i < bond.joins.size(); ++i) {
      const int a = point_of("", bond.joins[0].text, bond.at.text);
      const int b = point_of("", bond.joins[i].text, bond.at.text);
      if (bond.resistance == 0.0) {
        joints_.join(a, b);
        continue;
      }
      const std::string what =
          bond.name.empty() ? bond.joins[0].text + " to " + bond.joins[i].text : bond.name;
      add_element("bond " + what, a, b, 1.0 / bond.resistance);
      out_.connections.push_back({a, b, Join::wire, bond.resistance, "bond " + what});
    }
  }

  void add_leak(const Leak& leak) {
    add_element("leak " + leak.between.first.text + " to " + leak.between.second.text,
                point_of("", leak.between.first.text, leak.at.text),
                point_of("", leak.between.second.text, leak.at.text), 1.0 / leak.resistance);
  }

  void add_loads(const Circuit& circuit) {
    if (!circuit.loads) {
      const bool fed = circuit.panel.has_value();
      if (fed) unlisted_.push_back(circuit.name.text);
      return;
    }
    for (const Load& load : *circuit.loads) {
      const LoadModel model = load_model(building_, circuit, load);
      const std::string name = "load " + circuit.name.text + (load.name.empty() ? "" : "." + load.name);
      const int a = point_of(circuit.name.text, load.between.first.text, load.at.text);
      const int b = point_of(circuit.name.text, load.between.second.text, load.at.text);
      out_.states.push_back(fmt::format("{} at {}: {}", name, load.at.text,
                                        load.state == LoadState::on    ? "on"
                                        : load.state == LoadState::off ? "off"
                                                                       : "standby"));
      if (!model.assumption.empty()) assumptions_.insert(name + ": " + model.assumption);
      if (model.drive) mark_drive(circuit, load);
      if (model.admittance == 0.0) continue;
      add_element(name, a, b, model.admittance);
      out_.loads.push_back(
          {name, circuit.name.text, load.kind, load.at.text, a, b, model.admittance, model.nominal_volts});
      if (!model.filter) out_.connections.push_back({a, b, Join::load, 1.0 / model.admittance, name});
    }
  }

  void mark_drive(const Circuit& circuit, const Load& load) {
    for (const std::string& name : {load.between.first.text, load.between.second.text}) {
      const int wire = wiring_.find(circuit.name.text, name);
      if (wire < 0) continue;
      for (const int run : wiring_.wires[wire].runs) drive_runs_.insert(run);
    }
  }

  void add_element(const std::string& name, int a, int b, Complex admittance) {
    out_.network.elements.push_back({a, b, admittance});
    out_.element_names.push_back(name);
  }

  // ---- lines --------------------------------------------------------------------------------------

  void add_lines() {
    std::vector<double> taken(building_.runs.size(), 0.0);  // m, of each run, from `begin`
    std::vector<std::string> begin(building_.runs.size());
    for (std::size_t r = 0; r < building_.runs.size(); ++r) begin[r] = building_.runs[r].from.text;
    for (const Alongside& group : building_.alongside) add_joint(group, taken, begin);
    for (std::size_t r = 0; r < building_.runs.size(); ++r) {
      const Run& run = building_.runs[r];
      if (taken[r] >= run.length * (1 - 1e-9)) continue;
      const std::string far_end = begin[r] == run.to.text && taken[r] > 0 ? run.from.text : run.to.text;
      const std::string start = taken[r] > 0 ? "" : run.from.text;
      add_piece({{{static_cast<int>(r)}, {}}, run.length - taken[r], {start}, {far_end}});
    }
    moisture_warnings();
  }

  void add_joint(const Alongside& group, std::vector<double>& taken, std::vector<std::string>& begin) {
    Piece piece;
    piece.length = group.over.value_or(1e300);
    std::string what;
    for (const Name& name : group.runs) {
      const int run = run_index(name.text);
      what += (what.empty() ? "" : "+") + name.text;
      const auto raceway = building_.catalogue.raceways.find(building_.runs[run].raceway.text);
      const bool tray =
          raceway != building_.catalogue.raceways.end() && raceway->second.kind == RacewayKind::tray;
      if (tray || taken[run] > 0) {
        out_.warnings.push_back(
            fmt::format("alongside {}: run '{}' {}: its coupling to the others is left out", what, name.text,
                        tray ? "lies on a tray of its own" : "already lies alongside another"));
        return;
      }
      piece.stretch.runs.push_back(run);
      if (piece.stretch.runs.size() > 1) piece.stretch.spacing.push_back(group.spacing);
      piece.length = std::min(piece.length, building_.runs[run].length);
    }
    const std::string shared = shared_place(piece.stretch.runs);
    for (const int run : piece.stretch.runs) {
      const Run& model = building_.runs[run];
      begin[run] = shared.empty() ? model.from.text : shared;
      taken[run] = piece.length;
      const std::string far_end = begin[run] == model.from.text ? model.to.text : model.from.text;
      piece.from.push_back(begin[run]);
      piece.to.push_back(piece.length >= model.length * (1 - 1e-9) ? far_end : "");
    }
    add_piece(piece);
  }

  std::string shared_place(const std::vector<int>& runs) const {
    for (const std::string& place : {building_.runs[runs[0]].from.text, building_.runs[runs[0]].to.text}) {
      if (std::all_of(runs.begin(), runs.end(), [&](int run) {
            return building_.runs[run].from.text == place || building_.runs[run].to.text == place;
          })) {
        return place;
      }
    }
    return "";
  }

  int run_index(const std::string& name) const {
    for (std::size_t r = 0; r < building_.runs.size(); ++r) {
      if (building_.runs[r].name.text == name) return static_cast<int>(r);
    }
    throw std::invalid_argument("run '" + name + "' is not in the model");
  }

  // Where the joint part of a run ends in mid-run, its conductors go on from points of their own.
  int row_point(const StretchRow& row, const std::string& place) {
    const Run& run = building_.runs[row.run];
    const std::string id = row.wire < 0 ? raceway_id(run) : wiring_.wires[row.wire].id;
    if (place.empty()) return joints_.point(id + "@within " + run.name.text);
    return joints_.point(row.wire < 0 ? id + "@" + place
                                      : wire_point(wiring_.wires[row.wire], place, row.run));
  }

  void add_piece(const Piece& piece) {
    const std::vector<StretchRow> rows = sections_.rows(piece.stretch);
    if (rows.empty()) return;
    engine::Line line;
    line.length = piece.length;
    line.matrices = sections_.matrices(piece.stretch, piece.length);
    std::vector<std::string> names;
    std::string run_names;
    for (const int run : piece.stretch.runs) {
      run_names += (run_names.empty() ? "" : "+") + building_.runs[run].name.text;
    }
    for (const StretchRow& row : rows) {
      const auto which = std::find(piece.stretch.runs.begin(), piece.stretch.runs.end(), row.run);
      const auto index = static_cast<std::size_t>(which - piece.stretch.runs.begin());
      line.from.push_back(row_point(row, piece.from[index]));
      line.to.push_back(row_point(row, piece.to[index]));
      names.push_back(row.wire < 0 ? raceway_id(building_.runs[row.run]) : wiring_.wires[row.wire].id);
    }
    line.cells = cells(*line.matrices, piece.length);
    line_rows_.push_back(rows);
    out_.network.lines.push_back(std::move(line));
    out_.line_runs.push_back(run_names);
    out_.line_conductors.push_back(std::move(names));
  }

  int cells(const engine::LineMatrices& matrices, double length) const {
    const double omega = 2 * std::numbers::pi * building_.frequency;
    const double gamma_squared =
        matrices.impedance.cwiseAbs().maxCoeff() *
        (omega * matrices.capacitance.cwiseAbs().maxCoeff() + matrices.conductance.cwiseAbs().maxCoeff());
    const double count = std::ceil(length * std::sqrt(gamma_squared / (12 * k_pi_error)));
    return static_cast<int>(std::clamp(count, 1.0, 256.0));
  }

  void moisture_warnings() {
    for (const Run& run : building_.runs) {
      if (run.condition == Moisture::dry) continue;
      out_.warnings.push_back(
          fmt::format("run '{}' is not dry: what moisture does to its insulation and surroundings is not "
                      "computed yet; real "
                      "readings there may be higher or lower than shown",
                      run.name.text));
    }
  }

  // ---- supplies: sources, strays, what is alive -------------------------------------------------------

  struct SupplyState {
    bool alive = false;
    double turn = 0.0;  // rad, added to every pole's angle
  };

  void add_supplies() {
    states_.assign(building_.supplies.size(), {});
    std::vector<bool> known(building_.supplies.size(), false);
    for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
      if (building_.supplies[s].fed_from) continue;
      states_[s] = {true, own_angle(s)};
      known[s] = true;
    }
    // A secondary dies with its primary, which may be a secondary itself.
    for (bool progress = true; progress;) {
      progress = false;
      for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
        if (known[s]) continue;
        const std::optional<Complex> primary = primary_volts(s);
        if (!primary) continue;
        states_[s] = {true, secondary_angle(building_.supplies[s], std::arg(*primary))};
        known[s] = true;
        progress = true;
      }
    }
    for (std::size_t s = 0; s < building_.supplies.size(); ++s) add_supply(s);
  }

  double own_angle(std::size_t index) {
    const Supply& supply = building_.supplies[index];
    if (supply.angle) return *supply.angle;
    if (index == 0) return 0.0;
    std::mt19937_64 random(seed_ * 1000003ull + index);
    const double angle = boost::random::uniform_real_distribution<double>(0.0, 2 * std::numbers::pi)(random);
    out_.warnings.push_back(
        fmt::format("supply '{}': neither fed_from nor angle is given; its phase against '{}' is drawn at "
                    "random ({:.0f} deg)",
                    supply.name.text, building_.supplies[0].name.text, angle * 180 / std::numbers::pi));
    return angle;
  }

  static double secondary_angle(const Supply& supply, double primary) {
    if (supply.angle) return *supply.angle;
    const std::size_t digit = supply.vector_group.find_first_of("0123456789");
    if (digit == std::string::npos) return primary;
    return primary - std::stoi(supply.vector_group.substr(digit)) * std::numbers::pi / 6;
  }

  Complex pole_volts(std::size_t supply, const SystemType& system, const std::string& pole) const {
    for (const Pole& line : system.lines) {
      if (line.name == pole) return std::polar(line.volts, line.angle + states_[supply].turn);
    }
    return std::polar(system.neutral_volts, states_[supply].turn);
  }

  // The no-load voltage across a transformer's primary, or nothing if it is not fed (yet).
  std::optional<Complex> primary_volts(std::size_t index) {
    const auto [a, b] = primary_points(building_.supplies[index]);
    const std::vector<int> group = galvanic_groups();
    std::optional<Complex> first;
    std::optional<Complex> second;
    for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
      if (!states_[s].alive) continue;
      const SystemType& system = *system_of(building_, building_.supplies[s]);
      for (const std::string& pole : poles(system)) {
        const int point = joints_.point(terminal(building_.supplies[s], pole));
        const auto at = [&](int end) { return group[end] == group[point]; };
        if (at(a)) first = pole_volts(s, system, pole);
        if (at(b)) second = pole_volts(s, system, pole);
      }
    }
    if (!first || !second || std::abs(*first - *second) < 1e-6) return std::nullopt;
    return *first - *second;
  }

  std::pair<int, int> primary_points(const Supply& supply) {
    const FedFrom& fed = *supply.fed_from;
    const Circuit* circuit = find_circuit(building_, fed.circuit.text);
    if (!circuit)
      throw std::invalid_argument("supply '" + supply.name.text + "': circuit '" + fed.circuit.text +
                                  "' is not in the model");
    std::string place = fed.at ? fed.at->text : "";
    if (place.empty() && !circuit->runs.empty()) place = far_place(*circuit);
    std::string a = "hot";
    std::string b = "neutral";
    if (fed.between) {
      a = fed.between->first.text;
      b = fed.between->second.text;
    } else {
      std::vector<std::string> names;
      for (const Wire& wire : circuit->wires) {
        if (!names_ground(wire.name.text)) names.push_back(wire.name.text);
      }
      if (names.size() >= 2) {
        a = names[0];
        b = names[1];
      }
    }
    return {point_of(circuit->name.text, a, place), point_of(circuit->name.text, b, place)};
  }

  // The end of a circuit's last run that no earlier run of it touches.
  std::string far_place(const Circuit& circuit) const {
    const Run& last = building_.runs[run_index(circuit.runs.back().text)];
    std::set<std::string> seen;
    if (circuit.panel) seen.insert(circuit.panel->text);
    for (std::size_t i = 0; i + 1 < circuit.runs.size(); ++i) {
      const Run& run = building_.runs[run_index(circuit.runs[i].text)];
      seen.insert({run.from.text, run.to.text});
    }
    return seen.count(last.to.text) ? last.from.text : last.to.text;
  }

  // Points joined by contacts, conductors and bonds; windings of dead supplies aside.
  std::vector<int> galvanic_groups() const {
    Joints::Nodes nodes = joints_.nodes();
    std::vector<int> parent(nodes.names.size());
    for (std::size_t i = 0; i < parent.size(); ++i) parent[i] = static_cast<int>(i);
    const auto root = [&](int i) {
      while (parent[i] != i) i = parent[i] = parent[parent[i]];
      return i;
    };
    for (const engine::Line& line : out_.network.lines) {
      for (std::size_t i = 0; i < line.from.size(); ++i) {
        parent[root(nodes.of_point[line.from[i]])] = root(nodes.of_point[line.to[i]]);
      }
    }
    for (const Connection& connection : out_.connections) {
      if (connection.join == Join::wire) {
        parent[root(nodes.of_point[connection.a])] = root(nodes.of_point[connection.b]);
      }
    }
    std::vector<int> group(nodes.of_point.size());
    for (std::size_t p = 0; p < group.size(); ++p) group[p] = root(nodes.of_point[p]);
    return group;
  }

  void add_supply(std::size_t index) {
    const Supply& supply = building_.supplies[index];
    const SystemType& system = *system_of(building_, supply);
    const SupplyState& state = states_[index];
    const Complex impedance =
        supply.impedance.value_or(Complex(system.impedance_resistance, system.impedance_reactance));
    if (!supply.impedance) {
      assumptions_.insert(fmt::format("supply '{}': source impedance {:.3g} + j{:.3g} ohm per line",
                                      supply.name.text, impedance.real(), impedance.imag()));
    }
    const int middle = joints_.point(star(supply, system));
    for (const std::string& pole : poles(system)) {
      const int point = joints_.point(terminal(supply, pole));
      if (point == middle) continue;
      const Complex volts = state.alive ? pole_volts(index, system, pole) : 0.0;
      out_.network.sources.push_back({point, middle, volts, impedance});
      out_.source_names.push_back(supply.name.text + " " + pole);
      if (!state.alive)
        out_.connections.push_back({point, middle, Join::wire, impedance, "winding of " + supply.name.text});
    }
    if (!state.alive)
      out_.states.push_back(fmt::format("supply {}: off, its primary is not fed", supply.name.text));
    if (state.alive) add_poles(index, system);
    if (supply.asynchronous) {
      out_.warnings.push_back(fmt::format(
          "supply '{}' is asynchronous: combined at one instant's phase, not yet by RMS", supply.name.text));
    }
    add_grounding(supply, system);
    if (supply.fed_from) add_transformer(supply, system);
  }

  void add_poles(std::size_t index, const SystemType& system) {
    const Supply& supply = building_.supplies[index];
    const std::string grounded = grounded_pole(building_, supply);
    const Complex base = grounded.empty() ? Complex(0.0) : pole_volts(index, system, grounded);
    for (const std::string& pole : poles(system)) {
      out_.poles.push_back({joints_.point(terminal(supply, pole)), pole_volts(index, system, pole) - base,
                            supply.name.text, pole, pole == grounded});
    }
  }

  void add_grounding(const Supply& supply, const SystemType& system) {
    const std::string grounding = supply.grounding.value_or(system.default_grounding);
    if (!supply.grounding) {
      assumptions_.insert(fmt::format("supply '{}': grounding '{}', the usual one of '{}'", supply.name.text,
                                      grounding, system.name));
    }
    if (grounding == "resistance") {
      const int pole = joints_.point(star(supply, system));
      add_element("grounding " + supply.name.text, pole, 0, 1.0 / supply.grounding_resistance);
      out_.connections.push_back(
          {pole, 0, Join::load, supply.grounding_resistance, "grounding of " + supply.name.text});
    }
    const double omega = 2 * std::numbers::pi * building_.frequency;
    const std::vector<std::string> names = poles(system);
    std::vector<double> stray = supply.stray_line_to_ground;
    if (stray.empty() && floats(building_, supply)) {
      stray.assign(names.size(), k_default_stray);
      assumptions_.insert(
          fmt::format("supply '{}': {:.3g} nF from each pole to ground inside it (common practice)",
                      supply.name.text, k_default_stray * 1e9));
    }
    if (stray.size() == 1) stray.assign(names.size(), stray[0]);
    for (std::size_t i = 0; i < names.size() && i < stray.size(); ++i) {
      if (stray[i] == 0.0) continue;
      add_element("stray " + supply.name.text + " " + names[i], joints_.point(terminal(supply, names[i])), 0,
                  Complex(0.0, omega * stray[i]));
    }
  }

  void add_transformer(const Supply& supply, const SystemType& system) {
    const auto [a, b] = primary_points(supply);
    const double omega = 2 * std::numbers::pi * building_.frequency;
    if (!supply.stray_primary_to_secondary) {
      assumptions_.insert(
          fmt::format("supply '{}': {:.3g} nF between its windings, no screen (common practice)",
                      supply.name.text, k_default_winding_to_winding * 1e9));
    }
    const double between = supply.stray_primary_to_secondary.value_or(k_default_winding_to_winding);
    const std::vector<std::string> names = poles(system);
    for (const std::string& pole : names) {
      // Half of the winding capacitance sits at each end of the primary, an equal share at each pole.
      const Complex share(0.0, omega * between / (2.0 * static_cast<double>(names.size())));
      if (share == 0.0) continue;
      const int point = joints_.point(terminal(supply, pole));
      add_element("windings " + supply.name.text + " " + pole, a, point, share);
      add_element("windings " + supply.name.text + " " + pole, b, point, share);
    }
    const double rating = supply.rating > 0 ? supply.rating : k_default_rating;
    const double volts = primary_nominal(supply);
    if (volts == 0.0) return;
    const Complex winding(0.0, volts * volts / (k_magnetising_share * rating));
    assumptions_.insert(
        fmt::format("supply '{}': its primary draws {:.0f} % of the rated current of {:.0f} VA at no load",
                    supply.name.text, 100 * k_magnetising_share, rating));
    add_element("primary " + supply.name.text, a, b, 1.0 / winding);
    out_.connections.push_back({a, b, Join::load, winding, "primary of " + supply.name.text});
  }

  double primary_nominal(const Supply& supply) const {
    const Circuit* circuit = find_circuit(building_, supply.fed_from->circuit.text);
    return circuit
               ? nominal_volts(building_, *circuit,
                               supply.fed_from->between ? supply.fed_from->between->second.text : "neutral")
               : 0.0;
  }

  // ---- the way back ------------------------------------------------------------------------------------

  void finish() {
    const Joints::Nodes nodes = joints_.nodes();
    const auto map = [&](int& point) { point = nodes.of_point[point]; };
    collect_conductors(nodes);
    for (engine::Line& line : out_.network.lines) {
      for (int& point : line.from) map(point);
      for (int& point : line.to) map(point);
    }
    for (engine::Element& element : out_.network.elements) map(element.a), map(element.b);
    for (engine::Source& source : out_.network.sources) map(source.a), map(source.b);
    for (Connection& connection : out_.connections) map(connection.a), map(connection.b);
    for (LivePole& pole : out_.poles) map(pole.node);
    for (LoweredLoad& load : out_.loads) map(load.a), map(load.b);
    out_.network.frequency = building_.frequency;
    out_.network.node_count = static_cast<int>(nodes.names.size());
    out_.node_names = nodes.names;
    for (const std::string& place : places_) {
      const int ground = joints_.find_point("ground@" + place);
      if (ground >= 0) out_.at["ground@" + place] = nodes.of_point[ground];
    }
    tell_assumptions();
  }

  struct WirePieces {
    std::vector<std::pair<int, int>> segments;
    std::vector<std::pair<int, std::string>> ends;  // point, place ("" in mid-run)
  };

  // Segments of one wire hang together through its own points only, never through bars or boxes.
  void collect_conductors(const Joints::Nodes& nodes) {
    std::map<std::string, std::vector<std::pair<int, int>>> segments;  // wire id -> (line, row)
    std::vector<std::string> order;
    for (std::size_t l = 0; l < out_.line_conductors.size(); ++l) {
      for (std::size_t i = 0; i < out_.line_conductors[l].size(); ++i) {
        segments[out_.line_conductors[l][i]].emplace_back(static_cast<int>(l), static_cast<int>(i));
      }
    }
    for (const PhysicalWire& wire : wiring_.wires) order.push_back(wire.id);
    for (const Run& run : building_.runs) {
      if (has_metal_raceway(run)) order.push_back(raceway_id(run));
    }
    for (const Run& run : building_.runs) places_.insert({run.from.text, run.to.text});
    for (const std::string& id : order) {
      const auto found = segments.find(id);
      if (found != segments.end()) add_conductor(id, found->second, nodes);
    }
  }

  void add_conductor(const std::string& id, const std::vector<std::pair<int, int>>& segments,
                     const Joints::Nodes& nodes) {
    std::vector<bool> used(segments.size(), false);
    for (std::size_t first = 0; first < segments.size(); ++first) {
      if (used[first]) continue;
      ConductorPath path;
      std::set<int> points;
      // Grow the piece from its first segment over shared points.
      for (bool grown = true; grown;) {
        grown = false;
        for (std::size_t s = 0; s < segments.size(); ++s) {
          const engine::Line& line = out_.network.lines[segments[s].first];
          const int a = line.from[segments[s].second];
          const int b = line.to[segments[s].second];
          if (used[s] || (!points.empty() && !points.count(a) && !points.count(b))) continue;
          if (points.empty() && s != first) continue;
          used[s] = grown = true;
          points.insert({a, b});
          path.segments.push_back(segments[s]);
        }
      }
      path.wire = id;
      path.id = first == 0 ? id : id + "/" + out_.line_runs[segments[first].first];
      for (const std::string& place : places_) add_access(path, points, place, nodes);
      describe(path);
      out_.conductors.push_back(std::move(path));
    }
  }

  void add_access(ConductorPath& path, const std::set<int>& points, const std::string& place,
                  const Joints::Nodes& nodes) {
    for (const auto& [point, name] : point_names(path.wire, place)) {
      if (!points.count(point)) continue;
      path.access.push_back({place, nodes.of_point[point]});
      out_.at[path.id + "@" + place] = nodes.of_point[point];
      return;
    }
  }

  // All points a wire has at a place: the common one and those behind cuts.
  std::vector<std::pair<int, std::string>> point_names(const std::string& id,
                                                       const std::string& place) const {
    std::vector<std::pair<int, std::string>> result;
    const auto consider = [&](const std::string& name) {
      const int point = joints_.find_point(name);
      if (point >= 0) result.emplace_back(point, name);
    };
    consider(id + "@" + place);
    for (const Run& run : building_.runs) {
      if (run.from.text == place || run.to.text == place) consider(id + "/" + run.name.text + "@" + place);
    }
    return result;
  }

  void describe(ConductorPath& path) const {
    for (const auto& [line, row] : path.segments) {
      for (const StretchRow& other : line_rows_[line]) {
        if (drive_runs_.count(other.run)) path.near_drive = true;
      }
      const StretchRow& own = line_rows_[line][row];
      if (own.wire < 0) {
        path.ground = true;
        continue;
      }
      const PhysicalWire& wire = wiring_.wires[own.wire];
      path.ground = wire.ground || wire.armour || wire.isolated_ground;
      if (wire.circuit < 0) continue;
      const Circuit& circuit = building_.circuits[wire.circuit];
      path.circuit = circuit.name.text;
      const Panel* panel = circuit.panel ? find_panel(building_, circuit.panel->text) : nullptr;
      const Supply* supply = panel ? root_supply(building_, *panel) : nullptr;
      if (supply) path.supply = supply->name.text;
      for (const Wire& candidate : circuit.wires) {
        if (!names_neutral(candidate.name.text)) continue;
        const int neutral = wiring_.find(circuit.name.text, candidate.name.text);
        if (neutral >= 0 && wiring_.wires[neutral].id != path.wire) path.neutral = wiring_.wires[neutral].id;
      }
    }
  }

  void tell_assumptions() {
    if (!unlisted_.empty()) {
      std::string names;
      for (std::size_t i = 0; i < unlisted_.size() && i < 8; ++i) names += (i ? ", " : "") + unlisted_[i];
      if (unlisted_.size() > 8) names += fmt::format(" and {} more", unlisted_.size() - 8);
      assumptions_.insert("loads are not listed (unknown, not none); the nominal case has no load on: " +
                          names);
    }
    for (const std::string& text : building_.defaults) out_.assumptions.push_back(text);
    for (const std::string& text : sections_.assumptions()) out_.assumptions.push_back(text);
    out_.assumptions.insert(out_.assumptions.end(), assumptions_.begin(), assumptions_.end());
  }

  const Building& building_;
  Wiring wiring_;
  SectionLibrary sections_;
  unsigned seed_;
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

}  // namespace

Lowered lower(const Building& building, const std::string& stage, unsigned seed) {
  const Building staged = in_stage(building, stage);
  return Lowering(staged, seed).lower();
}

}  // namespace netlists
