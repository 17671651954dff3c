#include "engine/harmonics.h"

#include <cmath>

namespace engine {
namespace {

using Complex = std::complex<double>;

// A block between the harmonics of two circles acts on amplitudes p = pc - i ps (regular) and
// s = sc + i ss (outgoing) as p = t s or, for an image, as p = t conj(s).
enum class Kind { direct, image };

// Fills the lower triangle with the block of circle `at` (rows) from circle `from` (columns).
class Block {
 public:
  Block(Eigen::MatrixXd& matrix, const HarmonicLayout& layout, int at, int from, Kind kind)
      : matrix_(matrix), rows_(layout.row[at]), columns_(layout.row[from]), own_(at == from), kind_(kind) {}

  void add(int m, int n, Complex t) {
    const int row = rows_[m - 1], column = columns_[n - 1];
    const double sign = kind_ == Kind::direct ? -1.0 : 1.0;
    put(row, column, t.real());
    put(row, column + 1, sign * t.imag());
    put(row + 1, column, -t.imag());
    put(row + 1, column + 1, sign * t.real());
  }

 private:
  void put(int row, int column, double value) {
    if (row >= column)
      matrix_(row, column) += value;
    else if (!own_)  // of its own block a circle fills both halves, and the upper is left out
      matrix_(column, row) += value;
  }

