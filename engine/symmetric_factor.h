// A complex symmetric matrix given as a sum of small dense blocks, factored without ever being assembled.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <functional>
#include <memory>
#include <optional>
#include <vector>

#include "engine/sparse_lu.h"

namespace engine {

/// Which unknowns each block couples: block e those at begin[e] to begin[e + 1], each once.
struct BlockPattern {
  std::vector<int> begin{0};
  std::vector<int> unknowns;

  int count() const { return static_cast<int>(begin.size()) - 1; }
  int size(int block) const { return begin[block + 1] - begin[block]; }
};

/// L D L^T of a complex symmetric matrix whose rotation by some angle has a positive definite real part, so
/// that no pivoting is needed. Multifrontal: a block goes straight into the dense front of the first of its
/// unknowns to be eliminated. Unknowns in the same blocks are one group, and minimum degree orders the
/// groups. Method and sources: engine/README.md, "The network".
class SymmetricFactor {
 public:
  /// Sets its last argument (size(block) square) to the block's entries in the order of its unknowns.
  using BlockOf = std::function<void(int block, Eigen::MatrixXcd& entries)>;

  /// Nothing if a pivot vanishes: then the matrix is singular, or not of the kind that needs no pivoting.
  static std::optional<SymmetricFactor> make(int size, const BlockPattern& pattern, const BlockOf& block_of);
  ~SymmetricFactor();
  SymmetricFactor(SymmetricFactor&&) noexcept;
  SymmetricFactor& operator=(SymmetricFactor&&) noexcept;

  /// Overwrites `right_side` with its solution. Safe from several threads at once.
  void solve(Eigen::Ref<Eigen::VectorXcd> right_side) const;

  /// r^T inv(A) r for each sparse r, not refined: r climbs its path to the root of the elimination tree
  /// alone.
  std::vector<std::complex<double>> quadratic_forms(
      const std::vector<std::vector<SparseLu::Entry>>& vectors) const;

  std::size_t entries() const;  // stored in L, zeros inside fronts counted

 private:
  struct Impl;
  explicit SymmetricFactor(std::unique_ptr<Impl> impl);
  std::unique_ptr<Impl> impl_;
};

}  // namespace engine
