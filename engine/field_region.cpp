#include "engine/field_region.h"

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <algorithm>
#include <cmath>

namespace engine {
namespace {

using Complex = std::complex<double>;
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

// The geometry of a region as potentials per charge-like amplitude, the medium's permittivity left out.
// With a lossy wall around it there is an imaginary part.
struct Potentials {
  int charges = 0;  // leading rows: the circles' total charges; then their harmonics
  MatrixXd real;
  MatrixXd imaginary;  // empty where there is none

  int harmonics() const { return static_cast<int>(real.rows()) - charges; }
  MatrixXcd block(int row, int column, int rows, int columns) const {
    MatrixXcd result = real.block(row, column, rows, columns).cast<Complex>();
    if (imaginary.size() > 0) result += k_j * imaginary.block(row, column, rows, columns);
    return result;
  }
};

Potentials potentials_without_wall(const Region& region) {
  const std::vector<HarmonicCircle> circles = circles_of(region);
  Potentials potentials{static_cast<int>(circles.size()), direct_potentials(circles, region.radius), {}};
  if (region.boundary == Region::Boundary::plane) potentials.real += plane_potentials(circles, region.radius);
  if (region.boundary == Region::Boundary::metal_wall) potentials.real -= wall_images(circles, region.radius);
  return potentials;
}

// The equations of a region: what its circles do, and its ports. Ports are the charges of the
// conductors and, for a body, the harmonics that arrive from outside.
struct Ports {
  MatrixXcd drive;     // potential-like, at the circles' harmonics, times the medium's permittivity
  MatrixXcd outgoing;  // charge-like, from the circles' harmonics, per port
  MatrixXcd direct;    // from port to port with all the circles' harmonics at rest
};

int conductor_count(const Region& region) {
  int count = 0;
  for (const CircleResponse& response : region.circles) count += static_cast<int>(response.conductors.size());
  return count;
}

// 1 where a conductor (column) lies in a circle (row).
MatrixXd membership(const Region& region) {
  MatrixXd member = MatrixXd::Zero(static_cast<Eigen::Index>(region.circles.size()), conductor_count(region));
  Eigen::Index column = 0;
  for (size_t i = 0; i < region.circles.size(); ++i)
    for (size_t k = 0; k < region.circles[i].conductors.size(); ++k)
      member(static_cast<Eigen::Index>(i), column++) = 1;
  return member;
}

Ports charge_ports(const Region& region, const Potentials& potentials) {
  const int circles = potentials.charges, harmonics = potentials.harmonics();
  const MatrixXd member = membership(region);
  Ports ports;
  ports.drive = potentials.block(circles, 0, harmonics, circles) * member;
  ports.outgoing = MatrixXcd::Zero(harmonics, member.cols());
  ports.direct = member.transpose() * potentials.block(0, 0, circles, circles) * member / region.medium;
  Eigen::Index row = 0, column = 0;
  for (const CircleResponse& response : region.circles) {
    const Eigen::Index rows = 2 * response.circle.order,
                       n = static_cast<Eigen::Index>(response.conductors.size());
    if (response.outgoing.size() > 0) ports.outgoing.block(row, column, rows, n) = response.outgoing;
    if (n > 0) ports.direct.block(column, column, n, n) += response.potentials;
    row += rows;
    column += n;
  }
  return ports;
}

// True where every circle reflects harmonic by harmonic, like metal more or less, so that the system is
// symmetric and, its losses set aside, positive definite.
bool reflects_like_metal(const Region& region) {
  constexpr double k_most_loss = 0.3;  // of Im over Re: bounds the ratio of the loss series
  return std::all_of(region.circles.begin(), region.circles.end(), [](const CircleResponse& response) {
    return response.coupled.size() == 0 && response.outgoing.size() == 0 &&
           (response.reflection.real().array() < 0.0).all() &&
           (response.reflection.imag().array().abs() <= -k_most_loss * response.reflection.real().array())
               .all();
  });
}

// z^T x, x = (A + j B)^-1 f, from solves with the real A alone. The terms of its series in B, f^T y_k with
// y_k = (A^-1 B)^k A^-1 f, come two to a solve by symmetry. Returns false if they do not fall.
class LossSeries {
 public:
  LossSeries(const Eigen::LLT<MatrixXd>& a, const VectorXd& loss, const MatrixXd& imaginary)
      : a_(a), loss_(loss), imaginary_(imaginary) {}

