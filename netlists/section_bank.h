// Sections solved once for each distinct content, from which every draw is put together.
#pragma once

#include <Eigen/Core>
#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "engine/network.h"
#include "netlists/building.h"
#include "netlists/sections.h"

namespace netlists {

/// What a draw makes of one stretch.
struct SectionDraw {
  std::vector<int> picks;            // how often each layout is met along the run; some one at least
  Eigen::VectorXd log_permittivity;  // ln of each insulation's permittivity over its central one
  std::optional<double> clearance;   // m; the run's own if not given
};

/// The layouts of one content, one by one, and how they follow what else is uncertain.
///
/// Between conductors and from each to earth lie partial capacitances, and those are what is scaled: by the
/// permittivities along the exact logarithmic derivative at the centre, by the clearance along solved values
/// between which ln c is linear in ln h. So every draw keeps the Maxwell form.
class SectionContent {
 public:
  /// Partial capacitances' logarithmic derivatives by one insulation; on the diagonal those to earth.
  struct Slope {
    int insulation = 0;  // in SectionBank::insulations()
    Eigen::MatrixXd log_slope;
  };

  engine::LineMatrices drawn(const SectionDraw& draw) const;

  /// Of this content among those of the bank.
  int number() const { return number_; }
  int layout_count() const { return static_cast<int>(layouts_.size()); }
  const engine::LineMatrices& layout(int number) const { return layouts_[number]; }
  const std::vector<Slope>& slopes() const { return slopes_; }
  /// Logarithms of what the partial capacitances are at this clearance (m) over what they are at the run's
  /// own.
  Eigen::MatrixXd log_clearance_factor(double clearance) const;

 private:
  friend class SectionBank;
  int number_ = 0;
  std::vector<engine::LineMatrices> layouts_;
  std::vector<Slope> slopes_;
  std::vector<double> log_heights_;              // rising
  std::vector<Eigen::MatrixXd> height_factors_;  // ln c over ln c at the run's own clearance, as in Slope
};

/// Scales partial capacitances, and the conductances beside them, by exp(logarithms), entry by entry; on the
/// diagonal of `logarithms` those to earth.
void scale_partials(engine::LineMatrices& matrices, const Eigen::MatrixXd& logarithms);

class SectionBank {
 public:
  /// Solves the sections of `stretches`, on `threads` threads. Clearances of runs that give none are spread
  /// over `clearance` (m, p05 and p95).
  SectionBank(const Building& building, const SectionLibrary& library, const std::vector<Stretch>& stretches,
              std::pair<double, double> clearance, int threads);

  const SectionContent& content(const Stretch& stretch) const;
  const std::vector<Insulation>& insulations() const { return insulations_; }
  int solved() const { return solved_; }  // sections

 private:
  const SectionLibrary& library_;
  std::map<std::string, SectionContent> contents_;  // by signature
  std::vector<Insulation> insulations_;
  int solved_ = 0;
};

}  // namespace netlists
