#include "engine/outline_field.h"

#include <algorithm>
#include <cmath>
#include <optional>

#include "engine/nesting.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Boundary = OutlineRegion::Boundary;
using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::RowVectorXd;
using Eigen::VectorXd;

// A unit charge at y seen from x within the boundary.
class Source {
 public:
  Source(const OutlineRegion& region) : boundary_(region.boundary), radius_(region.radius) {}

  double potential(Complex x, Complex y) const {
    const double direct = -std::log(std::abs(x - y) / radius_);
    if (boundary_ == Boundary::plane) return direct + std::log(std::abs(x - std::conj(y)) / radius_);
    if (boundary_ == Boundary::round_wall)
      return direct + std::log(std::abs(1.0 - x / radius_ * std::conj(y / radius_)));
    return direct;
  }

  /// Along a normal n at x.
  double direct_field(Complex x, Complex y, Complex n) const { return -(n / (x - y)).real(); }
  double image_field(Complex x, Complex y, Complex n) const {
    if (boundary_ == Boundary::plane) return (n / (x - std::conj(y))).real();
    if (boundary_ == Boundary::round_wall)
      return -(n * std::conj(y) / (radius_ * radius_ - x * std::conj(y))).real();
    return 0.0;
  }

 private:
  Boundary boundary_;
  double radius_;
};

// Regular harmonics 1, 2, ... at a circle from a unit charge at y, and their slope along n as y moves.
class Harmonics {
 public:
  Harmonics(const OutlineRegion& region, const HarmonicCircle& circle) : region_(region), circle_(circle) {}

  /// f(n, harmonic, its slope), each as cosine part - j sine part.
  template <typename F>
  void each(Complex y, Complex n, F f) const {
    const Complex ratio = circle_.radius / (y - circle_.centre);
    series(ratio, -ratio / (y - circle_.centre) * n, 1.0, f);
    if (region_.boundary == Boundary::plane) {
      const Complex image = circle_.radius / (std::conj(y) - circle_.centre);
      series(image, -image / (std::conj(y) - circle_.centre) * std::conj(n), -1.0, f);
    }
    if (region_.boundary == Boundary::round_wall) {
      const double r2 = region_.radius * region_.radius;
      const Complex e = r2 - circle_.centre * std::conj(y);
      series(circle_.radius * std::conj(y) / e, circle_.radius * r2 / (e * e) * std::conj(n), -1.0, f);
    }
  }

 private:
  template <typename F>
  void series(Complex ratio, Complex slope, double factor, F f) const {
    Complex before = factor;  // ratio^(m - 1)
    for (int m = 1; m <= circle_.order(); ++m) {
      const double root = std::sqrt(static_cast<double>(m));
      f(m, before * ratio / root, before * slope * root);
      before *= ratio;
    }
  }

  const OutlineRegion& region_;
  const HarmonicCircle& circle_;
};

// Of the image of a panel in the boundary.
SourcePanel image_of(const OutlineRegion& region, const SourcePanel& panel, const PanelPoints& points,
                     int first) {
  SourcePanel image = panel;
  const double r2 = region.radius * region.radius;
  const auto moved = [&](Complex z) {
    return region.boundary == Boundary::plane ? std::conj(z) : r2 / std::conj(z);
  };
  for (size_t k = 0; k < panel.places.size(); ++k) {
    const Complex z = panel.places[k], t = std::conj(points.tangent[static_cast<size_t>(first) + k]);
    image.places[k] = moved(z);
    image.turns[k] = region.boundary == Boundary::plane ? 1.0 / t : -std::conj(z) * std::conj(z) / (r2 * t);
  }
  image.begin = moved(panel.begin);
  image.middle = moved(panel.middle);
  image.end = moved(panel.end);
  return image;
}

SourcePanel source_of(const Panel& panel, const PanelPoints& points, int order) {
  SourcePanel source{{}, {}, panel.begin, panel.middle, panel.end, panel.length};
  for (int k = 0; k < order; ++k) {
    source.places.push_back(points.place[static_cast<size_t>(panel.first + k)]);
    source.turns.push_back(1.0 / points.tangent[static_cast<size_t>(panel.first + k)]);
  }
  return source;
}

}  // namespace

