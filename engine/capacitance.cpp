#include "engine/capacitance.h"

#include <Eigen/Cholesky>
#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/constants.h"
#include "engine/round_region.h"
#include "engine/section_solver.h"

namespace engine {
namespace {

using Eigen::MatrixXcd;
using Eigen::MatrixXd;

constexpr int k_largest_system = 4000;  // unknowns of a region: some seconds
constexpr double k_growth = 4.0 / 3.0;  // of all orders where the tolerance is not met

// What the walls' echoes and the sum of the losses leave out, of the tolerance: the levels do not show it.
constexpr double k_left_out = 0.01;

MatrixXcd without_reference(const CrossSection& section, const MatrixXcd& all) {
  if (section.surroundings != Surroundings::open) return all;
  std::vector<int> rows;
  for (int i = 0; i < section.conductor_count(); ++i)
    if (i != section.reference) rows.push_back(i);
  return all(rows, rows);
}

double relative_difference(const MatrixXcd& a, const MatrixXcd& b) {
  if (a.size() == 0) return 0.0;
  const Eigen::VectorXd size = a.real().diagonal().cwiseSqrt().cwiseInverse();
  return (size.asDiagonal() * (a - b).real() * size.asDiagonal()).cwiseAbs().maxCoeff();
}

// The error at full order, told from how far the two lower levels lie off. Model: error falls like
// exp(-c sqrt(order)), the slowest the laws allow; c follows from the two differences.
double extrapolated_error(const LevelMatrices& c, const Orders& orders) {
  constexpr double k_rounding = 1e-14, k_safety = 2.5;
  const double low = relative_difference(c[2], c[0]), high = relative_difference(c[2], c[1]);
  if (high <= k_rounding) return k_rounding;
  const double x = 1 - std::sqrt(1.0 * orders[1] / orders[2]), y = 1 - std::sqrt(1.0 * orders[0] / orders[2]);
  const auto ratio = [&](double rate) { return std::expm1(rate * x) / std::expm1(rate * y); };  // falls
  double least = 1.0, most = 60.0;
  if (high / low >= ratio(least)) return std::max(low, high);  // hardly converges
  for (int i = 0; i < 50; ++i) {
    const double middle = (least + most) / 2;
    (ratio(middle) > high / low ? least : most) = middle;
  }
  // Nor does it fall faster than if it had begun at 1.
  const double from_one = std::pow(high, 1 / (1 - x));
  return std::max({k_rounding, from_one, high / std::expm1(least * x)}) * k_safety;
}

struct Solved {
  MatrixXcd capacitance;  // F/m, without the reference
  int order = 0;
  double error = 0.0;
};

// Grows the orders until the error, told from lower orders, is within the tolerance, or the work gets
// out of hand; then the error says so.
Solved solve(const CrossSection& section) {
  SectionSolver solver(section);
  for (double scale = 1.0;; scale *= k_growth) {
    LevelMatrices c = solver.capacitance(scale);
    for (MatrixXcd& matrix : c) matrix = without_reference(section, matrix);
    const Orders& orders = solver.largest_orders();
    const double error = extrapolated_error(c, orders) + k_left_out * section.tolerance;
    const bool exhausted =
        k_growth * solver.largest_system() > k_largest_system || k_growth * orders.back() > k_largest_order;
    if (error <= section.tolerance || exhausted) return {c.back(), orders.back(), error};
  }
}

// The same metal without any insulation.
CrossSection bare(const CrossSection& section) {
  CrossSection result = section;
  result.bodies.clear();
  for (RoundConductor& conductor : result.conductors) conductor.layers.clear();
  for (Shell& shell : result.shells) {
    shell.layers.clear();
    shell.filler = {};
  }
  return result;
}

// The truth is symmetric, has no positive off-diagonal and no negative row sum; rounding and what the
// tolerance leaves may break that by as much as themselves. Take the mean of both halves, clip, and raise
// the diagonal until a row sums to no less than zero in whichever order it is added up.
MatrixXd in_maxwell_form(const MatrixXd& computed) {
  MatrixXd c = (computed + computed.transpose()) / 2;
  const double rounding = 2.0 * static_cast<double>(c.rows()) * std::numeric_limits<double>::epsilon();
  for (Eigen::Index i = 0; i < c.rows(); ++i) {
    double others = 0.0;
    for (Eigen::Index j = 0; j < c.cols(); ++j)
      if (i != j) others -= c(i, j) = std::min(c(i, j), 0.0);
    c(i, i) = std::max(c(i, i), others * (1 + rounding));
  }
  return c;
}

MatrixXd inverse(const MatrixXd& positive_definite) {
  const Eigen::Index n = positive_definite.rows();
  if (n == 0) return positive_definite;
  const MatrixXd result = positive_definite.llt().solve(MatrixXd::Identity(n, n));
  return (result + result.transpose()) / 2;
}

}  // namespace

FieldMatrices field_matrices(const CrossSection& section, Inductance inductance) {
  require_valid(section);
  const Solved solved = solve(section);
  FieldMatrices matrices;
  matrices.capacitance = in_maxwell_form(solved.capacitance.real());
  const MatrixXd loss = -solved.capacitance.imag();
  matrices.loss_capacitance = (loss + loss.transpose()) / 2;
  if (inductance == Inductance::with) {
    matrices.external_inductance = k_mu_0 * k_epsilon_0 * inverse(solve(bare(section)).capacitance.real());
  }
  matrices.order = solved.order;
  matrices.estimated_relative_error = solved.error;
  return matrices;
}

}  // namespace engine
