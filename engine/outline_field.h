// What circles and panels of a region put on each other, geometry alone.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <vector>

#include "engine/outline_region.h"
#include "engine/outline_resolution.h"

namespace engine {

/// The field of charges in empty space within the region's boundary. Unknowns are the outgoing harmonics of
/// the circles, then the charge per length at each point, both in units of 2 pi epsilon_0 (harmonics
/// normalised as in HarmonicLayout); rows are the harmonics that arrive (V) and the field along the outward
/// normal (V/m), its jump at the point's own charge left out.
class OutlineField {
 public:
  OutlineField(const OutlineRegion& region, OutlineResolution resolution);

  int size() const { return static_cast<int>(matrix_.rows()); }
  const std::vector<HarmonicCircle>& circles() const { return resolution_.circles; }
  const PanelledOutlines& outlines() const { return resolution_.outlines; }
  int harmonic_row(size_t circle, int n) const;  // of the cosine; its sine is next
  int point_row(int point) const { return harmonics_ + point; }

  const Eigen::MatrixXd& matrix() const { return matrix_; }
  /// What a unit charge on a circle's axis brings, per row.
  Eigen::VectorXd from_charge(int circle) const;
  /// Potentials on the axes of the circles, per unknown.
  Eigen::MatrixXd at_circles() const;
  /// Potential at a place away from all outlines, per unknown.
  Eigen::RowVectorXd at_place(std::complex<double> place) const;
  /// Potential at a place of a unit charge on a circle's axis.
  double charge_at_place(int circle, std::complex<double> place) const;
  /// Potentials at circles per charge on their axes.
  Eigen::MatrixXd between_charges() const;
  /// m, of each unknown that is a point of one outline; zero elsewhere.
  Eigen::VectorXd lengths_of(int outline) const;

 private:
  void find_nesting();
  void fill_circles();
  void fill_circles_and_points();
  void fill_points();
  void add_direct_field(int panel);
  void add_images(int panel);

  const OutlineRegion& region_;
  OutlineResolution resolution_;
  HarmonicLayout layout_;
  int harmonics_ = 0;
  Eigen::MatrixXd among_circles_;  // charges first, symmetric
  Eigen::MatrixXd matrix_;
  std::vector<std::vector<bool>> within_;  // [outline][other]; also of itself
};

}  // namespace engine