  bool sum(const MatrixXcd& f, MatrixXcd& result) const {
    const Eigen::Index n = f.cols();
    const bool is_real = f.imag().cwiseAbs().maxCoeff() == 0.0;
    MatrixXd parts(f.rows(), is_real ? n : 2 * n);
    parts.leftCols(n) = f.real();
    if (!is_real) parts.rightCols(n) = f.imag();
    MatrixXd y = a_.solve(parts);
    result = combined(parts, y, n);
    if (loss_.cwiseAbs().maxCoeff() == 0.0 && imaginary_.size() == 0) return true;
    const double size = result.cwiseAbs().maxCoeff();
    Complex sign = 1.0;
    for (int k = 0; k < 30; ++k) {
      const MatrixXd by = times_loss(y);
      const MatrixXd next = a_.solve(by);
      const MatrixXcd odd = combined(y, by, n), even = combined(by, next, n);
      result += sign * (-k_j * odd - even);
      if (even.cwiseAbs().maxCoeff() <= 1e-13 * size) return true;
      y = next;
      sign = -sign;
    }
    return false;
  }

 private:
  MatrixXd times_loss(const MatrixXd& y) const {
    MatrixXd result = loss_.asDiagonal() * y;
    if (imaginary_.size() > 0) result.noalias() += imaginary_ * y;
    return result;
  }

  // x^T y of complex matrices whose imaginary parts, if any, stand in the columns after the first n.
  static MatrixXcd combined(const MatrixXd& x, const MatrixXd& y, Eigen::Index n) {
    const MatrixXd products = x.transpose() * y;
    if (products.cols() == n) return products.cast<Complex>();
    return (products.topLeftCorner(n, n) - products.bottomRightCorner(n, n)).cast<Complex>() +
           k_j * (products.topRightCorner(n, n) + products.bottomLeftCorner(n, n));
  }

