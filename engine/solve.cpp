#include "engine/solve.h"

#include <algorithm>
#include <cassert>
#include <limits>
#include <stdexcept>
#include <utility>

#include "engine/solve_impl.h"

namespace engine {
namespace {

constexpr Complex k_unknown{std::numeric_limits<double>::quiet_NaN(),
                            std::numeric_limits<double>::quiet_NaN()};

Network checked(Network network) {
  require_valid(network);
  return network;
}

Drive one_ampere(int a, int b) { return {false, {{a, 1.0}, {b, -1.0}}}; }

}  // namespace

SolvedNetwork::Impl::Impl(Network wanted)
    : network(checked(std::move(wanted))), basis(flatten(network)), state(basis.solve({true, {}})) {
  first_section.push_back(0);
  for (const Line& line : network.lines) first_section.push_back(first_section.back() + line.cells);
  for (int node = 0; node < network.node_count; ++node)
    if (!basis.is_determined(node)) undetermined.push_back(node);
}

SolvedNetwork::SolvedNetwork(Network network) : impl_(std::make_unique<Impl>(std::move(network))) {}
SolvedNetwork::~SolvedNetwork() = default;
SolvedNetwork::SolvedNetwork(SolvedNetwork&&) noexcept = default;
SolvedNetwork& SolvedNetwork::operator=(SolvedNetwork&&) noexcept = default;

const Network& SolvedNetwork::network() const { return impl_->network; }
const std::vector<int>& SolvedNetwork::undetermined() const { return impl_->undetermined; }
double SolvedNetwork::residual() const { return impl_->state.residual; }

Complex SolvedNetwork::volts(int node) const {
  assert(node >= 0 && node < impl_->network.node_count && "node out of range");
  return impl_->basis.is_determined(node) ? impl_->basis.potential(impl_->state, node) : k_unknown;
}

Complex SolvedNetwork::volts(int a, int b) const {
  assert(std::min(a, b) >= 0 && std::max(a, b) < impl_->network.node_count && "node out of range");
  return impl_->basis.is_determined(a, b) ? impl_->basis.drop(impl_->state, a, b) : k_unknown;
}

Complex SolvedNetwork::current(int line, int conductor, int cell) const {
  const Section& section = impl_->basis.network().sections[impl_->first_section[line] + cell];
  const Eigen::VectorXcd drops = impl_->basis.series_drops(impl_->state, section);
  return (section.blocks->series.row(conductor) * drops)(0);
}

Complex SolvedNetwork::source_impedance(int a, int b) const {
  if (a == b) return {};
  if (!impl_->basis.is_determined(a, b)) return k_unknown;
  return impl_->basis.drop(impl_->basis.solve(one_ampere(a, b)), a, b);
}

std::vector<Complex> SolvedNetwork::source_impedances(std::span<const std::pair<int, int>> pairs) const {
  std::vector<Complex> impedances = impl_->basis.source_impedances(pairs);
  for (std::size_t i = 0; i < pairs.size(); ++i)
    if (!impl_->basis.is_determined(pairs[i].first, pairs[i].second)) impedances[i] = k_unknown;
  return impedances;
}

Eigen::VectorXcd SolvedNetwork::response(int a, int b) const {
  const IslandBasis& basis = impl_->basis;
  Eigen::VectorXcd volts = Eigen::VectorXcd::Constant(impl_->network.node_count, k_unknown);
  if (!basis.is_determined(a, b)) return volts;
  const IslandBasis::State state = basis.solve(one_ampere(a, b));
  for (int node = 0; node < impl_->network.node_count; ++node)
    if (basis.is_determined(node)) volts[node] = basis.potential(state, node);
  return volts;
}

}  // namespace engine
