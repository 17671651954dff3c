// Nodal analysis in coordinates in which nothing cancels: a base potential for each island, deviations from
// it.
#pragma once

#include <Eigen/Core>
#include <array>
#include <optional>
#include <span>
#include <utility>
#include <vector>

#include "engine/flat_network.h"
#include "engine/islands.h"
#include "engine/sparse_lu.h"
#include "engine/symmetric_factor.h"

namespace engine {

/// What drives the network: its own EMFs, or currents put into it with the EMFs at rest.
struct Drive {
  struct Injection {
    int node = 0;
    Complex current;  // A, into the node
  };
  bool emfs = false;
  std::vector<Injection> injections;
};

/// A combination of unknowns with signs, and a known part: a potential or a drop across a branch. It is
/// also the way a current through that branch enters the equations of those unknowns.
struct Port {
  struct Term {
    int unknown = 0;
    double sign = 1.0;
  };
  std::array<Term, 4> terms{};
  int count = 0;
  Complex known;  // V

  void add(int unknown, double sign) {  // unknown < 0: held at zero
    if (unknown >= 0) terms[count++] = {unknown, sign};
  }
};

/// A network in island coordinates: v = offset + base of the island + deviation of the node, with the
/// offset counted only while EMFs drive. Held at zero are the deviation of each island's root, the base of
/// earth's island, and one base in each group of islands that nothing ties to earth.
/// Derivation and sources: engine/README.md, "The network".
class IslandBasis {
 public:
  /// Finds the islands, assembles and factors.
  explicit IslandBasis(FlatNetwork network);

  /// A solution, refined until its residual stops falling. Its unknowns are the unevaluated sum of a first
  /// solution and of all corrections, so that differences of nearly equal potentials keep their digits.
  struct State {
    bool emfs = false;
    Eigen::VectorXcd first;       // V, by unknown
    Eigen::VectorXcd correction;  // V, by unknown
    double residual = 0.0;        // largest over all equations: |sum of terms| over sum of |terms|
  };
  State solve(const Drive& drive) const;

  /// Source impedances (ohm) between pairs of nodes whose difference is determined, not refined.
  std::vector<Complex> source_impedances(std::span<const std::pair<int, int>> pairs) const;

  const FlatNetwork& network() const { return network_; }
  const Islands& islands() const { return islands_; }

  Complex potential(const State& state, int node) const;  // V, from its group's reference
  Complex drop(const State& state, int a, int b) const;   // V, v_a - v_b
  Eigen::VectorXcd series_drops(const State& state, const Section& section) const;  // V, size n
  Eigen::VectorXcd series_currents(const State& state,
                                   const Section& section) const;  // A, size n, from -> to

  /// The matrix, as one block for each section and each branch: what each couples, and its entries.
  BlockPattern pattern() const;
  void block(int index, Eigen::MatrixXcd& entries) const;
  /// The same in one piece, assembled by another path: for the solver that pivots, and to check against.
  Eigen::SparseMatrix<Complex> assemble() const;
  bool is_pivoted() const { return pivoted_.has_value(); }

  /// Whether earth, or a tie to it, determines the node's potential.
  bool is_determined(int node) const { return islands_.group[islands_.of_node[node]] == 0; }
  /// Whether the difference of two potentials is determined.
  bool is_determined(int a, int b) const {
    return islands_.group[islands_.of_node[a]] == islands_.group[islands_.of_node[b]];
  }

 private:
  struct Balance;  // the currents into every equation

  void number_unknowns();
  Port node_port(int node, bool emfs) const;
  Port drop_port(int a, int b, bool emfs) const;
  static Complex value(const State& state, const Port& port);
  void unknowns_of(int block, std::vector<int>& unknowns) const;
  void solve_for(Eigen::VectorXcd& right_side) const;
  Balance balance(const State& state, const Drive& drive) const;

  FlatNetwork network_;
  Islands islands_;
  std::vector<int> deviation_;  // unknown of each node; -1 for a root
  std::vector<int> base_;       // unknown of each island; -1 where held at zero
  int unknown_count_ = 0;
  std::optional<SymmetricFactor> factor_;
  std::optional<SparseLu> pivoted_;  // in its place where a pivot vanishes: resonances
};

}  // namespace engine
