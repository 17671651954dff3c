// A model written in a test, read, checked, lowered and solved.
#pragma once

#include <gtest/gtest.h>

#include <string>

#include "engine/solve.h"
#include "io/model_file.h"
#include "netlists/judge.h"
#include "netlists/lower.h"

namespace netlists {

inline Building building_of(const std::string& text) {
  io::ModelFile file = io::read_model_text("format: idlewire/1\ntitle: test\n" + text, "test.yaml");
  std::vector<Fault> faults = file.faults;
  for (const Fault& fault : validate(file.building)) faults.push_back(fault);
  for (const Fault& fault : faults) {
    if (fault.severity == Severity::error) ADD_FAILURE() << to_string(fault);
  }
  return file.building;
}

/// The head of a model: circuit L1 of hot, neutral and ground at slot 1 of panel LP, 120/240 V, on run C1 to
/// `place`. The circuit's further keys follow, indented by four.
inline std::string one_circuit(const std::string& length, const std::string& raceway,
                               const std::string& place = "Room") {
  return "supplies: {T1: {system: 120/240}}\npanels: {LP: {supply: T1}}\n"
         "runs: {C1: {from: LP, to: " +
         place + ", length: " + length + ", raceway: " + raceway +
         "}}\n"
         "circuits:\n"
         "  L1:\n"
         "    panel: LP\n"
         "    slot: 1\n"
         "    wires: {hot: THHN 12, neutral: THHN 12, ground: THHN 12}\n"
         "    runs: [C1]\n";
}

/// A model solved in its first stage, with seed 1.
struct Solved {
  Building building;
  Lowered lowered;
  engine::SolvedNetwork solution;

  explicit Solved(const std::string& text, const std::string& stage = "")
      : building(building_of(text)), lowered(lower(building, stage, 1)), solution(lowered.network) {}

  engine::Complex volts(const std::string& name, const std::string& to = "") const {
    return solution.volts(node(name), to.empty() ? 0 : node(to));
  }
  int node(const std::string& name) const {
    const auto found = lowered.at.find(name);
    if (found == lowered.at.end()) {
      ADD_FAILURE() << "no conductor or ground '" << name << "'";
      return 0;
    }
    return found->second;
  }
  Findings findings() const { return judge(building, lowered, solution); }
};

inline const ConductorFindings& conductor(const Findings& findings, const std::string& id) {
  for (const ConductorFindings& found : findings.conductors) {
    if (found.id == id) return found;
  }
  ADD_FAILURE() << "no conductor '" << id << "'";
  static const ConductorFindings none;
  return none;
}

inline double reading(const ConductorFindings& found, const std::string& place, const std::string& instrument,
                      const std::string& reference) {
  for (const PlaceFindings& at : found.places) {
    if (at.place != place) continue;
    for (const Reading& reading : at.readings) {
      if (reading.instrument == instrument && reading.reference == reference) return reading.volts;
    }
  }
  ADD_FAILURE() << found.id << ": no reading at " << place << " of " << instrument << " to " << reference;
  return -1.0;
}

}  // namespace netlists
