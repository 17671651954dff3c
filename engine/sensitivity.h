// How what a port shows follows every parameter of the network: all derivatives from one more solve.
#pragma once

#include <Eigen/Core>
#include <memory>

#include "engine/solve.h"

namespace engine {

/// What is asked about: R, a function of the open-circuit voltage V and the source impedance Z of the port a,
/// b, with dR = by_volts dV + by_impedance dZ. For an instrument of impedance M, R = V M / (M + Z), they are
/// M / (M + Z) and -V M / (M + Z)^2.
struct Observable {
  int a = 0;
  int b = 0;
  Complex by_volts = 1.0;
  Complex by_impedance = 0.0;
};

/// Derivatives of an observable by the adjoint method (Director and Rohrer 1969); the network being
/// reciprocal, the adjoint state is its own response to 1 A through the port. Entries (i, j) and (j, i) of a
/// matrix count as parameters of their own: contract with a symmetric change, sum of D.cwiseProduct(change).
/// Agrees with central differences within 1e-6. NaN where the port's voltage is undetermined.
class Sensitivity {
 public:
  /// One solve. `solved` must outlive it and stay where it is.
  Sensitivity(const SolvedNetwork& solved, const Observable& observable);
  ~Sensitivity();

  Eigen::MatrixXcd by_shunt(int line) const;      // per S/m of G + j omega C, n x n
  Eigen::MatrixXcd by_impedance(int line) const;  // per ohm/m, n x n
  Complex by_length(int line) const;              // per m, its matrices and number of cells as they are
  Complex by_element(int element) const;          // per S
  Complex by_emf(int source) const;               // per V

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace engine
