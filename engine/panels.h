// Outlines cut into panels with Gauss points, and the field of a charged panel however near.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <functional>
#include <vector>

#include "engine/outline.h"

namespace engine {

/// A straight side or an arc of an outline, run through counter-clockwise.
struct Piece {
  std::complex<double> begin, end;  // m
  std::complex<double> centre;      // m, of an arc
  double radius = 0.0;              // m, of an arc; 0: a straight side
  double first_angle = 0.0;         // rad
  int curve = 0;                    // pieces of one number are parts of one circle or line
  bool ends_smoothly = true;        // no jump of the curvature and no corner at its end

  double length() const;
  std::complex<double> point(double part) const;    // m, part from 0 to 1
  std::complex<double> tangent(double part) const;  // of length 1
};
std::vector<Piece> pieces_of(const Outline& outline);

/// A part of a piece with Gauss points.
struct Panel {
  int outline = 0;                          // number of the outline it belongs to
  int curve = 0;                            // as in Piece
  int first = 0;                            // of its points among all
  std::complex<double> begin, middle, end;  // m
  double length = 0.0;                      // m
  double to_end = 0.0;                      // m, along its piece to the nearer end of that
};

/// The points of all outlines.
struct PanelPoints {
  std::vector<std::complex<double>> place;    // m
  std::vector<std::complex<double>> tangent;  // of length 1, counter-clockwise
  std::vector<double> weight;                 // m, of length
  std::vector<double> curvature;              // 1/m
  std::vector<int> panel;                     // that they belong to

  int size() const { return static_cast<int>(place.size()); }
  /// Outward, of length 1.
  std::complex<double> normal(int i) const {
    return tangent[static_cast<size_t>(i)] * std::complex<double>(0.0, -1.0);
  }
};

struct PanelledOutlines {
  int order = 0;  // Gauss points a panel
  std::vector<Panel> panels;
  PanelPoints points;
};

/// The most a panel may measure (m) with its middle here; `panel` has no points yet.
using LargestPanel = std::function<double(const Panel& panel)>;

/// Halves the pieces of each outline until each panel is as `largest` allows. The size next to a piece's
/// end that is not smooth is at most `junction` of the outline's rounding, and grows away from it. Throws
/// std::length_error where that takes more than `most_points`.
PanelledOutlines panelled(const std::vector<Outline>& outlines, int order, double junction, int most_points,
                          const LargestPanel& largest);

/// The charges of a panel as they stand (`direct`) or as an image: at places that a reflection has turned
/// round, so that `outside` of a closed outline is to the left of them instead of to the right.
struct SourcePanel {
  std::vector<std::complex<double>> places;  // m, of the charges
  std::vector<std::complex<double>> turns;   // charge over dz there: |dz of the outline| / dz of the place
  std::complex<double> begin, middle, end;   // m
  double length = 0.0;                       // m
};

/// Weights w so that sum w_k f_k is the integral of f(z) / (z - target) |dz of the outline| over a panel,
/// exact for polynomials f up to its order however near the target is: product integration on complex
/// powers. Source: engine/README.md, "Capacitance by boundary integrals".
class CloseField {
 public:
  explicit CloseField(SourcePanel source);
  /// Whether ordinary Gauss weights would do for the target.
  bool is_far(std::complex<double> target) const;
  /// `left`: on which side of the panel the target lies, should it lie on it but for rounding.
  Eigen::VectorXcd weights(std::complex<double> target, bool left) const;

 private:
  std::complex<double> logarithm(std::complex<double> target, bool left) const;

  SourcePanel source_;
  std::complex<double> middle_, half_;  // of the chord
  double far_ = 0.0;                    // sum of half axes of the ellipse beyond which Gauss does
  Eigen::MatrixXcd to_weights_;         // from moments
};

}  // namespace engine
