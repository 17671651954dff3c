// What the program found: the one thing that every writer writes.
#pragma once

#include <complex>
#include <optional>
#include <string>
#include <vector>

#include "netlists/catalogue.h"

namespace netlists {

enum class Condition { grounded, energised, through_load, grounded_through_load, floating };
enum class Appearance { live_like, unclear, dead_like };
enum class Misleads { no, false_dead, false_live };

/// Percentiles of a quantity over the draws and their standard errors, all in the unit of the quantity.
struct Band {
  double p05 = 0.0;
  double p50 = 0.0;
  double p95 = 0.0;
  double p05_error = 0.0;
  double p50_error = 0.0;
  double p95_error = 0.0;
};

/// What a needle instrument shows on one of its ranges.
struct RangeReading {
  double full_scale = 0.0;  // V
  double volts = 0.0;       // V; over full_scale: off scale
};

struct Reading {
  std::string instrument;               // name
  std::string reference;                // "ground", "earth" or CIRCUIT.wire
  std::optional<double> range;          // V full scale, where the needle matters
  double volts = 0.0;                   // V RMS, the instrument's loading included
  std::optional<Band> band;             // V, over the draws
  std::vector<RangeReading> on_ranges;  // ascending; empty for an instrument of one input
  std::optional<double> swapped;        // V with its leads swapped, between soft points where over 5 % apart
  std::optional<double> lead_in_air;    // V with its common lead touching nothing; readings to ground only
  Appearance appearance = Appearance::unclear;
  bool judged = false;     // to ground or to the own neutral, by a voltmeter
  bool indicator = false;  // only lights, buzzes or glows
  bool indicates = false;  // indicators: at or over the threshold
};

struct ContributionEntry {
  std::string from;            // CIRCUIT.wire, RUN.raceway, "supply:NAME", "others"
  std::string path;            // "electric" | "magnetic" | "conductive"
  std::complex<double> volts;  // V RMS
};

/// What a coupled voltage or current does to something or somebody.
struct Effect {
  std::string what;   // "lamp_glows", "input_reads_on", "coil_stays_in", "device_trips", "person_feels", ...
  std::string where;  // place
  std::string subject;     // the load, device or touch path in words
  double value = 0.0;      // of `unit`
  double threshold = 0.0;  // of `unit`, from here on it happens
  std::string unit;        // "V", "A"
  std::string source;      // of the threshold
  bool happens = false;
  std::optional<double> run_length;  // m, at which the margin is gone; null where length does not decide
};

/// An uncertain quantity and how much it moves the reading a conductor is ranked by.
struct Influence {
  std::string quantity;     // "clearance of C3", "permittivity of PVC"
  double derivative = 0.0;  // V per standard deviation of the quantity, signed
  double share = 0.0;       // of the variance, 0 to 1
};

struct PlaceFindings {
  std::string place;
  std::string reference;                      // "ground" or "earth"
  std::complex<double> open_circuit;          // V RMS, to the reference
  std::complex<double> source_impedance;      // ohm, to the reference
  double short_circuit = 0.0;                 // A
  std::optional<Band> open_circuit_band;      // V, magnitudes over the draws
  std::optional<Band> source_impedance_band;  // ohm, magnitudes
  std::optional<Band> short_circuit_band;     // A
  std::vector<Reading> readings;
  std::vector<ContributionEntry> contributions;  // empty for stiffly fed conductors
};

/// What tells coupling from a real source (design: U behind U / 0.5 mA).
struct Settle {
  std::optional<std::string> instrument;    // null: none separates them
  double expect = 0.0;                      // V, where an instrument does
  double treat_as_live_above = 0.0;         // V, never above T = U R / (R + U/0.5 mA)
  std::string why;                          // words for people, with what would settle it otherwise
  std::optional<Band> band = std::nullopt;  // V, of that reading over the draws
  std::optional<double> coupling_taken_for_live = std::nullopt;    // chance, over the draws
  std::optional<double> source_taken_for_coupling = std::nullopt;  // chance, of the weakest that is felt
};

/// What the three lamps of a plug-in tester show at a receptacle.
struct ReceptaclePattern {
  std::string instrument;
  std::string place;
  std::string circuit;
  double hot_neutral = 0.0;  // V across each lamp, all three loading
  double hot_ground = 0.0;
  double neutral_ground = 0.0;
  std::string lit;      // "L-N, L-G", "none"
  std::string meaning;  // what the pattern is taken for
};

struct ConductorFindings {
  std::string id;  // CIRCUIT.wire or RUN.raceway
  std::optional<int> rank;
  Condition condition = Condition::floating;
  Misleads misleads = Misleads::no;
  std::optional<double> probability;  // that it misleads in the way said, over the draws; null without
  double probability_error = 0.0;     // standard error
  double expected_reading = 0.0;      // V, the one it is ranked by
  bool not_predicted = false;         // shares a run with a drive's output
  bool leakage = false;               // conductance carries over a tenth of what it reads somewhere
  bool isolated_supply = false;       // belongs to a supply without a grounded pole
  std::string supply;                 // of an energised conductor
  Settle settle;
  std::vector<Influence> influences;  // largest share first; empty without draws
  std::vector<PlaceFindings> places;
};

struct Findings {
  std::string title;
  std::string model_sha256;
  std::string program_version;
  double frequency = 60.0;  // Hz
  std::string stage;
  unsigned seed = 1;
  int draws = 0;
  std::vector<Effect> effects;                // those that can hurt first
  std::vector<ReceptaclePattern> patterns;    // of receptacle testers in the model's list
  std::vector<ConductorFindings> conductors;  // ranked first, by rank; then the others in model order
  std::vector<std::string> states;            // every breaker and switch state assumed, in words
  std::vector<std::string> assumptions;
  std::vector<std::string> warnings;
  std::vector<InstrumentType> instruments;  // of the model, in its order
  double residual = 0.0;                    // of the network solution
};

std::string to_string(Condition condition);
std::string to_string(Appearance appearance);
std::string to_string(Misleads misleads);  // "no", "false_dead", "false_live"

/// The caution of every output for people.
const std::string& caution();

}  // namespace netlists
