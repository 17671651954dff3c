#include "engine/section_solver.h"

#include <Eigen/LU>
#include <algorithm>
#include <numbers>

#include "engine/constants.h"
#include "engine/flat_region.h"
#include "engine/round_region.h"

namespace engine {

using Eigen::MatrixXcd;

LevelMatrices SectionSolver::capacitance(double scale) {
  largest_orders_ = {};
  largest_system_ = 0;
  const int n = tree_.section().conductor_count();
  LevelMatrices total;
  total.fill(MatrixXcd::Zero(n, n));
  for (int i = k_surroundings; i < tree_.size(); ++i) {
    if (i != k_surroundings && tree_.solid(i).kind != Solid::Kind::shell) continue;
    if (tree_.has_outlines(i))
      add_with_outlines(total, i, scale);
    else
      add_round(total, i, scale);
  }
  return total;
}

void SectionSolver::add_round(LevelMatrices& total, int enclosure, double scale) {
  RoundRegions regions(tree_, scale);
  const Region region = regions.region_of(enclosure);
  if (regions.largest_orders().back() > largest_orders_.back()) largest_orders_ = regions.largest_orders();
  largest_system_ = std::max(largest_system_, regions.largest_system());
  std::vector<int> numbers;
  for (const CircleResponse& circle : region.circles)
    numbers.insert(numbers.end(), circle.conductors.begin(), circle.conductors.end());
  if (numbers.empty()) return;
  const LevelMatrices potentials = potential_coefficients(region);
  for (size_t level = 0; level < k_levels; ++level) add(total[level], potentials[level], numbers, enclosure);
}

void SectionSolver::add_with_outlines(LevelMatrices& total, int enclosure, double scale) {
  const FlatRegion flat = flat_region(tree_, enclosure);
  if (flat.numbers.empty()) return;
  Orders orders = {};
  for (size_t level = 0; level < k_levels; ++level) {
    const OutlineSolution solution = potential_coefficients(flat.region, scale * k_fractions[level]);
    add(total[level], solution.potentials, flat.numbers, enclosure);
    orders[level] = solution.order;
    largest_system_ = std::max(largest_system_, solution.unknowns);
  }
  if (orders.back() > largest_orders_.back()) largest_orders_ = orders;
}

// What an enclosure holds of charge is counted on the shell around it too.
void SectionSolver::add(MatrixXcd& total, const MatrixXcd& potentials, const std::vector<int>& numbers,
                        int enclosure) const {
  MatrixXcd c = potentials.inverse() * (2 * std::numbers::pi * k_epsilon_0);
  if (enclosure == k_surroundings && tree_.section().surroundings == Surroundings::open) {
    // No net charge: the generalised capacitance matrix after Clements, Paul and Adams.
    const Eigen::VectorXcd sums = c.rowwise().sum();
    c -= sums * sums.transpose() / sums.sum();
  }
  total(numbers, numbers) += c;
  if (enclosure == k_surroundings) return;
  const int shell = tree_.number_of(enclosure);
  const Eigen::VectorXcd sums = c.rowwise().sum();
  for (size_t i = 0; i < numbers.size(); ++i) {
    total(numbers[i], shell) -= sums(static_cast<Eigen::Index>(i));
    total(shell, numbers[i]) -= sums(static_cast<Eigen::Index>(i));
  }
  total(shell, shell) += sums.sum();
}

}  // namespace engine
