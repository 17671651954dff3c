#include "engine/panels.h"

#include <Eigen/LU>
#include <algorithm>
#include <boost/math/special_functions/legendre.hpp>
#include <cmath>
#include <numbers>
#include <stdexcept>
#include <string>

namespace engine {
namespace {

using Complex = std::complex<double>;

constexpr Complex k_j(0.0, 1.0);
constexpr int k_most_halvings = 40;

Complex as_complex(const Eigen::Vector2d& v) { return {v.x(), v.y()}; }

struct GaussRule {
  std::vector<double> place, weight;  // on 0 to 1
};

GaussRule gauss_rule(int order) {
  GaussRule rule;
  for (const double x : boost::math::legendre_p_zeros<double>(order))
    for (const double sign : {-1.0, 1.0}) {
      if (x == 0.0 && sign > 0.0) continue;  // the rule's middle counts once
      const double slope = boost::math::legendre_p_prime(order, x);
      rule.place.push_back((1.0 + sign * x) / 2);
      rule.weight.push_back(1.0 / ((1.0 - x * x) * slope * slope));
    }
  return rule;
}

Panel part_of(const Piece& piece, int outline, double from, double to) {
  return {outline,
          piece.curve,
          0,
          piece.point(from),
          piece.point((from + to) / 2),
          piece.point(to),
          piece.length() * (to - from),
          piece.length() * std::min(from, 1.0 - to)};
}

// Cuts one piece; `at_begin` and `at_end` limit what touches its ends.
class Cutting {
 public:
  Cutting(PanelledOutlines& result, const GaussRule& rule, int most_points, const LargestPanel& largest)
      : result_(result), rule_(rule), most_points_(most_points), largest_(largest) {}

  void cut(const Piece& piece, int outline, double at_begin, double at_end) {
    at_begin_ = at_begin;
    at_end_ = at_end;
    cut(piece, outline, 0.0, 1.0, 0);
  }

 private:
  void cut(const Piece& piece, int outline, double from, double to, int halvings) {
    const Panel panel = part_of(piece, outline, from, to);
    const double whole = piece.length();
    const double near_ends =
        std::min(std::max(at_begin_, 2 * from * whole), std::max(at_end_, 2 * (1.0 - to) * whole));
    if (halvings == k_most_halvings || panel.length <= std::min(near_ends, largest_(panel)))
      return add(piece, panel, from, to);
    const double middle = (from + to) / 2;
    cut(piece, outline, from, middle, halvings + 1);
    cut(piece, outline, middle, to, halvings + 1);
  }

  void add(const Piece& piece, Panel panel, double from, double to) {
    PanelPoints& points = result_.points;
    if (points.size() + result_.order > most_points_)
      throw std::length_error("a section with outlines that are not round needs more than " +
                              std::to_string(most_points_) + " points on them");
    panel.first = points.size();
    for (size_t k = 0; k < rule_.place.size(); ++k) {
      const double part = from + (to - from) * rule_.place[k];
      points.place.push_back(piece.point(part));
      points.tangent.push_back(piece.tangent(part));
      points.weight.push_back(panel.length * rule_.weight[k]);
      points.curvature.push_back(piece.radius > 0.0 ? 1.0 / piece.radius : 0.0);
      points.panel.push_back(static_cast<int>(result_.panels.size()));
    }
    result_.panels.push_back(panel);
  }