  const Eigen::LLT<MatrixXd>& a_;
  const VectorXd& loss_;
  const MatrixXd& imaginary_;
};

// Eliminates the harmonics where all circles reflect like metal: with amplitudes scaled by the square
// root of the reflection the system is the identity plus a contraction.
bool eliminate_like_metal(const Region& region, const Potentials& potentials, const Ports& ports,
                          MatrixXcd& result) {
  const int harmonics = potentials.harmonics();
  VectorXd scale(harmonics), loss(harmonics);
  Eigen::Index row = 0;
  for (const CircleResponse& response : region.circles)
    for (int n = 0; n < response.circle.order; ++n)
      for (int part = 0; part < 2; ++part, ++row) {
        const Complex r = response.reflection(n);
        scale(row) = std::abs(r) / std::sqrt(-r.real());
        loss(row) = -r.imag() / r.real();
      }
  MatrixXd a =
      scale.asDiagonal() * potentials.real.bottomRightCorner(harmonics, harmonics) * scale.asDiagonal();
  a.diagonal().array() += 1.0;
  MatrixXd imaginary;
  if (potentials.imaginary.size() > 0)
    imaginary = scale.asDiagonal() * potentials.imaginary.bottomRightCorner(harmonics, harmonics) *
                scale.asDiagonal();
  const Eigen::LLT<MatrixXd> factor(a);
  if (factor.info() != Eigen::Success) return false;
  MatrixXcd sum;
  if (!LossSeries(factor, loss, imaginary).sum(scale.asDiagonal() * ports.drive, sum)) return false;
  result = ports.direct - sum / region.medium;
  return true;
}

template <typename Scalar>
Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic> narrowed(const MatrixXcd& matrix) {
  if constexpr (std::is_same_v<Scalar, double>)
    return matrix.real();
  else
    return matrix;
}

// Eliminates the harmonics whatever the circles do.
template <typename Scalar>
MatrixXcd eliminate(const Region& region, const Potentials& potentials, const Ports& ports) {
  using Matrix = Eigen::Matrix<Scalar, Eigen::Dynamic, Eigen::Dynamic>;
  const int circles = potentials.charges, harmonics = potentials.harmonics();
  const Matrix t = narrowed<Scalar>(potentials.block(circles, circles, harmonics, harmonics));
  const Matrix drive = narrowed<Scalar>(ports.drive);
  Matrix system(harmonics, harmonics), right = narrowed<Scalar>(ports.outgoing);
  Eigen::Index row = 0;
  for (const CircleResponse& response : region.circles) {
    const Eigen::Index rows = 2 * response.circle.order;
    MatrixXcd reflection = response.coupled;
    if (reflection.size() == 0) {
      reflection = MatrixXcd::Zero(rows, rows);
      for (Eigen::Index k = 0; k < rows; ++k) reflection(k, k) = response.reflection(k / 2);
    }
    const Matrix r = narrowed<Scalar>(reflection);
    system.middleRows(row, rows).noalias() = -r * t.middleRows(row, rows);
    right.middleRows(row, rows).noalias() += r * drive.middleRows(row, rows);
    row += rows;
  }
  system.diagonal().array() += Scalar(1.0);
  const Matrix amplitudes = system.partialPivLu().solve(right);
  const MatrixXcd incoming = (t * amplitudes + drive).template cast<Complex>() / region.medium;
  return ports.direct + ports.drive.transpose() * amplitudes.template cast<Complex>() / region.medium +
         ports.outgoing.transpose() * incoming;
}

bool is_real(const Region& region, const Potentials& potentials, const Ports& ports) {
  const auto none = [](const auto& m) { return m.size() == 0 || m.imag().cwiseAbs().maxCoeff() == 0.0; };
  return potentials.imaginary.size() == 0 && region.medium.imag() == 0.0 && none(ports.drive) &&
         none(ports.outgoing) &&
         std::all_of(region.circles.begin(), region.circles.end(),
                     [&](const auto& c) { return none(c.reflection) && none(c.coupled); });
}

MatrixXcd port_matrix(const Region& region, const Potentials& potentials, const Ports& ports) {
  MatrixXcd result;
  if (potentials.harmonics() == 0) return ports.direct;
  if (!reflects_like_metal(region) || !eliminate_like_metal(region, potentials, ports, result))
    result = is_real(region, potentials, ports) ? eliminate<double>(region, potentials, ports)
                                                : eliminate<Complex>(region, potentials, ports);
  return (result + result.transpose()) / 2.0;
}

// Per row of harmonics_at_wall: a cosine and a sine of each harmonic.
VectorXcd per_wall_row(const RoundBody& body, Complex medium, int order, Complex WallResponse::*part) {
  VectorXcd values(2 * order);
  for (int k = 1; k <= order; ++k)
    values(2 * k - 2) = values(2 * k - 1) = wall_response(body, medium, k).*part;
  return values;
}

// The wall's inner surface acts by its exact image; what its outer surface adds falls like
// (inner / outer radius)^(2 k) and is summed over the wall's harmonics.
void add_body_wall(Potentials& potentials, const Region& inside, const RoundBody& body, Complex medium,
                   const MatrixXd& at_wall) {
  const Complex image = inner_surface_reflection(body, medium);
  const VectorXcd rest =
      per_wall_row(body, medium, static_cast<int>(at_wall.rows() / 2), &WallResponse::back_inside).array() -
      image;
  const MatrixXd images = wall_images(circles_of(inside), body.inner_radius);
  const auto add = [&](MatrixXd& sum, double factor, const VectorXd& weights) {
    sum += factor * images;
    sum.noalias() += at_wall.transpose() * weights.asDiagonal() * at_wall;
  };
  add(potentials.real, image.real(), rest.real());
  if (image.imag() == 0.0 && rest.imag().cwiseAbs().maxCoeff() == 0.0) return;
  potentials.imaginary = MatrixXd::Zero(potentials.real.rows(), potentials.real.cols());
  add(potentials.imaginary, image.imag(), rest.imag());
}

}  // namespace

MatrixXcd potential_coefficients(const Region& region) {
  const Potentials potentials = potentials_without_wall(region);
  return port_matrix(region, potentials, charge_ports(region, potentials));
}

CircleResponse body_response(const RoundBody& body, const Region& inside, Complex medium, int order,
                             int wall_order) {
  Potentials potentials = potentials_without_wall(inside);
  const MatrixXd at_wall =
      harmonics_at_wall(circles_of(inside), body.inner_radius, std::max(order, wall_order));
  add_body_wall(potentials, inside, body, medium, at_wall);
  Ports ports = charge_ports(inside, potentials);

  const Eigen::Index charges = ports.direct.cols(), waves = 2 * order;
  const VectorXcd through = per_wall_row(body, medium, order, &WallResponse::through);
  const MatrixXcd arriving =
      at_wall.topRows(waves).transpose() * through.asDiagonal();  // at circles and harmonics
  const MatrixXcd to_conductors = membership(inside).transpose() * arriving.topRows(potentials.charges);
  ports.drive.conservativeResize(Eigen::NoChange, charges + waves);
  ports.drive.rightCols(waves) = inside.medium * arriving.bottomRows(potentials.harmonics());
  ports.outgoing.conservativeResize(Eigen::NoChange, charges + waves);
  ports.outgoing.rightCols(waves).setZero();
  MatrixXcd direct(charges + waves, charges + waves);
  direct << ports.direct, to_conductors, to_conductors.transpose(),
      MatrixXcd((medium * per_wall_row(body, medium, order, &WallResponse::back_outside)).asDiagonal());
  ports.direct = direct;

  const MatrixXcd z = port_matrix(inside, potentials, ports);
  CircleResponse response;
  response.circle.order = order;
  response.coupled = z.bottomRightCorner(waves, waves) / medium;
  response.outgoing = z.bottomLeftCorner(waves, charges);
  response.potentials = z.topLeftCorner(charges, charges).array();
  if (body.outer_radius > body.inner_radius)
    response.potentials.array() +=
        std::log(body.outer_radius / body.inner_radius) / complex_permittivity(body.wall);
  for (const CircleResponse& circle : inside.circles)
    response.conductors.insert(response.conductors.end(), circle.conductors.begin(), circle.conductors.end());
  return response;
}

}  // namespace engine
