// The solved network: voltages, currents, and what any two points show to the outside.
#pragma once

#include <Eigen/Core>
#include <memory>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include "engine/network.h"

namespace engine {

/// A network solved to the last digits that double precision can hold, also where floating
/// conductors hang on admittances of 1e-9 S beside series admittances of 1e3 S: one base potential
/// per island and deviations from it, live nodes counted from their no-load potential, one
/// refinement on stored voltage drops. Floating voltages and source impedances hold 1e-10 relative,
/// an EMF of microvolts along a floating conductor 1e-8.
/// Formulation and source: engine/README.md, "The network".
class SolvedNetwork {
 public:
  /// Factors and solves. Throws std::invalid_argument as require_valid does or if a line's impedance has
  /// no inverse, std::runtime_error if the network resonates without loss. Nodes of islands that nothing
  /// ties to earth, not even capacitance, are listed in undetermined(); the rest is solved, and so are the
  /// differences inside each such group of islands.
  explicit SolvedNetwork(Network network);
  ~SolvedNetwork();
  SolvedNetwork(SolvedNetwork&&) noexcept;
  SolvedNetwork& operator=(SolvedNetwork&&) noexcept;

  const Network& network() const;

  /// Nodes whose potential nothing determines; their voltages are NaN.
  const std::vector<int>& undetermined() const;

  /// Largest unbalanced current of a node or island over the sum of the magnitudes of the products it is
  /// the rest of (the componentwise backward error of Oettli and Prager, 1964), after refinement; computed,
  /// never assumed.
  double residual() const;

  Complex volts(int node) const;      // V RMS, from earth
  Complex volts(int a, int b) const;  // V RMS, v_a - v_b, without cancellation inside an island
  Complex current(int line, int conductor, int cell = 0) const;  // A, in the series branch, from -> to

  /// Thevenin impedance between nodes a and b, ohm, all EMFs at rest. One solve. NaN where volts(a, b) is.
  Complex source_impedance(int a, int b) const;

  /// The same for many pairs at once, some microseconds each: read off the factors, not refined, so 1e-9.
  std::vector<Complex> source_impedances(std::span<const std::pair<int, int>> pairs) const;

  /// Every node's volts while 1 A flows into a and out of b, all EMFs at rest: ohm, size node_count. NaN
  /// for undetermined nodes, and for all if volts(a, b) is. Symmetric: response(a, 0)[b] = response(b, 0)[a].
  Eigen::VectorXcd response(int a, int b) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
  friend class Attribution;
  friend class Sensitivity;
};

}  // namespace engine
