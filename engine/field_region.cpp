#include "engine/field_region.h"

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <optional>

namespace engine {
namespace {

using Complex = std::complex<double>;
using Eigen::Index;
using Eigen::MatrixXcd;
using Eigen::MatrixXd;
using Eigen::VectorXcd;
using Eigen::VectorXd;

constexpr Complex k_j(0.0, 1.0);

std::vector<HarmonicCircle> circles_of(const Region& region) {
  std::vector<HarmonicCircle> circles;
  for (const CircleResponse& response : region.circles) circles.push_back(response.circle);
  return circles;
}

// The geometry of a region as potentials per charge-like amplitude, the medium's permittivity left out:
// lower triangles. A lossy wall around it adds an imaginary part.
struct Potentials {
  explicit Potentials(const Region& region);

  int charges() const { return layout.circle_count(); }
  int harmonics(size_t level) const { return layout.size_at[level] - charges(); }
  MatrixXcd between_charges() const {
    const auto whole = [&](const MatrixXd& lower) -> MatrixXd {
      return lower.topLeftCorner(charges(), charges()).selfadjointView<Eigen::Lower>();
    };
    MatrixXcd result = whole(real).cast<Complex>();
    if (imaginary.size() > 0) result += k_j * whole(imaginary);
    return result;
  }
  MatrixXcd from_charges() const {
    const int rows = harmonics(k_levels - 1);
    MatrixXcd result = real.bottomLeftCorner(rows, charges()).cast<Complex>();
    if (imaginary.size() > 0) result += k_j * imaginary.bottomLeftCorner(rows, charges());
    return result;
  }

