#include "engine/island_basis.h"

#include <algorithm>
#include <cassert>
#include <cmath>
#include <utility>

namespace engine {
namespace {

constexpr int k_most_refinements = 4;
constexpr double k_small_residual = 1e-15;  // rounding of the last digit, no more to gain

double size_of(Complex value) { return std::abs(value.real()) + std::abs(value.imag()); }

/// Adds an admittance block between ports to the dense block of `unknowns`, which rise.
void add_block(const Eigen::MatrixXcd& block, const std::vector<Port>& ports,
               const std::vector<int>& unknowns, Eigen::MatrixXcd& entries) {
  std::vector<std::array<Port::Term, 4>> rows;  // terms with their row in place of the unknown
  rows.reserve(ports.size());
  for (const Port& port : ports) {
    rows.push_back(port.terms);
    for (int p = 0; p < port.count; ++p)
      rows.back()[p].unknown = static_cast<int>(
          std::lower_bound(unknowns.begin(), unknowns.end(), port.terms[p].unknown) - unknowns.begin());
  }
  for (std::size_t j = 0; j < ports.size(); ++j)
    for (int q = 0; q < ports[j].count; ++q) {
      Complex* column = entries.col(rows[j][q].unknown).data();
      for (std::size_t i = 0; i < ports.size(); ++i)
        for (int p = 0; p < ports[i].count; ++p)
          column[rows[i][p].unknown] += rows[i][p].sign * rows[j][q].sign * block(i, j);
    }
}

/// Entries (p, q) of an admittance block between ports, into the equations of their unknowns.
void add_block(const Eigen::MatrixXcd& block, const std::vector<Port>& ports,
               std::vector<Eigen::Triplet<Complex>>& entries) {
  for (std::size_t j = 0; j < ports.size(); ++j)
    for (std::size_t i = 0; i < ports.size(); ++i)
      for (int q = 0; q < ports[j].count; ++q)
        for (int p = 0; p < ports[i].count; ++p) {
          const Port::Term row = ports[i].terms[p], column = ports[j].terms[q];
          entries.emplace_back(row.unknown, column.unknown, row.sign * column.sign * block(i, j));
        }
}

}  // namespace

/// For each equation the current that is left over, and the sum of the magnitudes it is the rest of. The
/// current of a branch is rounded once and enters both its ends; the sums are compensated (Neumaier 1974), so
/// that what the ends of an island lose together is lost nowhere: a hundred amperes of load leave no trace in
/// the nanoamperes that tie the island to earth.
struct IslandBasis::Balance {
  Eigen::VectorXcd rest;       // A
  Eigen::VectorXcd rounding;   // A, to be added to rest
  Eigen::VectorXd magnitudes;  // A

  explicit Balance(int size)
      : rest(Eigen::VectorXcd::Zero(size)),
        rounding(Eigen::VectorXcd::Zero(size)),
        magnitudes(Eigen::VectorXd::Zero(size)) {}

  void add(const Port& port, Complex current, double magnitude) {
    for (int i = 0; i < port.count; ++i) {
      const int row = port.terms[i].unknown;
      const Complex term = -port.terms[i].sign * current;
      const Complex sum = rest[row] + term;
      rounding[row] += Complex(lost(rest[row].real(), term.real(), sum.real()),
                               lost(rest[row].imag(), term.imag(), sum.imag()));
      rest[row] = sum;
      magnitudes[row] += magnitude;
    }
  }

  void add(const Eigen::MatrixXcd& block, const std::vector<Port>& ports, const Eigen::VectorXcd& drops) {
    for (Eigen::Index i = 0; i < drops.size(); ++i) {
      Complex current;
      double magnitude = 0;
      for (Eigen::Index j = 0; j < drops.size(); ++j) {
        const Complex part = block(i, j) * drops[j];
        current += part;
        magnitude += size_of(part);
      }
      add(ports[i], current, magnitude);
    }
  }

  Eigen::VectorXcd total() const { return rest + rounding; }

  double residual() const {
    double worst = 0;
    for (Eigen::Index i = 0; i < rest.size(); ++i)
      if (magnitudes[i] > 0) worst = std::max(worst, size_of(rest[i] + rounding[i]) / magnitudes[i]);
    return worst;
  }