OutlineField::OutlineField(const OutlineRegion& region, OutlineResolution resolution)
    : region_(region), resolution_(std::move(resolution)), layout_(resolution_.circles) {
  harmonics_ = layout_.size() - layout_.circle_count();
  const Index n = harmonics_ + outlines().points.size();
  matrix_ = MatrixXd::Zero(n, n);
  find_nesting();
  fill_circles();
  fill_circles_and_points();
  fill_points();
}

int OutlineField::harmonic_row(size_t circle, int n) const {
  return layout_.row[circle][static_cast<size_t>(n - 1)] - layout_.circle_count();
}

// Told once for whole outlines: where two touch, rounding would decide for a single point.
void OutlineField::find_nesting() {
  const size_t n = region_.surfaces.size();
  within_.assign(n, std::vector<bool>(n, false));
  for (size_t i = 0; i < n; ++i)
    for (size_t j = 0; j < n; ++j)
      within_[i][j] =
          room_inside(region_.surfaces[j].outline, region_.surfaces[i].outline) >= -k_contact_tolerance;
}

void OutlineField::fill_circles() {
  MatrixXd lower = MatrixXd::Zero(layout_.size(), layout_.size());
  add_direct(lower, layout_, circles(), region_.radius);
  if (region_.boundary == Boundary::plane) add_plane_images(lower, layout_, circles(), region_.radius);
  if (region_.boundary == Boundary::round_wall)
    add_wall_images(lower, layout_, circles(), region_.radius, -1.0);
  among_circles_ = lower.selfadjointView<Eigen::Lower>();
  matrix_.topLeftCorner(harmonics_, harmonics_) = among_circles_.bottomRightCorner(harmonics_, harmonics_);
}

// By reciprocity what a harmonic puts at a point is what a charge there puts on the harmonic.
void OutlineField::fill_circles_and_points() {
  const PanelPoints& points = outlines().points;
  for (size_t i = 0; i < circles().size(); ++i) {
    const Harmonics harmonics(region_, circles()[i]);
    for (int p = 0; p < points.size(); ++p) {
      const int at = point_row(p);
      const double weight = points.weight[static_cast<size_t>(p)];
      harmonics.each(points.place[static_cast<size_t>(p)], points.normal(p),
                     [&](int m, Complex value, Complex slope) {
                       const int row = harmonic_row(i, m);
                       matrix_(row, at) += weight * value.real();
                       matrix_(row + 1, at) -= weight * value.imag();
                       matrix_(at, row) += slope.real();
                       matrix_(at, row + 1) -= slope.imag();
                     });
    }
  }
}

void OutlineField::fill_points() {
  const bool images = region_.boundary == Boundary::plane || region_.boundary == Boundary::round_wall;
  for (size_t panel = 0; panel < outlines().panels.size(); ++panel) {
    add_direct_field(static_cast<int>(panel));
    if (images) add_images(static_cast<int>(panel));
  }
}

void OutlineField::add_direct_field(int number) {
  const PanelPoints& points = outlines().points;
  const Panel& panel = outlines().panels[static_cast<size_t>(number)];
  const Source source(region_);
  const CloseField close(source_of(panel, points, outlines().order));
  for (int p = 0; p < points.size(); ++p) {
    const Complex x = points.place[static_cast<size_t>(p)], n = points.normal(p);
    const Panel& at = outlines().panels[static_cast<size_t>(points.panel[static_cast<size_t>(p)])];
    const bool same_curve = at.outline == panel.outline && at.curve == panel.curve;
    if (!same_curve && !close.is_far(x)) {
      const bool left = within_[static_cast<size_t>(at.outline)][static_cast<size_t>(panel.outline)];
      matrix_.row(point_row(p)).segment(point_row(panel.first), outlines().order) +=
          (n * close.weights(x, left)).real().transpose();
      continue;
    }
    for (int k = panel.first; k < panel.first + outlines().order; ++k) {
      const double weight = points.weight[static_cast<size_t>(k)];
      // Two places of one circle see each other under half its curvature, of one line not at all.
      const double field = same_curve ? -points.curvature[static_cast<size_t>(k)] / 2
                                      : source.direct_field(x, points.place[static_cast<size_t>(k)], n);
      matrix_(point_row(p), point_row(k)) += weight * field;
    }
  }
}

