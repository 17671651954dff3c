// From the building to the coupled network of every conductor in every run.
#pragma once

#include <map>
#include <memory>
#include <set>
#include <string>
#include <vector>

#include "engine/capacitance.h"
#include "engine/cross_section.h"
#include "engine/network.h"
#include "netlists/building.h"
#include "netlists/fault.h"

namespace netlists {

/// Every fault of a building that needs more than one entry to see: names that lead nowhere, loops in
/// a tree of runs, a wire that lands nowhere, two circuits in one slot, cyclic feeders, an overfilled
/// raceway (a warning). Empty: the building can be lowered.
std::vector<Fault> validate(const Building& building);

/// The section of one run as drawn with one seed, with the names of its rows.
struct RunSection {
  std::string run;  // "C1", or "C2+C3" for a joint section
  engine::CrossSection section;
  std::vector<std::string> names;  // CIRCUIT.wire, RUN.raceway, by row
};

/// The first layout of a run that `seed` draws. `run` must exist.
RunSection run_section(const Building& building, const std::string& run, unsigned seed);

/// One stretch of one or more runs that share a section: a run, or the joint part of runs that lie
/// alongside each other.
struct Stretch {
  std::vector<int> runs;        // indices into Building::runs, in the order of their names
  std::vector<double> spacing;  // m, between neighbours, surface to surface; size runs - 1
};

/// Where a conductor can be reached.
struct Access {
  std::string place;
  int node = 0;
};

/// One metallic path, by its id, with every place where it can be reached. A wire that a cut has
/// parted is several paths: the one with the wire's first run keeps the wire's name, each other is
/// CIRCUIT.wire/RUN after the first run it has.
struct ConductorPath {
  std::string id;           // CIRCUIT.wire or RUN.raceway
  std::string wire;         // the physical wire it is a piece of: its id without cuts
  std::string circuit;      // "" for a raceway
  std::string supply;       // that its circuit's panel hangs on; "" without a panel
  std::string neutral;      // its circuit's neutral wire, "" if it has none or is it itself
  bool ground = false;      // a protective conductor, armour or raceway
  bool near_drive = false;  // shares a run with the output of a load of kind drive
  std::vector<Access> access;
  std::vector<std::pair<int, int>> segments;  // line, conductor within it
};

/// What joins two components for the judgement of conditions: never cable capacitance or leakage.
enum class Join { wire, load };

struct Connection {
  int a = 0;  // nodes
  int b = 0;
  Join join = Join::wire;
  engine::Complex impedance;  // ohm
  std::string what;           // "load LP2-7"
};

/// A load as it is connected, in its state of the stage.
struct LoweredLoad {
  std::string name;     // "load LP2-7"
  std::string circuit;  // its name
  std::string kind;     // catalogue name
  std::string place;
  int a = 0;  // nodes
  int b = 0;
  engine::Complex admittance;  // S
  double nominal_volts = 0.0;  // V
};

/// A load that the model does not list, across a hot and the neutral of its circuit at its far end.
struct UnlistedLoad {
  std::string circuit;
  int element = 0;             // index into Network::elements
  int connection = 0;          // index into Lowered::connections
  double nominal_volts = 0.0;  // V
};

/// A pole of a live supply.
struct LivePole {
  int node = 0;
  engine::Complex volts;  // V, no-load, from earth, or from the supply's own centre where it floats
  std::string supply;
  std::string name;  // "A", "neutral"
  bool grounded = false;
};

/// A building lowered, with the way back from nodes and lines to the user's names.
struct Lowered {
  engine::Network network;
  std::vector<std::string> node_names;                    // size node_count; [0] is "earth"
  std::vector<std::string> line_runs;                     // size lines
  std::vector<Stretch> line_stretches;                    // size lines
  std::vector<std::vector<std::string>> line_conductors;  // [line][conductor]
  std::vector<std::string> element_names;                 // size elements: "load LP2-7"
  std::vector<std::string> source_names;                  // size sources: "T1 A"
  std::map<std::string, int> at;                          // "spare-1.a@JB-4", "ground@JB-4" -> node
  std::vector<ConductorPath> conductors;                  // every wire of the model, then raceways and armour
  std::vector<Connection> connections;                    // within conductors, through contacts, bonds, loads
  std::vector<LoweredLoad> loads;                         // those that are not off
  std::vector<UnlistedLoad> unlisted_loads;               // assumed ones, where they were asked for
  std::vector<LivePole> poles;
  std::set<std::string> floating_supplies;  // names of supplies without a grounded pole
  std::vector<std::string> states;          // every breaker and switch state assumed, in words
  std::vector<std::string> assumptions;
  std::vector<std::string> warnings;
};

/// Matrices of sections solved before, by content, single layouts and means: a lowering can go on where
/// another left off.
using SectionCache = std::map<std::string, std::shared_ptr<const engine::LineMatrices>>;

struct LowerOptions {
  unsigned seed = 1;                       // draws the layouts
  std::shared_ptr<SectionCache> sections;  // of earlier lowerings with the same seed; may be null
  bool unlisted_loads = false;             // puts k_unlisted_power where a circuit lists no loads
};

/// W at nominal voltage, of a load that the model does not list, where it is asked for.
inline constexpr double k_unlisted_power = 100.0;

/// Lowers a valid building in one stage ("" for the first, or as drawn where there are none). `seed`
/// draws the layouts. Throws std::invalid_argument for a stage that is not there.
Lowered lower(const Building& building, const std::string& stage, unsigned seed);

/// Lowers a building whose stage is applied already (netlists/stage.h).
Lowered lower_staged(const Building& staged, const LowerOptions& options);

}  // namespace netlists
