// Findings made by hand, for the tests of the writers. The figures are no model's answer.
#pragma once

#include "netlists/findings.h"

namespace tests {

inline netlists::Reading reading(const std::string& instrument, const std::string& reference, double volts,
                                 netlists::Appearance appearance, bool judged) {
  netlists::Reading out;
  out.instrument = instrument;
  out.reference = reference;
  out.volts = volts;
  out.appearance = appearance;
  out.judged = judged;
  return out;
}

inline netlists::InstrumentType voltmeter(const std::string& name, double resistance) {
  netlists::InstrumentType out;
  out.name = name;
  out.resistance = resistance;
  return out;
}

/// A place where a conductor is reached, its volts and ohm to ground; no readings yet.
inline netlists::PlaceFindings reached(const std::string& name, std::complex<double> volts,
                                       std::complex<double> ohms, double amps) {
  netlists::PlaceFindings place;
  place.place = name;
  place.reference = "ground";
  place.open_circuit = volts;
  place.source_impedance = ohms;
  place.short_circuit = amps;
  return place;
}

/// A leg of an isolated supply that a low-impedance instrument reads as dead.
inline netlists::ConductorFindings isolated_leg() {
  using netlists::Appearance;
  netlists::ConductorFindings leg;
  leg.id = "ISO-1.hot";
  leg.rank = 1;
  leg.condition = netlists::Condition::energised;
  leg.misleads = netlists::Misleads::false_dead;
  leg.expected_reading = 0.41;
  leg.isolated_supply = true;
  leg.supply = "IT1";
  leg.settle.why = "No reading to ground tells an isolated leg from a dead conductor";
  netlists::PlaceFindings place = reached("Room 4", {59.0, 3.0}, {10.0, -430e3}, 1.37e-4);
  place.readings = {reading("dmm", "ground", 58.0, Appearance::live_like, true),
                    reading("low_impedance", "ground", 0.41, Appearance::dead_like, true),
                    reading("dmm", "ISO-1.second", 120.0, Appearance::live_like, false),
                    reading("low_impedance", "ISO-1.second", 119.6, Appearance::live_like, false)};
  place.contributions = {{"supply:IT1", "conductive", {59.0, 3.0}}};
  leg.places = {place};
  return leg;
}

/// A spare that a digital multimeter reads as live.
inline netlists::ConductorFindings coupled_spare() {
  using netlists::Appearance;
  netlists::ConductorFindings spare;
  spare.id = "spare-1.a";
  spare.rank = 2;
  spare.misleads = netlists::Misleads::false_live;
  spare.expected_reading = 61.2;
  spare.settle = {"low_impedance", 0.35, 1.4829, "Coupling alone stays below the limit"};
  netlists::PlaceFindings far = reached("Room 210", {64.0, -2.5}, {9.0e3, -530e3}, 1.2084e-4);
  far.readings = {reading("dmm", "ground", 61.2, Appearance::live_like, true),
                  reading("low_impedance", "ground", 0.35, Appearance::dead_like, true),
                  reading("dmm", "LP2-7.hot", 58.9, Appearance::live_like, false)};
  netlists::Reading neon = reading("neon_tester", "ground", 12.0, Appearance::unclear, false);
  neon.indicator = true;
  far.readings.push_back(neon);
  far.contributions = {{"LP2-7.hot", "electric", {70.0, -2.0}},
                       {"LP2-9.hot", "electric", {-6.0, -0.6}},
                       {"others", "magnetic", {0.0, 0.1}}};
  netlists::PlaceFindings near = far;
  near.place = "JB-4";
  near.readings[0].volts = 55.0;
  spare.places = {near, far};
  return spare;
}

inline netlists::ConductorFindings fed(const std::string& id, netlists::Condition condition,
                                       const std::string& supply) {
  netlists::ConductorFindings out;
  out.id = id;
  out.condition = condition;
  out.supply = supply;
  out.places = {reached("LP2", {120.0, 0.0}, {0.2, 0.1}, 537.0)};
  return out;
}

inline netlists::ConductorFindings quiet_spare() {
  netlists::ConductorFindings quiet = coupled_spare();
  quiet.id = "old-14.hot";
  quiet.rank.reset();
  quiet.misleads = netlists::Misleads::no;
  quiet.not_predicted = true;
  for (auto& place : quiet.places)
    for (auto& one : place.readings) {
      one.volts *= 0.05;
      one.appearance = netlists::Appearance::unclear;
    }
  return quiet;
}

inline netlists::Findings sample_findings() {
  netlists::Findings findings;
  findings.title = "Quarry Lane Annex, level 2";
  findings.model_sha256 = "3f2a9c5e71d04b8890aa3f2a9c5e71d04b8890aa3f2a9c5e71d04b8890aa1234";
  findings.program_version = "0.1.0";
  findings.stage = "As found";
  findings.conductors = {isolated_leg(), coupled_spare(), quiet_spare(),
                         fed("LP2-7.hot", netlists::Condition::energised, "T1"),
                         fed("LP2-7.neutral", netlists::Condition::grounded, "T1")};
  findings.states = {"breaker LP2-7 on", "switch LP2-9.S1 open"};
  findings.assumptions = {"clearance of C1 taken as 50 mm"};
  findings.warnings = {"C2: net current whose return is not in the model"};
  findings.instruments = {voltmeter("dmm", 10e6), voltmeter("low_impedance", 3e3)};
  return findings;
}

}  // namespace tests
