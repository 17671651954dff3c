#include "engine/harmonics.h"

#include <cmath>

namespace engine {
namespace {

using Complex = std::complex<double>;

// A block between the harmonics of two circles acts on amplitudes p = pc - i ps (regular) and
// s = sc + i ss (outgoing) as p = t s or as p = t conj(s); o = oc + i os is outgoing as well.
enum class Kind { regular_from_outgoing, regular_from_conjugate, outgoing_from_outgoing };

void put(Eigen::MatrixXd& matrix, int row, int column, Complex t, Kind kind) {
  const double sign_ss = kind == Kind::regular_from_outgoing ? -1.0 : 1.0;
  const double sign_cs = kind == Kind::regular_from_conjugate ? 1.0 : -1.0;
  const double sign_sc = kind == Kind::outgoing_from_outgoing ? 1.0 : -1.0;
  matrix(row, column) += t.real();
  matrix(row, column + 1) += sign_cs * t.imag();
  matrix(row + 1, column) += sign_sc * t.imag();
  matrix(row + 1, column + 1) += sign_ss * t.real();
}

// Regular harmonic m at `at` from outgoing harmonic n of a circle of radius `from_radius` that lies
// `apart` away: (b / (w - D))^n expanded in w / a, by a recurrence in n so that no binomial overflows.
void add_translation(Eigen::MatrixXd& matrix, int row, int column, const HarmonicCircle& at,
                     double from_radius, int from_order, Complex apart, double factor, Kind kind) {
  const Complex u = from_radius / apart, v = at.radius / apart;
  std::vector<Complex> t(at.order);
  Complex power = 1.0;
  for (int m = 1; m <= at.order; ++m) {
    power *= v;
    t[m - 1] = -factor * u * power * std::sqrt(m);
  }
  for (int n = 1; n <= from_order; ++n) {
    if (n > 1) {
      const Complex step = -u / std::sqrt(n * (n - 1.0));
      for (int m = 1; m <= at.order; ++m) t[m - 1] *= step * (n + m - 1.0);
    }
    for (int m = 1; m <= at.order; ++m) put(matrix, row + 2 * (m - 1), column + 2 * (n - 1), t[m - 1], kind);
  }
}

// Regular harmonics at `at` from a unit charge `apart` away: -ln|w - D|.
void add_charge(Eigen::MatrixXd& matrix, int row, int column, const HarmonicCircle& at, Complex apart,
                double factor) {
  Complex power = 1.0;
  for (int m = 1; m <= at.order; ++m) {
    power *= at.radius / apart;
    matrix(row + 2 * (m - 1), column) += factor * power.real() / std::sqrt(m);
    matrix(row + 2 * (m - 1) + 1, column) -= factor * power.imag() / std::sqrt(m);
  }
}

// The upper triangle follows from the lower by reciprocity.
void mirror(Eigen::MatrixXd& matrix) { matrix.triangularView<Eigen::StrictlyUpper>() = matrix.transpose(); }

// Image in the wall of harmonic n of circle `from`, expanded at `at`: the n-th power of a Moebius
// function f of w, each column from the one before by multiplying with the series of f.
void add_wall_image(Eigen::MatrixXd& matrix, int row, int column, const HarmonicCircle& at,
                    const HarmonicCircle& from, double wall_radius) {
  const double r2 = wall_radius * wall_radius;
  const Complex e = r2 - std::conj(from.centre) * at.centre;
  const Complex constant = from.radius * at.centre / e;
  const Complex slope = from.radius * at.radius * (r2 / e) / e;
  const Complex ratio = at.radius * std::conj(from.centre) / e;
  std::vector<Complex> t(at.order + 1);  // of f^n, from w^0
  t[0] = 1.0;
  for (int n = 1; n <= from.order; ++n) {
    Complex shifted = 0.0;  // of f^(n-1) w / (1 - ratio w)
    for (int m = 0; m <= at.order; ++m) {
      const Complex before = t[m];
      t[m] = constant * before + slope * shifted;
      shifted = before + ratio * shifted;
      if (m > 0)
        put(matrix, row + 2 * (m - 1), column + 2 * (n - 1), t[m] * std::sqrt(static_cast<double>(m) / n),
            Kind::regular_from_conjugate);
    }
  }
}

void add_wall_image_of_charge(Eigen::MatrixXd& matrix, int row, int column, const HarmonicCircle& at,
                              const HarmonicCircle& from, double wall_radius) {
  const Complex e = wall_radius * wall_radius - std::conj(from.centre) * at.centre;
  const Complex ratio = at.radius * std::conj(from.centre) / e;
  Complex power = 1.0;
  for (int m = 1; m <= at.order; ++m) {
    power *= ratio;
    matrix(row + 2 * (m - 1), column) += power.real() / std::sqrt(m);
    matrix(row + 2 * (m - 1) + 1, column) -= power.imag() / std::sqrt(m);
  }
}

}  // namespace

HarmonicLayout::HarmonicLayout(const std::vector<HarmonicCircle>& circles)
    : size(static_cast<int>(circles.size())) {
  for (const HarmonicCircle& circle : circles) {
    first.push_back(size);
    size += 2 * circle.order;
  }
}

Eigen::MatrixXd direct_potentials(const std::vector<HarmonicCircle>& circles, double scale) {
  const HarmonicLayout layout(circles);
  Eigen::MatrixXd matrix = Eigen::MatrixXd::Zero(layout.size, layout.size);
  for (int i = 0; i < layout.circle_count(); ++i) {
    matrix(i, i) = -std::log(circles[i].radius / scale);
    for (int j = 0; j < layout.circle_count(); ++j) {
      if (j == i) continue;
      const Complex apart = circles[j].centre - circles[i].centre;
      if (j < i) matrix(i, j) = -std::log(std::abs(apart) / scale);
      add_charge(matrix, layout.first[i], j, circles[i], apart, 1.0);
      if (j < i)
        add_translation(matrix, layout.first[i], layout.first[j], circles[i], circles[j].radius,
                        circles[j].order, apart, 1.0, Kind::regular_from_outgoing);
    }
  }
  mirror(matrix);
  return matrix;
}

Eigen::MatrixXd plane_potentials(const std::vector<HarmonicCircle>& circles, double scale) {
  const HarmonicLayout layout(circles);
  Eigen::MatrixXd matrix = Eigen::MatrixXd::Zero(layout.size, layout.size);
  for (int i = 0; i < layout.circle_count(); ++i)
    for (int j = 0; j < layout.circle_count(); ++j) {
      const Complex apart = std::conj(circles[j].centre) - circles[i].centre;
      if (j <= i) matrix(i, j) = std::log(std::abs(apart) / scale);
      add_charge(matrix, layout.first[i], j, circles[i], apart, -1.0);
      if (j <= i)
        add_translation(matrix, layout.first[i], layout.first[j], circles[i], circles[j].radius,
                        circles[j].order, apart, -1.0, Kind::regular_from_conjugate);
    }
  mirror(matrix);
  return matrix;
}

Eigen::MatrixXd wall_images(const std::vector<HarmonicCircle>& circles, double radius) {
  const HarmonicLayout layout(circles);
  Eigen::MatrixXd matrix = Eigen::MatrixXd::Zero(layout.size, layout.size);
  for (int i = 0; i < layout.circle_count(); ++i)
    for (int j = 0; j < layout.circle_count(); ++j) {
      const Complex e = 1.0 - std::conj(circles[j].centre / radius) * (circles[i].centre / radius);
      if (j <= i) matrix(i, j) = -std::log(std::abs(e));
      add_wall_image_of_charge(matrix, layout.first[i], j, circles[i], circles[j], radius);
      if (j <= i) add_wall_image(matrix, layout.first[i], layout.first[j], circles[i], circles[j], radius);
    }
  mirror(matrix);
  return matrix;
}

Eigen::MatrixXd harmonics_at_wall(const std::vector<HarmonicCircle>& circles, double radius, int order) {
  const HarmonicLayout layout(circles);
  Eigen::MatrixXd matrix = Eigen::MatrixXd::Zero(2 * order, layout.size);
  for (int j = 0; j < layout.circle_count(); ++j) {
    const Complex z = circles[j].centre / radius;
    Complex power = 1.0;
    for (int k = 1; k <= order; ++k) {
      power *= z;
      matrix(2 * (k - 1), j) = power.real() / std::sqrt(k);
      matrix(2 * (k - 1) + 1, j) = power.imag() / std::sqrt(k);
    }
    double start = 1.0;
    for (int n = 1; n <= circles[j].order; ++n) {
      start *= circles[j].radius / radius;
      Complex t = start;
      for (int k = n; k <= order; ++k) {
        put(matrix, 2 * (k - 1), layout.first[j] + 2 * (n - 1), t, Kind::outgoing_from_outgoing);
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
Complex wall_permittivity(const RoundBody& body, Complex medium) {
  return body.inner_radius < body.outer_radius ? complex_permittivity(body.wall) : medium;
}

// Of what arrives from side 1 at a surface between permittivities e1 and e2.
Complex surface_reflection(Complex e1, Complex e2) { return (e1 - e2) / (e1 + e2); }

}  // namespace

WallResponse wall_response(const RoundBody& body, Complex medium, int k) {
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

Complex inner_surface_reflection(const RoundBody& body, Complex medium) {
  return surface_reflection(complex_permittivity(body.filler), wall_permittivity(body, medium));
}

}  // namespace engine
