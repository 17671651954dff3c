// What lies in each run, drawn at random as pulling leaves it, and its matrices per metre.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "engine/network.h"
#include "netlists/building.h"
#include "netlists/lower.h"
#include "netlists/wiring.h"

namespace netlists {

/// A section's rows with what they mean.
struct StretchRow {
  int wire = -1;  // index into Wiring::wires; -1: the raceway itself
  int run = -1;   // index into Building::runs
};

/// An insulating body of one build: a wire's insulation, a cable's jacket, a plastic raceway.
struct Insulation {
  std::string owner;     // catalogue name of the wire, cable or raceway
  std::string material;  // catalogue name
};

/// How the capacitance matrix of a layout follows one permittivity.
struct InsulationSlope {
  Insulation insulation;
  Eigen::MatrixXd slope;  // F/m, dC / d ln(permittivity), n x n
};

/// How many layouts are averaged at most.
inline constexpr int k_most_layouts = 16;

/// Draws sections and keeps the matrices of those with equal content, so that each is solved once.
class SectionLibrary {
 public:
  /// Shares `cache`, if given, with libraries of the same seed and the same catalogue.
  SectionLibrary(const Building& building, const Wiring& wiring, unsigned seed,
                 std::shared_ptr<SectionCache> cache = nullptr);
  ~SectionLibrary();

  /// Rows of a stretch, in the order of its matrices.
  std::vector<StretchRow> rows(const Stretch& stretch) const;

  /// Matrices averaged over as many layouts as `length` (m) holds wander lengths, at most 16.
  std::shared_ptr<const engine::LineMatrices> matrices(const Stretch& stretch, double length);

  /// Layout number `draw` of a stretch, as a section to look at.
  RunSection section(const Stretch& stretch, int draw) const;

  /// Equal for stretches of equal content, which share their layouts.
  std::string signature(const Stretch& stretch) const;

  /// False where there is but one layout: positions are given, or a single cable lies in the open.
  bool varies(const Stretch& stretch) const;

  /// Matrices of layout `number` alone; `clearance` (m), if given, stands for that of every run in it.
  /// Those of numbers 0 to n - 1 are what matrices() averages, and are kept by it. Safe from several threads
  /// at once, while none calls matrices().
  engine::LineMatrices one_layout(const Stretch& stretch, int number,
                                  std::optional<double> clearance = std::nullopt) const;

  /// Derivatives of layout `number` by the permittivity of each insulation in it: exact ones of a solution to
  /// 1e-2 (engine/capacitance.h says of what). May be called likewise.
  std::vector<InsulationSlope> slopes(const Stretch& stretch, int number) const;

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