void OutlineField::add_images(int number) {
  const PanelPoints& points = outlines().points;
  const Panel& panel = outlines().panels[static_cast<size_t>(number)];
  const Source source(region_);
  // The image of what is well inside a round wall lies far outside it; that of the origin, nowhere.
  std::optional<CloseField> close;
  if (region_.boundary == Boundary::plane || std::abs(panel.middle) + panel.length > region_.radius / 2)
    close.emplace(image_of(region_, source_of(panel, points, outlines().order), points, panel.first));
  for (int p = 0; p < points.size(); ++p) {
    const Complex x = points.place[static_cast<size_t>(p)], n = points.normal(p);
    if (close && !close->is_far(x)) {  // images run clockwise: what is outside of them lies to the left
      matrix_.row(point_row(p)).segment(point_row(panel.first), outlines().order) -=
          (n * close->weights(x, true)).real().transpose();
      continue;
    }
    for (int k = panel.first; k < panel.first + outlines().order; ++k)
      matrix_(point_row(p), point_row(k)) += points.weight[static_cast<size_t>(k)] *
                                             source.image_field(x, points.place[static_cast<size_t>(k)], n);
  }
}

VectorXd OutlineField::from_charge(int circle) const {
  VectorXd result(size());
  result.head(harmonics_) = among_circles_.col(circle).tail(harmonics_);
  const Source source(region_);
  const Complex y = circles()[static_cast<size_t>(circle)].centre;
  for (int p = 0; p < outlines().points.size(); ++p) {
    const Complex x = outlines().points.place[static_cast<size_t>(p)], n = outlines().points.normal(p);
    result(point_row(p)) = source.direct_field(x, y, n) + source.image_field(x, y, n);
  }
  return result;
}

MatrixXd OutlineField::at_circles() const {
  MatrixXd result(layout_.circle_count(), size());
  result.leftCols(harmonics_) = among_circles_.topRightCorner(layout_.circle_count(), harmonics_);
  const Source source(region_);
  for (Index i = 0; i < result.rows(); ++i)
    for (int p = 0; p < outlines().points.size(); ++p)
      result(i, point_row(p)) = outlines().points.weight[static_cast<size_t>(p)] *
                                source.potential(circles()[static_cast<size_t>(i)].centre,
                                                 outlines().points.place[static_cast<size_t>(p)]);
  return result;
}

RowVectorXd OutlineField::at_place(Complex place) const {
  RowVectorXd result = RowVectorXd::Zero(size());
  for (size_t i = 0; i < circles().size(); ++i)
    Harmonics(region_, circles()[i]).each(place, 1.0, [&](int m, Complex value, Complex) {
      result(harmonic_row(i, m)) += value.real();
      result(harmonic_row(i, m) + 1) -= value.imag();
    });
  const Source source(region_);
  for (int p = 0; p < outlines().points.size(); ++p)
    result(point_row(p)) = outlines().points.weight[static_cast<size_t>(p)] *
                           source.potential(place, outlines().points.place[static_cast<size_t>(p)]);
  return result;
}

double OutlineField::charge_at_place(int circle, Complex place) const {
  return Source(region_).potential(place, circles()[static_cast<size_t>(circle)].centre);
}

MatrixXd OutlineField::between_charges() const {
  return among_circles_.topLeftCorner(layout_.circle_count(), layout_.circle_count());
}

VectorXd OutlineField::lengths_of(int outline) const {
  VectorXd result = VectorXd::Zero(size());
  const PanelPoints& points = outlines().points;
  for (int p = 0; p < points.size(); ++p)
    if (outlines().panels[static_cast<size_t>(points.panel[static_cast<size_t>(p)])].outline == outline)
      result(point_row(p)) = points.weight[static_cast<size_t>(p)];
  return result;
}

}  // namespace engine
