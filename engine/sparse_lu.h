// The linear solver behind the network: the one place that knows which library factors.
#pragma once

#include <Eigen/Core>
#include <Eigen/SparseCore>
#include <complex>
#include <memory>

namespace engine {

/// A factored sparse complex matrix of symmetric pattern. Its rotation by some angle has a positive
/// definite real part, so the pivots stay on the diagonal and the ordering is free.
class SparseLu {
 public:
  /// Orders (minimum degree) and factors. Throws std::runtime_error if the matrix is singular or too large.
  explicit SparseLu(const Eigen::SparseMatrix<std::complex<double>>& matrix);
  ~SparseLu();
  SparseLu(SparseLu&&) noexcept;
  SparseLu& operator=(SparseLu&&) noexcept;

  /// Overwrites each column of `right_sides` with its solution. Safe, but one at a time, from several
  /// threads.
  void solve(Eigen::MatrixXcd& right_sides) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace engine