 private:
  static double lost(double a, double b, double sum) {
    return std::abs(a) >= std::abs(b) ? (a - sum) + b : (b - sum) + a;
  }
};

IslandBasis::IslandBasis(FlatNetwork network)
    : network_(std::move(network)), islands_(find_islands(network_)) {
  number_unknowns();
  factor_ = SymmetricFactor::make(unknown_count_, pattern(),
                                  [this](int index, Eigen::MatrixXcd& entries) { block(index, entries); });
  if (!factor_) pivoted_.emplace(assemble());
}

void IslandBasis::solve_for(Eigen::VectorXcd& right_side) const {
  if (factor_) return factor_->solve(right_side);
  Eigen::MatrixXcd column = right_side;
  pivoted_->solve(column);
  right_side = column.col(0);
}

void IslandBasis::unknowns_of(int block, std::vector<int>& unknowns) const {
  unknowns.clear();
  const auto add = [&](const Port& port) {
    for (int i = 0; i < port.count; ++i) unknowns.push_back(port.terms[i].unknown);
  };
  const int sections = static_cast<int>(network_.sections.size());
  if (block < sections) {
    const Section& section = network_.sections[block];
    for (const auto ends : {network_.from(section), network_.to(section)})
      for (const int node : ends) add(node_port(node, false));
  } else {
    const Branch& branch = network_.branches[block - sections];
    add(drop_port(branch.a, branch.b, false));
  }
  std::sort(unknowns.begin(), unknowns.end());
  unknowns.erase(std::unique(unknowns.begin(), unknowns.end()), unknowns.end());
}

BlockPattern IslandBasis::pattern() const {
  BlockPattern pattern;
  std::vector<int> unknowns;
  const int count = static_cast<int>(network_.sections.size() + network_.branches.size());
  for (int index = 0; index < count; ++index) {
    unknowns_of(index, unknowns);
    pattern.unknowns.insert(pattern.unknowns.end(), unknowns.begin(), unknowns.end());
    pattern.begin.push_back(static_cast<int>(pattern.unknowns.size()));
  }
  return pattern;
}

void IslandBasis::block(int index, Eigen::MatrixXcd& entries) const {
  std::vector<int> unknowns;
  std::vector<Port> ports;
  unknowns_of(index, unknowns);
  entries.setZero(static_cast<Eigen::Index>(unknowns.size()), static_cast<Eigen::Index>(unknowns.size()));
  const int sections = static_cast<int>(network_.sections.size());
  if (index >= sections) {
    const Branch& branch = network_.branches[index - sections];
    const Eigen::MatrixXcd single = Eigen::MatrixXcd::Constant(1, 1, branch.admittance);
    return add_block(single, {drop_port(branch.a, branch.b, false)}, unknowns, entries);
  }
  const Section& section = network_.sections[index];
  const auto from = network_.from(section), to = network_.to(section);
  for (int i = 0; i < section.size(); ++i) ports.push_back(drop_port(from[i], to[i], false));
  add_block(section.blocks->series, ports, unknowns, entries);
  for (const auto ends : {from, to}) {
    ports.clear();
    for (const int node : ends) ports.push_back(node_port(node, false));
    add_block(section.blocks->half_shunt, ports, unknowns, entries);
  }
}

void IslandBasis::number_unknowns() {
  deviation_.assign(network_.node_count, -1);
  base_.assign(islands_.root.size(), -1);
  for (int node = 0; node < network_.node_count; ++node)
    if (islands_.root[islands_.of_node[node]] != node) deviation_[node] = unknown_count_++;
  for (std::size_t island = 0; island < base_.size(); ++island)
    if (!islands_.is_group_root[island]) base_[island] = unknown_count_++;
}

Port IslandBasis::node_port(int node, bool emfs) const {
  Port port;
  port.add(base_[islands_.of_node[node]], 1);
  port.add(deviation_[node], 1);
  if (emfs) port.known = islands_.offset[node];
  return port;
}

Port IslandBasis::drop_port(int a, int b, bool emfs) const {
  Port port;
  if (a == b) return port;
  if (const int base_a = base_[islands_.of_node[a]], base_b = base_[islands_.of_node[b]]; base_a != base_b) {
    port.add(base_a, 1);
    port.add(base_b, -1);
  }
  port.add(deviation_[a], 1);
  port.add(deviation_[b], -1);
  if (emfs) port.known = islands_.offset[a] - islands_.offset[b];
  return port;
}

Complex IslandBasis::value(const State& state, const Port& port) {
  Complex first, correction;
  for (int i = 0; i < port.count; ++i) {
    first += port.terms[i].sign * state.first[port.terms[i].unknown];
    correction += port.terms[i].sign * state.correction[port.terms[i].unknown];
  }
  return port.known + (first + correction);
}

Complex IslandBasis::potential(const State& state, int node) const {
  return value(state, node_port(node, state.emfs));
}

Complex IslandBasis::drop(const State& state, int a, int b) const {
  return value(state, drop_port(a, b, state.emfs));
}

Eigen::VectorXcd IslandBasis::series_drops(const State& state, const Section& section) const {
  const auto from = network_.from(section), to = network_.to(section);
  Eigen::VectorXcd drops(section.size());
  for (int i = 0; i < section.size(); ++i) drops[i] = drop(state, from[i], to[i]);
  return drops;
}

Eigen::VectorXcd IslandBasis::series_currents(const State& state, const Section& section) const {
  return section.blocks->series * series_drops(state, section);
}

Eigen::SparseMatrix<Complex> IslandBasis::assemble() const {
  std::vector<Eigen::Triplet<Complex>> entries;
  std::vector<Port> ports;
  Eigen::MatrixXcd single(1, 1);
  for (const Section& section : network_.sections) {
    const auto from = network_.from(section), to = network_.to(section);
    ports.clear();
    for (int i = 0; i < section.size(); ++i) ports.push_back(drop_port(from[i], to[i], false));
    add_block(section.blocks->series, ports, entries);
    for (const auto ends : {from, to}) {
      ports.clear();
      for (const int node : ends) ports.push_back(node_port(node, false));
      add_block(section.blocks->half_shunt, ports, entries);
    }
  }
  for (const Branch& branch : network_.branches) {
    single(0, 0) = branch.admittance;
    add_block(single, {drop_port(branch.a, branch.b, false)}, entries);
  }
  Eigen::SparseMatrix<Complex> matrix(unknown_count_, unknown_count_);
  matrix.setFromTriplets(entries.begin(), entries.end());
  return matrix;
}

IslandBasis::Balance IslandBasis::balance(const State& state, const Drive& drive) const {
  Balance balance(unknown_count_);
  std::vector<Port> ports;
  Eigen::VectorXcd drops;
  const auto add = [&](const Eigen::MatrixXcd& block) {
    drops.resize(static_cast<Eigen::Index>(ports.size()));
    for (std::size_t i = 0; i < ports.size(); ++i) drops[i] = value(state, ports[i]);
    balance.add(block, ports, drops);
    ports.clear();
  };
  for (const Section& section : network_.sections) {
    const auto from = network_.from(section), to = network_.to(section);
    for (int i = 0; i < section.size(); ++i) ports.push_back(drop_port(from[i], to[i], state.emfs));
    add(section.blocks->series);
    for (const auto ends : {from, to}) {
      for (const int node : ends) ports.push_back(node_port(node, state.emfs));
      add(section.blocks->half_shunt);
    }
  }
  for (const Branch& branch : network_.branches) {
    Port port = drop_port(branch.a, branch.b, state.emfs);
    if (state.emfs) port.known -= branch.emf;
    const Complex current = branch.admittance * value(state, port);
    balance.add(port, current, size_of(current));
  }
  for (const Drive::Injection& injection : drive.injections)
    balance.add(node_port(injection.node, false), -injection.current, size_of(injection.current));
  return balance;
}

IslandBasis::State IslandBasis::solve(const Drive& drive) const {
  State state{drive.emfs, Eigen::VectorXcd::Zero(unknown_count_), Eigen::VectorXcd::Zero(unknown_count_),
              0.0};
  state.first = balance(state, drive).total();
  solve_for(state.first);
  // The residual is formed from drops, each the difference of deviations and never of potentials, so one
  // correction gives what double precision can hold; more help where an island hangs on a weak load.
  Balance now = balance(state, drive);
  state.residual = now.residual();
  for (int i = 0; i < k_most_refinements; ++i) {
    const double before = state.residual;
    Eigen::VectorXcd step = now.total();
    solve_for(step);
    state.correction += step;
    now = balance(state, drive);
    state.residual = now.residual();
    if (state.residual < k_small_residual || state.residual > 0.5 * before) break;
  }
  return state;
}

std::vector<Complex> IslandBasis::source_impedances(std::span<const std::pair<int, int>> pairs) const {
  std::vector<std::vector<SparseLu::Entry>> currents;
  for (const auto& [a, b] : pairs) {
    std::vector<SparseLu::Entry>& entries = currents.emplace_back();
    const Port port = drop_port(a, b, false);
    for (int i = 0; i < port.count; ++i) entries.push_back({port.terms[i].unknown, port.terms[i].sign});
  }
  return factor_ ? factor_->quadratic_forms(currents) : pivoted_->quadratic_forms(currents);
}

}  // namespace engine