  PanelledOutlines& result_;
  const GaussRule& rule_;
  int most_points_;
  const LargestPanel& largest_;
  double at_begin_ = 0.0, at_end_ = 0.0;
};

}  // namespace

double Piece::length() const { return radius > 0.0 ? radius * std::numbers::pi / 2 : std::abs(end - begin); }

Complex Piece::point(double part) const {
  if (radius > 0.0) return centre + std::polar(radius, first_angle + part * std::numbers::pi / 2);
  return part <= 0.5 ? begin + part * (end - begin) : end - (1.0 - part) * (end - begin);
}

Complex Piece::tangent(double part) const {
  if (radius > 0.0) return std::polar(1.0, first_angle + (part + 1.0) * std::numbers::pi / 2);
  return (end - begin) / std::abs(end - begin);
}

std::vector<Piece> pieces_of(const Outline& outline) {
  const auto corners = outline.corners();
  std::vector<Piece> pieces;
  int curve = 0;
  for (size_t k = 0; k < 4; ++k) {
    const Complex here = as_complex(corners[k]), next = as_complex(corners[(k + 1) % 4]);
    const double angle = outline.core.turn + static_cast<double>(k) * std::numbers::pi / 2;
    const Complex out = std::polar(outline.rounding, angle + std::numbers::pi / 2);
    if (outline.rounding > 0.0)
      pieces.push_back({here + out / k_j, here + out, here, outline.rounding, angle, curve, here == next});
    if (here == next) continue;
    pieces.push_back({here + out, next + out, {}, 0.0, 0.0, curve + 1, false});
    curve += 2;
  }
  if (as_complex(corners[3]) == as_complex(corners[0]))  // the last arc goes on in the first
    for (Piece& piece : pieces)
      if (piece.curve == curve) piece.curve = 0;
  return pieces;
}

PanelledOutlines panelled(const std::vector<Outline>& outlines, int order, double junction, int most_points,
                          const LargestPanel& largest) {
  PanelledOutlines result;
  result.order = order;
  const GaussRule rule = gauss_rule(order);
  Cutting cutting(result, rule, most_points, largest);
  for (size_t k = 0; k < outlines.size(); ++k) {
    const std::vector<Piece> pieces = pieces_of(outlines[k]);
    // Straight sides that meet at a right angle keep their charge smooth up to the corner.
    const double limit = outlines[k].rounding > 0.0 ? junction * outlines[k].rounding
                                                    : std::numeric_limits<double>::infinity();
    for (size_t i = 0; i < pieces.size(); ++i) {
      const auto at = [&](bool smooth) { return smooth ? std::numeric_limits<double>::infinity() : limit; };
      const Piece& before = pieces[(i + pieces.size() - 1) % pieces.size()];
      cutting.cut(pieces[i], static_cast<int>(k), at(before.ends_smoothly), at(pieces[i].ends_smoothly));
    }
  }
  return result;
}

CloseField::CloseField(SourcePanel source)
    : source_(std::move(source)),
      middle_((source_.begin + source_.end) / 2.0),
      half_((source_.end - source_.begin) / 2.0) {
  const auto n = static_cast<Eigen::Index>(source_.places.size());
  // Gauss's error falls like far^(-2 n): to 1e-13, or at 4 as far as the moments' recurrence carries.
  far_ = std::min(4.0, std::pow(10.0, 6.5 / static_cast<double>(n)));
  Eigen::MatrixXcd powers(n, n);  // [k][point]
  for (Eigen::Index j = 0; j < n; ++j) {
    const Complex t = (source_.places[static_cast<size_t>(j)] - middle_) / half_;
    Complex power = 1.0;
    for (Eigen::Index k = 0; k < n; ++k, power *= t) powers(k, j) = power;
  }
  to_weights_ = powers.partialPivLu().inverse();
  for (Eigen::Index j = 0; j < n; ++j) to_weights_.row(j) *= source_.turns[static_cast<size_t>(j)];
}

bool CloseField::is_far(Complex target) const {
  const Complex z = (target - middle_) / half_;
  const double axes = (std::abs(z - 1.0) + std::abs(z + 1.0)) / 2;
  return axes + std::sqrt(std::max(0.0, axes * axes - 1.0)) > far_;
}

// The integral of dz / (z - target) along the panel. Its imaginary part is the angle that the panel fills,
// seen from the target; that of the chord is off by a full turn between the chord and the arc.
Complex CloseField::logarithm(Complex target, bool left) const {
  constexpr double k_turn = 2 * std::numbers::pi, k_on_it = 1e-5, k_straight = 1e-9;
  const Complex ratio = (source_.end - target) / (source_.begin - target);
  const double chord = std::arg(ratio);
  const double on_arc = std::arg((source_.end - source_.middle) / (source_.begin - source_.middle));
  const bool same_side = (chord < 0.0) == (on_arc < 0.0);
  double angle = chord;
  if (std::abs(std::abs(chord) - std::abs(on_arc)) < k_on_it &&
      (same_side || std::abs(on_arc) > std::numbers::pi - k_straight)) {
    if (left && angle < 0.0) angle += k_turn;
    if (!left && angle > 0.0) angle -= k_turn;
  } else if (same_side && std::abs(chord) > std::abs(on_arc) &&
             std::abs(on_arc) < std::numbers::pi - k_straight) {
    angle += chord < 0.0 ? k_turn : -k_turn;
  }
  return {std::log(std::abs(ratio)), angle};
}

Eigen::VectorXcd CloseField::weights(Complex target, bool left) const {
  const Complex z = (target - middle_) / half_;
  Eigen::VectorXcd moments(to_weights_.rows());
  moments(0) = logarithm(target, left);
  for (Eigen::Index k = 1; k < moments.size(); ++k)
    moments(k) = z * moments(k - 1) + (k % 2 == 1 ? 2.0 / static_cast<double>(k) : 0.0);
  return to_weights_ * moments;
}

}  // namespace engine
