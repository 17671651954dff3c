// The linear solver behind the network: the one place that knows which library factors.
#pragma once

#include <Eigen/Core>
#include <Eigen/SparseCore>
#include <complex>
#include <memory>
#include <vector>

namespace engine {

/// A factored sparse complex matrix of symmetric pattern. Its rotation by some angle has a positive
/// definite real part, so the pivots stay on the diagonal and the ordering is free.
class SparseLu {
 public:
  /// Orders (minimum degree) and factors. Throws std::runtime_error if the matrix is singular or too large.
  explicit SparseLu(Eigen::SparseMatrix<std::complex<double>> matrix);
  ~SparseLu();
  SparseLu(SparseLu&&) noexcept;
  SparseLu& operator=(SparseLu&&) noexcept;

  /// Overwrites each column of `right_sides` with its solution. Safe, but one at a time, from several
  /// threads.
  void solve(Eigen::MatrixXcd& right_sides) const;

  struct Entry {
    int row = 0;
    std::complex<double> value;
  };
  /// r^T inv(A) r for each sparse r, not refined. Each touches only its paths in the factors, some
  /// microseconds' worth, where a solution costs all of them. The first call copies the factors.
  std::vector<std::complex<double>> quadratic_forms(const std::vector<std::vector<Entry>>& vectors) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace engine
