// What the program knows of cables, raceways, supplies, instruments, loads and materials.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <vector>

namespace netlists {

struct Material {
  std::string name;
  double permittivity = 1.0;             // relative; insulators
  double permittivity_low = 1.0;         // p05
  double permittivity_high = 1.0;        // p95
  double loss_tangent = 0.0;             // tan delta at 50/60 Hz, 20 degC
  double conductivity = 0.0;             // S/m at 20 degC; metals, else 0
  double temperature_coefficient = 0.0;  // 1/K; metals
  double relative_permeability = 1.0;    // effective at small wall currents; metals
  std::string source;                    // where the values are published
};

struct InsulationLayer {
  std::string material;
  double thickness = 0.0;  // m
};

/// A single wire: a bare or insulated round conductor.
struct WireType {
  std::string name;  // "THHN 12"
  std::string metal = "copper";
  double conductor_diameter = 0.0;  // m, of the strand bundle
  int strands = 1;
  double resistance = 0.0;              // ohm/m at 20 degC, dc
  std::vector<InsulationLayer> layers;  // from the inside out
  std::string source;

  double outer_diameter() const {  // m
    double d = conductor_diameter;
    for (const auto& layer : layers) d += 2 * layer.thickness;
    return d;
  }
};

/// A core of a factory cable; x, y from the cable's centre, x along the width of a flat one.
struct Core {
  std::string role;  // "hot", "neutral", "ground", "1"
  WireType wire;     // wire.name is that of its type, for the table
  double x = 0.0;    // m
  double y = 0.0;    // m
};

struct CableArmour {
  std::string material;         // "aluminium" | "steel"
  double inner_diameter = 0.0;  // m
  double outer_diameter = 0.0;  // m
  double resistance = 0.0;      // ohm/m at 20 degC, dc, of the strip along its helix; 0: from the wall
};

struct CableType {
  std::string name;     // "NM-B 14-2"
  double width = 0.0;   // m, outside of jacket or armour; the diameter of a round cable
  double height = 0.0;  // m; equals width for a round cable
  std::vector<Core> cores;
  std::string jacket;             // material; "" if the armour is the outside
  double jacket_thickness = 0.0;  // m
  std::string filler;             // material of the space between cores and jacket
  std::optional<CableArmour> armour;
  std::string source;

  bool flat() const { return width != height; }
};

enum class RacewayKind { metal_tube, plastic_tube, wireway, tray, none };

struct RacewayType {
  std::string name;  // "EMT 3/4"
  RacewayKind kind = RacewayKind::none;
  double inner_diameter = 0.0;  // m, tubes
  double outer_diameter = 0.0;  // m, tubes
  double width = 0.0;           // m, wireway and tray, inside
  double height = 0.0;          // m, wireway and tray side, inside
  double wall = 0.0;            // m, sheet thickness of wireway and tray
  std::string material;
  std::string source;

  bool metal() const {
    return kind == RacewayKind::metal_tube || kind == RacewayKind::wireway || kind == RacewayKind::tray;
  }
};

/// One pole of a supply system with its no-load potential from the system's own reference point:
/// the neutral, or where there is none the centre of the windings.
struct Pole {
  std::string name;    // "A", "B", "C", "neutral"
  double volts = 0.0;  // V RMS
  double angle = 0.0;  // rad
};

struct SystemType {
  std::string name;                   // "208Y/120"
  std::vector<Pole> lines;            // in order: slots count through them
  bool neutral = true;                // has a neutral, at `neutral_volts`
  double neutral_volts = 0.0;         // V at angle 0; 0 where the neutral is the reference point
  std::string grounded_pole;          // what `grounding: solid` joins to ground: "neutral", "B"; "" for none
  std::string default_grounding;      // "solid" | "corner" | "none" | "isolated"
  double impedance_resistance = 0.0;  // ohm per line, default source impedance
  double impedance_reactance = 0.0;   // ohm per line at the nominal frequency
  std::string source;
};

enum class InstrumentKind {
  voltmeter,  // shows volts: its appearance is judged
  indicator   // only lights, buzzes or glows: a column of its own
};

struct InstrumentRange {
  double full_scale = 0.0;  // V
  double resistance = 0.0;  // ohm
};

struct InstrumentType {
  std::string name;   // "dmm"
  std::string label;  // "digital multimeter, ac volts"
  InstrumentKind kind = InstrumentKind::voltmeter;
  double resistance = 0.0;              // ohm, between its leads (with no ranges)
  double capacitance = 0.0;             // F, between its leads
  double common_to_earth = 0.0;         // F, from its common lead to earth: case, hand or mains filter
  bool three_lamps = false;             // a plug-in receptacle tester: its input is that of one lamp of three
  bool to_ground_only = false;          // has no second lead: its return is its user's body
  std::vector<InstrumentRange> ranges;  // ascending; empty: one input for all readings
  double threshold = 0.0;               // V, indicators: from here on it shows something
  std::string source;
};

/// What a load does when a voltage or current that nobody meant for it reaches its threshold.
struct LoadEffect {
  std::string what;      // "lamp_glows", "input_reads_on", "coil_stays_in", "device_trips", ...
  double volts = 0.0;    // V at its terminals, or that a rectifier feeds where `rectifies`
  double share = 0.0;    // of the nominal voltage, instead of `volts`
  double current = 0.0;  // A; inputs: the most they may draw and be surely off
  double volts_at_low_current =
      0.0;                 // V, inputs: surely off below it while the current stays below `current`
  bool rectifies = false;  // the load is a bridge rectifier into `volts`; `current` is the threshold
  double admittance_factor =
      1.0;  // its admittance at the threshold over that at work: 10 for a cold filament
  std::string source;
};

struct LoadKind {
  std::string name;  // "resistive"
  std::string label;
  double power_factor = 1.0;         // displacement, lagging positive; used with `power`
  bool capacitive = false;           // leading instead of lagging
  double standby_resistance = 0.0;   // ohm in parallel, off-state; 0: none
  double standby_capacitance = 0.0;  // F in parallel, off-state; 0: none
  double default_power = 0.0;        // W, where the model gives neither power, current nor impedance
  double nominal_volts = 0.0;        // V that it is made for; 0: those of its circuit
  double default_capacitance = 0.0;  // F, taken instead of `default_power` where it is not 0
  bool filter = false;               // a filter capacitor: counts for nothing in conditions
  std::vector<LoadEffect> effects;
  std::string source;
};

/// Values by name. Names are those of the trade.
struct Catalogue {
  std::map<std::string, Material> materials;
  std::map<std::string, WireType> wires;
  std::map<std::string, CableType> cables;
  std::map<std::string, RacewayType> raceways;
  std::map<std::string, SystemType> systems;
  std::map<std::string, InstrumentType> instruments;
  std::map<std::string, LoadKind> loads;
};

}  // namespace netlists