  Eigen::MatrixXd& matrix_;
  const std::vector<int>& rows_;
  const std::vector<int>& columns_;
  bool own_;
  Kind kind_;
};

// Regular harmonic m at `at` from outgoing harmonic n of a circle of radius `from_radius` that lies
// `apart` away: (b / (w - D))^n expanded in w / a, by a recurrence in n so that no binomial overflows.
void add_translation(Block block, const HarmonicCircle& at, const HarmonicCircle& from, Complex apart,
                     double factor) {
  const Complex u = from.radius / apart, v = at.radius / apart;
  std::vector<Complex> t(at.order());
  Complex power = 1.0;
  for (int m = 1; m <= at.order(); ++m) {
    power *= v;
    t[m - 1] = -factor * u * power * std::sqrt(m);
  }
  for (int n = 1; n <= from.order(); ++n) {
    if (n > 1) {
      const Complex step = -u / std::sqrt(n * (n - 1.0));
      for (int m = 1; m <= at.order(); ++m) t[m - 1] *= step * (n + m - 1.0);
    }
    for (int m = 1; m <= at.order(); ++m) block.add(m, n, t[m - 1]);
  }
}

// Regular harmonics from a unit charge: sum of (ratio w / a)^m / m.
void add_charge(Eigen::MatrixXd& matrix, const std::vector<int>& rows, int column, Complex ratio,
                double factor) {
  Complex power = 1.0;
  for (size_t m = 1; m <= rows.size(); ++m) {
    power *= ratio;
    const double norm = factor / std::sqrt(static_cast<double>(m));
    matrix(rows[m - 1], column) += norm * power.real();
    matrix(rows[m - 1] + 1, column) -= norm * power.imag();
  }
}

// Image in the wall of harmonic n of circle `from`, expanded at `at`: the n-th power of a Moebius
// function f of w, each column from the one before by multiplying with the series of f.
void add_wall_image(Block block, const HarmonicCircle& at, const HarmonicCircle& from, double wall_radius,
                    double factor) {
  const double r2 = wall_radius * wall_radius;
  const Complex e = r2 - std::conj(from.centre) * at.centre;
  const Complex constant = from.radius * at.centre / e;
  const Complex slope = from.radius * at.radius * (r2 / e) / e;
  const Complex ratio = at.radius * std::conj(from.centre) / e;
  std::vector<double> root(at.order() + 1);
  for (int m = 0; m <= at.order(); ++m) root[m] = factor * std::sqrt(m);
  std::vector<Complex> t(at.order() + 1);  // of f^n, from w^0
  t[0] = 1.0;
  for (int n = 1; n <= from.order(); ++n) {
    Complex shifted = 0.0;  // of f^(n-1) w / (1 - ratio w)
    for (int m = 0; m <= at.order(); ++m) {
      const Complex before = t[m];
      t[m] = constant * before + slope * shifted;
      shifted = before + ratio * shifted;
    }
    for (int m = 1; m <= at.order(); ++m) block.add(m, n, t[m] * (root[m] / std::sqrt(n)));
  }
}

}  // namespace

HarmonicLayout::HarmonicLayout(const std::vector<HarmonicCircle>& circles) : row(circles.size()) {
  int size = static_cast<int>(circles.size());
  for (size_t level = 0; level < k_levels; ++level) {
    for (size_t i = 0; i < circles.size(); ++i)
      for (int n = level == 0 ? 0 : circles[i].orders[level - 1]; n < circles[i].orders[level];
           ++n, size += 2)
        row[i].push_back(size);
    size_at[level] = size;
  }
}

void add_direct(Eigen::MatrixXd& potentials, const HarmonicLayout& layout,
                const std::vector<HarmonicCircle>& circles, double scale) {
  for (int i = 0; i < layout.circle_count(); ++i) {
    potentials(i, i) -= std::log(circles[i].radius / scale);
    for (int j = 0; j < layout.circle_count(); ++j) {
      if (j == i) continue;
      const Complex apart = circles[j].centre - circles[i].centre;
      add_charge(potentials, layout.row[i], j, circles[i].radius / apart, 1.0);
      if (j > i) continue;
      potentials(i, j) -= std::log(std::abs(apart) / scale);
      add_translation({potentials, layout, i, j, Kind::direct}, circles[i], circles[j], apart, 1.0);
    }
  }
}

void add_plane_images(Eigen::MatrixXd& potentials, const HarmonicLayout& layout,
                      const std::vector<HarmonicCircle>& circles, double scale) {
  for (int i = 0; i < layout.circle_count(); ++i)
    for (int j = 0; j < layout.circle_count(); ++j) {
      const Complex apart = std::conj(circles[j].centre) - circles[i].centre;
      add_charge(potentials, layout.row[i], j, circles[i].radius / apart, -1.0);
      if (j > i) continue;
      potentials(i, j) += std::log(std::abs(apart) / scale);
      add_translation({potentials, layout, i, j, Kind::image}, circles[i], circles[j], apart, -1.0);
    }
}

void add_wall_images(Eigen::MatrixXd& potentials, const HarmonicLayout& layout,
                     const std::vector<HarmonicCircle>& circles, double radius, double factor) {
  for (int i = 0; i < layout.circle_count(); ++i)
    for (int j = 0; j < layout.circle_count(); ++j) {
      const Complex e = 1.0 - std::conj(circles[j].centre / radius) * (circles[i].centre / radius);
      const Complex ratio = circles[i].radius / radius * std::conj(circles[j].centre / radius) / e;
      add_charge(potentials, layout.row[i], j, ratio, factor);
      if (j > i) continue;
      potentials(i, j) -= factor * std::log(std::abs(e));
      add_wall_image({potentials, layout, i, j, Kind::image}, circles[i], circles[j], radius, factor);
    }
}

Eigen::MatrixXd harmonics_at_wall(const HarmonicLayout& layout, const std::vector<HarmonicCircle>& circles,
                                  double radius, int order) {
  Eigen::MatrixXd matrix = Eigen::MatrixXd::Zero(2 * order, layout.size());
  // Amplitudes o = oc + i os = t s of outgoing harmonic k.
  const auto put = [&](int k, int column, Complex t) {
    matrix(2 * k - 2, column) = t.real();
    matrix(2 * k - 1, column) = t.imag();
  };
  for (int j = 0; j < layout.circle_count(); ++j) {
    const Complex z = circles[j].centre / radius;
    Complex power = 1.0;
    for (int k = 1; k <= order; ++k) put(k, j, (power *= z) / std::sqrt(k));
    double start = 1.0;
    for (int n = 1; n <= circles[j].order(); ++n) {
      start *= circles[j].radius / radius;
      Complex t = start;
      for (int k = n; k <= order; ++k) {
        put(k, layout.row[j][n - 1], t);
        put(k, layout.row[j][n - 1] + 1, t * Complex(0.0, 1.0));
        t *= std::sqrt((k + 1.0) / k) * (k / (k - n + 1.0)) * z;
      }
    }
  }
  return matrix;
}

Eigen::VectorXcd metal_reflection(double metal_radius, const std::vector<Layer>& layers, Complex medium,
                                  int order) {
  Eigen::VectorXcd reflection(order);
  for (int n = 1; n <= order; ++n) {
    Complex back = -1.0;
    double radius = metal_radius;
    for (size_t i = 0; i < layers.size(); ++i) {
      const Complex inside = complex_permittivity(layers[i].dielectric);
      const Complex outside = i + 1 < layers.size() ? complex_permittivity(layers[i + 1].dielectric) : medium;
      back *= std::pow(radius / layers[i].outer_radius, 2 * n);
      // Flux over potential on the surface is e (1 - back) / (1 + back) on either side.
      const Complex flux = inside * (1.0 - back), potential = 1.0 + back;
      back = (outside * potential - flux) / (outside * potential + flux);
      radius = layers[i].outer_radius;
    }
    reflection(n - 1) = back;
  }
  return reflection;
}

namespace {

// Without thickness there is no wall: the filler meets the medium.
Complex wall_permittivity(const Body& body, Complex medium) {
  return body.inner_radius < body.outer_radius ? complex_permittivity(body.wall) : medium;
}

// Of what arrives from side 1 at a surface between permittivities e1 and e2.
Complex surface_reflection(Complex e1, Complex e2) { return (e1 - e2) / (e1 + e2); }

}  // namespace

WallResponse wall_response(const Body& body, Complex medium, int k) {
  const Complex filler = complex_permittivity(body.filler), wall = wall_permittivity(body, medium);
  const Complex r1 = surface_reflection(filler, wall), r2 = surface_reflection(wall, medium);
  const double tau = std::pow(body.inner_radius / body.outer_radius, k);
  const Complex bounces = 1.0 + r1 * r2 * tau * tau;
  WallResponse response;
  // In potentials, a wave gains 1 + r on its way through a surface; charge-like amplitudes carry the
  // permittivity of their side as well, which makes `through` the same both ways.
  response.back_inside = r1 + (1.0 + r1) * (1.0 - r1) * r2 * tau * tau / bounces;
  response.through = (1.0 + r1) * (1.0 + r2) * tau / bounces * medium / filler;
  response.back_outside = -r2 - (1.0 - r2) * (1.0 + r2) * r1 * tau * tau / bounces;
  return response;
}

Complex inner_surface_reflection(const Body& body, Complex medium) {
  return surface_reflection(complex_permittivity(body.filler), wall_permittivity(body, medium));
}

}  // namespace engine
