// A building as its drawings tell it: the model file, read. SI inside; names as the user wrote them.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "netlists/catalogue.h"
#include "netlists/fault.h"

namespace netlists {

/// A name the user wrote, with where he wrote it.
struct Name {
  std::string text;
  Mark mark;
};

/// Where an isolation transformer's primary is connected.
struct FedFrom {
  Name circuit;
  std::optional<Name> at;                        // place; default the circuit's last place
  std::optional<std::pair<Name, Name>> between;  // wires; default its first hot and its neutral
};

struct Supply {
  Name name;
  Name system;  // catalogue name; "120 two-wire" where the first word is the voltage
  std::optional<std::string>
      grounding;                      // solid | isolated | none | corner | resistance; default the system's
  double grounding_resistance = 0.0;  // ohm, for `resistance`
  std::optional<FedFrom> fed_from;
  std::vector<double> stray_line_to_ground;          // F, one a pole in order (neutral last) or one for all
  double insulation = 0.0;                           // ohm, from each pole to ground; 0: none taken
  std::optional<double> stray_primary_to_secondary;  // F, in all
  std::optional<std::complex<double>> impedance;     // ohm per line, R + jX
  std::optional<double> angle;                       // rad, of its first line
  std::string vector_group;                          // "Dyn1"; "" if not given
  bool asynchronous = false;
  double rating = 0.0;  // VA; 0 if not given
};

/// Position of a pole: a slot number or a line name.
struct PolePosition {
  std::optional<int> slot;
  std::string line;  // "" if by slot
  Mark mark;
};

enum class SwitchState { off, on };

struct Wire {
  Name name;
  std::string type;        // catalogue wire type; "" for an alias
  std::string alias;       // "LP2-7.neutral": the same wire as another circuit's
  std::vector<Name> runs;  // empty: all runs of the circuit
  bool isolated_ground = false;
  Mark mark;  // of the value
};

/// The real conductors that feed a panel from another.
struct Feeder {
  Name from;  // panel
  std::vector<Wire> wires;
  std::vector<Name> runs;
  bool breaker_on = true;
  Mark mark;
};

struct Panel {
  Name name;
  std::optional<Name> supply;  // exactly one of supply and feeder
  std::optional<Feeder> feeder;
};

enum class Box { by_raceway, metal, plastic, none };

struct Place {
  Name name;
  Box box = Box::by_raceway;
};

enum class Bonded { both, from, to, none };
enum class Moisture { dry, damp, wet, flooded };

struct Run {
  Name name;
  Name from;                        // panel or place
  Name to;                          // panel or place
  double length = 0.0;              // m
  Name raceway;                     // catalogue name or "none"
  std::optional<double> clearance;  // m, outer surface to the earthed plane
  Bonded bonded = Bonded::both;
  Moisture condition = Moisture::dry;
  std::map<std::string, Eigen::Vector2d> layout;  // m, by CIRCUIT.wire; empty: at random
};

struct Alongside {
  std::vector<Name> runs;      // two or more
  double spacing = 0.0;        // m, surface to surface
  std::optional<double> over;  // m; default the shortest of the runs
  Mark mark;
};

enum class LoadState { on, off, standby };

struct Load {
  std::string name;  // "" if not named
  Name at;
  std::pair<Name, Name> between;  // wires of the circuit, or CIRCUIT.wire
  std::string kind;
  std::optional<double> power;        // W
  std::optional<double> apparent;     // VA
  std::optional<double> current;      // A
  std::optional<double> resistance;   // ohm
  std::optional<double> capacitance;  // F, in parallel
  std::optional<double> power_factor;
  LoadState state = LoadState::on;
  Mark mark;
};

enum class SwitchKind { contact, three_way, four_way };

/// A contact joins `wires[0]` and `wires[1]` when closed. three_way: wires[0] is common, wires[1..]
/// the throws. four_way: wires[0], wires[1] on one side, wires[2], wires[3] on the other; position 1
/// straight, 2 crossed.
struct Switch {
  std::string name;
  Name at;
  SwitchKind kind = SwitchKind::contact;
  std::vector<Name> wires;
  bool closed = false;
  int position = 1;
  Mark mark;
};

struct Circuit {
  Name name;
  std::optional<Name> panel;
  std::vector<PolePosition> poles;     // slot and line
  std::vector<bool> breaker;           // one a pole; all true if not given
  std::optional<Name> cable;           // factory cable; its cores come first among the wires
  std::map<std::string, Name> rename;  // core role -> wire name
  std::vector<Wire> wires;
  std::vector<Name> runs;
  bool ring = false;
  std::map<std::string, Name> lands;       // wire -> "none", "neutral", "ground", a line
  std::optional<std::vector<Load>> loads;  // nullopt: unknown
  std::vector<Switch> switches;
};

struct Bond {
  std::string name;
  Name at;
  std::vector<Name> joins;  // CIRCUIT.wire, RUN.raceway, "ground", "neutral", two or more
  double resistance = 0.0;  // ohm; 0: joined
  Mark mark;
};

struct Cut {
  Name at;
  Name wire;  // CIRCUIT.wire
  Name side;  // run
};

struct Leak {
  Name at;
  std::pair<Name, Name> between;  // CIRCUIT.wire, RUN.raceway, "ground"
  double resistance = 0.0;        // ohm
  Mark mark;
};

struct Limits {
  std::optional<double> live_like;  // V
  std::optional<double> dead_like;  // V
  double body_current = 0.5e-3;     // A
};

/// Two-sided spreads: p05 and p95, in SI, or relative for `spread`.
struct Uncertainty {
  double length_spread = 0.1;                                     // relative
  std::map<std::string, std::pair<double, double>> permittivity;  // by material
  std::optional<std::pair<double, double>> clearance;             // m
  std::pair<double, double> wander_length{0.5, 5.0};              // m
  std::optional<double> unlisted_load;                            // probability
  std::vector<Name> may_vary;
};

/// A named state of the works, as changes to the model.
struct Stage {
  Name name;
  std::vector<std::pair<Name, Name>> set;  // "LP2-9.breaker" -> "off"
  std::vector<Bond> bonds;
  std::vector<Cut> cuts;
  std::vector<Name> remove;  // circuits
};

struct Building {
  std::string file;    // as the user named it
  std::string sha256;  // of its bytes, hex
  std::string title;
  double frequency = 60.0;           // Hz
  double temperature = 20.0;         // degC
  double earth_resistivity = 100.0;  // ohm m
  std::vector<Supply> supplies;
  std::vector<Panel> panels;
  std::vector<Place> places;
  std::vector<Run> runs;
  std::vector<Alongside> alongside;
  std::vector<Circuit> circuits;
  std::vector<Bond> bonds;
  std::vector<Cut> cuts;
  std::vector<Leak> leaks;
  std::vector<InstrumentType> instruments;  // resolved; default dmm, low_impedance, analog_5k
  Limits limits;
  Uncertainty uncertainty;
  std::vector<Stage> stages;
  Catalogue catalogue;                // built-in, with the model's own entries on top
  std::vector<std::string> defaults;  // what the reader filled in, in words
};

}  // namespace netlists