  std::vector<HarmonicCircle> circles;
  HarmonicLayout layout;
  MatrixXd real;
  MatrixXd imaginary;  // empty where there is none
};

Potentials::Potentials(const Region& region)
    : circles(circles_of(region)), layout(circles), real(MatrixXd::Zero(layout.size(), layout.size())) {
  add_direct(real, layout, circles, region.radius);
  if (region.boundary == Region::Boundary::plane) add_plane_images(real, layout, circles, region.radius);
  if (region.boundary == Region::Boundary::metal_wall)
    add_wall_images(real, layout, circles, region.radius, -1.0);
}

// Ports of a region: the charges of its conductors and, in a body, the harmonics that arrive from outside.
struct Ports {
  Index size() const { return drive.cols(); }
  MatrixXcd drive;         // potential-like, at the circles' harmonics, times the medium's permittivity
  LevelMatrices outgoing;  // charge-like, from the circles' harmonics
  LevelMatrices direct;    // from port to port with all the circles' harmonics at rest
};

// Places of a circle's harmonics among those of all circles.
std::vector<int> places(const Potentials& potentials, size_t circle, size_t level) {
  std::vector<int> result;
  for (int n = 0; n < potentials.circles[circle].orders[level]; ++n)
    for (int part : {0, 1}) result.push_back(potentials.layout.row[circle][n] + part - potentials.charges());
  return result;
}

// 1 where a conductor (column) lies in a circle (row).
MatrixXd membership(const Region& region) {
  Index conductors = 0, column = 0;
  for (const CircleResponse& response : region.circles)
    conductors += static_cast<Index>(response.conductors.size());
  MatrixXd member = MatrixXd::Zero(static_cast<Index>(region.circles.size()), conductors);
  for (size_t i = 0; i < region.circles.size(); ++i)
    for (size_t k = 0; k < region.circles[i].conductors.size(); ++k)
      member(static_cast<Index>(i), column++) = 1;
  return member;
}

Ports charge_ports(const Region& region, const Potentials& potentials) {
  const MatrixXd member = membership(region);
  Ports ports;
  ports.drive = potentials.from_charges() * member;
  for (size_t level = 0; level < k_levels; ++level) {
    ports.outgoing[level] = MatrixXcd::Zero(potentials.harmonics(level), member.cols());
    ports.direct[level] = member.transpose() * potentials.between_charges() * member / region.medium;
    Index column = 0;
    for (size_t i = 0; i < region.circles.size(); ++i) {
      const CircleResponse& response = region.circles[i];
      const Index n = static_cast<Index>(response.conductors.size());
      if (n > 0) ports.direct[level].block(column, column, n, n) += response.potentials[level];
      if (n > 0 && response.outgoing[level].size() > 0)
        ports.outgoing[level](places(potentials, i, level), Eigen::seqN(column, n)) =
            response.outgoing[level];
      column += n;
    }
  }
  return ports;
}

// True where every circle reflects harmonic by harmonic, like metal more or less, so that the system is
// symmetric and, its losses set aside, positive definite.
bool reflects_like_metal(const Region& region) {
  constexpr double k_most_loss = 0.3;  // of Im over Re: bounds the ratio of the loss series
  return std::all_of(region.circles.begin(), region.circles.end(), [](const CircleResponse& response) {
    return !response.mixes_harmonics() && (response.reflection.real().array() < 0.0).all() &&
           (response.reflection.imag().array().abs() <= -k_most_loss * response.reflection.real().array())
               .all();
  });
}

// Complex columns as real ones: the real parts, then, if there are any, the imaginary parts.
MatrixXd real_columns(const MatrixXcd& matrix) {
  const Index n = matrix.cols();
  if (matrix.imag().cwiseAbs().maxCoeff() == 0.0) return matrix.real();
  MatrixXd parts(matrix.rows(), 2 * n);
  parts << matrix.real(), matrix.imag();
  return parts;
}

// x^T y of such columns.
MatrixXcd product(const Eigen::Ref<const MatrixXd>& x, const Eigen::Ref<const MatrixXd>& y, Index n) {
  const MatrixXd products = x.transpose() * y;
  if (products.cols() == n) return products.cast<Complex>();
  return (products.topLeftCorner(n, n) - products.bottomRightCorner(n, n)).cast<Complex>() +
         k_j * (products.topRightCorner(n, n) + products.bottomLeftCorner(n, n));
}

// What losses add to f^T (A + j B)^-1 f, A = L L^T, from solves with the real A alone: the series in B has
// the terms f^T y_k, y_k = (A^-1 B)^k A^-1 f, two from each solve by symmetry. `half` is L^-1 f.
template <typename Factor, typename Loss>
std::optional<MatrixXcd> loss_series(const Factor& factor, const Loss& times_loss, MatrixXd half, Index n,
                                     double accuracy) {
  MatrixXcd sum = MatrixXcd::Zero(n, n);
  Complex sign = 1.0;
  for (int k = 0; k < 30; ++k) {
    const MatrixXd y = factor.matrixU().solve(half);
    const MatrixXd by = times_loss(y);
    half = factor.matrixL().solve(by);
    const MatrixXcd even = product(half, half, n);
    sum -= sign * (k_j * product(y, by, n) + even);
    sign = -sign;
    if (even.cwiseAbs().maxCoeff() <= accuracy) return sum;
  }
  return std::nullopt;
}

// Eliminates the harmonics where all circles reflect like metal. With amplitudes scaled by the root of
// the reflection the system is the identity plus a contraction; its Cholesky factor holds those of the
// lower levels. Nothing if it is not positive definite or losses do not converge.
std::optional<LevelMatrices> eliminate_like_metal(const Region& region, const Potentials& potentials,
                                                  const Ports& ports) {
  const int size = potentials.harmonics(k_levels - 1);
  VectorXd scale(size), loss(size);
  for (size_t i = 0; i < region.circles.size(); ++i) {
    const std::vector<int> rows = places(potentials, i, k_levels - 1);
    for (size_t k = 0; k < rows.size(); ++k) {
      const Complex r = region.circles[i].reflection(static_cast<Index>(k / 2));
      scale(rows[k]) = std::abs(r) / std::sqrt(-r.real());
      loss(rows[k]) = -r.imag() / r.real();
    }
  }
  const auto scaled = [&](const MatrixXd& matrix) {
    MatrixXd result = matrix.bottomRightCorner(size, size);
    for (Index j = 0; j < size; ++j)
      result.col(j).tail(size - j).array() *= scale.tail(size - j).array() * scale(j);
    return result;
  };
  MatrixXd system = scaled(potentials.real);
  system.diagonal().array() += 1.0;
  const Eigen::LLT<Eigen::Ref<MatrixXd>> factor(system);
  if (factor.info() != Eigen::Success) return std::nullopt;

  const Index n = ports.size();
  const MatrixXd half = factor.matrixL().solve(real_columns(scale.asDiagonal() * ports.drive));
  MatrixXcd losses = MatrixXcd::Zero(n, n);
  if (loss.cwiseAbs().maxCoeff() > 0.0 || potentials.imaginary.size() > 0) {
    const MatrixXd wall = potentials.imaginary.size() > 0 ? scaled(potentials.imaginary) : MatrixXd();
    const auto times_loss = [&](const MatrixXd& y) {
      MatrixXd result = loss.asDiagonal() * y;
      if (wall.size() > 0) result += wall.selfadjointView<Eigen::Lower>() * y;
      return result;
    };
    const auto sum = loss_series(factor, times_loss, half, n, region.tolerance / 100);
    if (!sum) return std::nullopt;
    losses = *sum;
  }
  LevelMatrices result;
  for (size_t level = 0; level < k_levels; ++level) {
    const auto part = half.topRows(potentials.harmonics(level));
    result[level] = ports.direct[level] - (product(part, part, n) + losses) / region.medium;
  }
  return result;
}

template <typename Scalar>
Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic> narrowed(const MatrixXcd& matrix) {
  if constexpr (std::is_same_v<Scalar, double>)
    return matrix.real();
  else
    return matrix;
}

MatrixXcd reflection_matrix(const CircleResponse& response, size_t level) {
  if (response.mixes_harmonics()) return response.coupled[level];
  const Index size = 2 * response.circle.orders[level];
  MatrixXcd reflection = MatrixXcd::Zero(size, size);
  for (Index k = 0; k < size; ++k) reflection(k, k) = response.reflection(k / 2);
  return reflection;
}

// Eliminates the harmonics of one level whatever the circles do.
template <typename Scalar>
MatrixXcd eliminate(const Region& region, const Potentials& potentials, const Ports& ports, size_t level) {
  using Matrix = Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic>;
  const int size = potentials.harmonics(level), charges = potentials.charges();
  MatrixXcd all = potentials.real.block(charges, charges, size, size).cast<Complex>();
  if (potentials.imaginary.size() > 0) all += k_j * potentials.imaginary.block(charges, charges, size, size);
  Matrix t = narrowed<Scalar>(all);
  t.template triangularView<Eigen::StrictlyUpper>() = t.transpose().eval();
  const Matrix drive = narrowed<Scalar>(ports.drive.topRows(size));
  Matrix system = Matrix::Identity(size, size), right = narrowed<Scalar>(ports.outgoing[level]);
  for (size_t i = 0; i < region.circles.size(); ++i) {
    const std::vector<int> rows = places(potentials, i, level);
    const Matrix reflection = narrowed<Scalar>(reflection_matrix(region.circles[i], level));
    system(rows, Eigen::all) -= reflection * t(rows, Eigen::all);
    right(rows, Eigen::all) += reflection * drive(rows, Eigen::all);
  }
  const Matrix amplitudes = system.partialPivLu().solve(right);
  const MatrixXcd incoming = (t * amplitudes + drive).template cast<Complex>() / region.medium;
  return ports.direct[level] +
         ports.drive.topRows(size).transpose() * amplitudes.template cast<Complex>() / region.medium +
         ports.outgoing[level].transpose() * incoming;
}

bool is_real(const Region& region, const Potentials& potentials, const Ports& ports) {
  const auto none = [](const auto& m) { return m.size() == 0 || m.imag().cwiseAbs().maxCoeff() == 0.0; };
  return potentials.imaginary.size() == 0 && region.medium.imag() == 0.0 && none(ports.drive) &&
         none(ports.outgoing.back()) &&
         std::all_of(region.circles.begin(), region.circles.end(),
                     [&](const auto& c) { return none(c.reflection) && none(c.coupled.back()); });
}

LevelMatrices port_matrices(const Region& region, const Potentials& potentials, const Ports& ports) {
  if (potentials.charges() == 0) return ports.direct;
  if (reflects_like_metal(region))
    if (const auto result = eliminate_like_metal(region, potentials, ports)) return *result;
  const bool real = is_real(region, potentials, ports);
  LevelMatrices result;
  for (size_t level = 0; level < k_levels; ++level) {
    const MatrixXcd z = real ? eliminate<double>(region, potentials, ports, level)
                             : eliminate<Complex>(region, potentials, ports, level);
    result[level] = (z + z.transpose()) / 2.0;
  }
  return result;
}

// One value per harmonic k of a body's wall, for its cosine and its sine.
VectorXcd per_harmonic(const Body& body, Complex medium, int order, Complex WallResponse::*part) {
  VectorXcd values(2 * order);
  for (int k = 1; k <= order; ++k)
    values(2 * k - 2) = values(2 * k - 1) = wall_response(body, medium, k).*part;
  return values;
}

// The wall's inner surface acts by its exact image; what its outer surface adds falls like
// (inner / outer radius)^(2 k) and is summed over the wall's harmonics.
void add_body_wall(Potentials& potentials, const Body& body, Complex medium, const MatrixXd& at_wall) {
  const Complex image = inner_surface_reflection(body, medium);
  const int order = static_cast<int>(at_wall.rows() / 2);
  const VectorXcd rest = per_harmonic(body, medium, order, &WallResponse::back_inside).array() - image;
  const auto add = [&](MatrixXd& sum, double factor, const VectorXd& weights) {
    add_wall_images(sum, potentials.layout, potentials.circles, body.inner_radius, factor);
    const MatrixXd weighted = weights.asDiagonal() * at_wall;
    sum.triangularView<Eigen::Lower>() += at_wall.transpose() * weighted;
  };
  add(potentials.real, image.real(), rest.real());
  if (image.imag() == 0.0 && rest.imag().cwiseAbs().maxCoeff() == 0.0) return;
  potentials.imaginary = MatrixXd::Zero(potentials.real.rows(), potentials.real.cols());
  add(potentials.imaginary, image.imag(), rest.imag());
}

// Adds the harmonics that arrive from outside a body to the ports of its inside.
void add_waves(Ports& ports, const Body& body, const Region& inside, Complex medium, int order,
               const MatrixXd& at_wall) {
  const Index charges = ports.size(), waves = 2 * order, circles = static_cast<Index>(inside.circles.size());
  const VectorXcd through = per_harmonic(body, medium, order, &WallResponse::through);
  const VectorXcd back = medium * per_harmonic(body, medium, order, &WallResponse::back_outside);
  const MatrixXcd arriving = at_wall.topRows(waves).transpose() * through.asDiagonal();
  const MatrixXcd at_conductors = membership(inside).transpose() * arriving.topRows(circles);
  ports.drive.conservativeResize(Eigen::NoChange, charges + waves);
  ports.drive.rightCols(waves) = inside.medium * arriving.bottomRows(arriving.rows() - circles);
  for (size_t level = 0; level < k_levels; ++level) {
    MatrixXcd direct(charges + waves, charges + waves);
    direct << ports.direct[level], at_conductors, at_conductors.transpose(), MatrixXcd(back.asDiagonal());
    ports.direct[level] = direct;
    ports.outgoing[level].conservativeResize(Eigen::NoChange, charges + waves);
    ports.outgoing[level].rightCols(waves).setZero();
  }
}

}  // namespace

LevelMatrices potential_coefficients(const Region& region) {
  const Potentials potentials(region);
  return port_matrices(region, potentials, charge_ports(region, potentials));
}

CircleResponse body_response(const Body& body, const Region& inside, Complex medium, const Orders& orders,
                             int wall_order) {
  Potentials potentials(inside);
  const MatrixXd at_wall = harmonics_at_wall(potentials.layout, potentials.circles, body.inner_radius,
                                             std::max(orders.back(), wall_order));
  add_body_wall(potentials, body, medium, at_wall);
  Ports ports = charge_ports(inside, potentials);
  const Index charges = ports.size();
  add_waves(ports, body, inside, medium, orders.back(), at_wall);
  const LevelMatrices z = port_matrices(inside, potentials, ports);

  CircleResponse response;
  for (const CircleResponse& circle : inside.circles)
    response.conductors.insert(response.conductors.end(), circle.conductors.begin(), circle.conductors.end());
  const Complex rise = body.outer_radius > body.inner_radius
                           ? std::log(body.outer_radius / body.inner_radius) / complex_permittivity(body.wall)
                           : 0.0;
  for (size_t level = 0; level < k_levels; ++level) {
    const Index waves = 2 * orders[level];
    response.coupled[level] = z[level].block(charges, charges, waves, waves) / medium;
    response.outgoing[level] = z[level].block(charges, 0, waves, charges);
    response.potentials[level] = z[level].topLeftCorner(charges, charges).array() + rise;
  }
  return response;
}

}  // namespace engine
