// What lies in each run, drawn at random as pulling leaves it, and its matrices per metre.
#pragma once

#include <map>
#include <memory>
#include <string>
#include <vector>

#include "engine/network.h"
#include "netlists/building.h"
#include "netlists/lower.h"
#include "netlists/wiring.h"

namespace netlists {

/// One stretch of one or more runs that share a section: a run, or the joint part of runs that lie
/// alongside each other.
struct Stretch {
  std::vector<int> runs;        // indices into Building::runs, in the order of their names
  std::vector<double> spacing;  // m, between neighbours, surface to surface; size runs - 1
};

/// A section's rows with what they mean.
struct StretchRow {
  int wire = -1;  // index into Wiring::wires; -1: the raceway itself
  int run = -1;   // index into Building::runs
};

/// Draws sections and keeps the matrices of those with equal content, so that each is solved once.
class SectionLibrary {
 public:
  SectionLibrary(const Building& building, const Wiring& wiring, unsigned seed);
  ~SectionLibrary();

  /// Rows of a stretch, in the order of its matrices.
  std::vector<StretchRow> rows(const Stretch& stretch) const;

  /// Matrices averaged over as many layouts as `length` (m) holds wander lengths, at most 16.
  std::shared_ptr<const engine::LineMatrices> matrices(const Stretch& stretch, double length);

  /// Layout number `draw` of a stretch, as a section to look at.
  RunSection section(const Stretch& stretch, int draw) const;

  /// What the sections rest on, in words, for the list of assumptions.
  std::vector<std::string> assumptions() const;

  /// Sections solved so far, and those served from the library.
  int solved() const;
  int reused() const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

/// Name of the metal raceway of a run as a conductor: "C1.raceway".
std::string raceway_id(const Run& run);

/// Clearance of a run, m: its own, or the 50 mm taken where the model gives none.
double clearance_of(const Run& run);

}  // namespace netlists
