#include "engine/attribution.h"

#include <algorithm>
#include <cassert>
#include <map>
#include <optional>
#include <span>
#include <stdexcept>
#include <string>
#include <utility>

#include "engine/island_basis.h"
#include "engine/solve_impl.h"

namespace engine {
namespace {

constexpr int k_victim = -1;

/// What a group does to the victims along one path: a place in the list of results.
using Cause = std::pair<int, Path>;

/// A current that a fixed voltage drives into a victim node through shunt admittance.
struct ShuntDrive {
  int node = 0;  // in the victims' network
  int cause = 0;
  Complex current;  // A
};

/// An EMF that a fixed current induces in a victim segment.
struct SeriesDrive {
  int section = 0;    // in the victims' network
  int conductor = 0;  // in that section
  int cause = 0;
  Complex emf;  // V
};

/// An EMF behind a branch: a source's own, or the potential of the aggressor at its other end.
struct BranchDrive {
  int branch = 0;  // in the victims' network
  int cause = 0;
  Complex emf;         // V, from b to a
  int aggressor = -1;  // the node whose potential `emf` is, signed by which end it is; -1 for a source's own
};

std::vector<int> victims_of(const std::vector<int>& groups) {
  std::vector<int> victims;
  for (std::size_t i = 0; i < groups.size(); ++i)
    if (groups[i] == k_victim) victims.push_back(static_cast<int>(i));
  return victims;
}

}  // namespace

struct Attribution::Impl {
  Impl(const SolvedNetwork& solved_network, const Aggressors& wanted);

  std::vector<Contribution> contributions(int a, int b) const;

 private:
  const FlatNetwork& whole() const { return solved_.impl_->basis.network(); }
  Complex whole_volts(int node) const { return solved_.impl_->basis.potential(solved_.impl_->state, node); }
  bool is_victim(int node) const { return victim_node_[node] > 0; }

  void require_consistent() const;
  void number_victims();
  void add_line(std::size_t line);
  void add_section(const Section& section, std::size_t line, const std::vector<int>& victims,
                   const std::shared_ptr<const CellBlocks>& blocks);
  void drive_shunts(std::span<const int> ends, const Section& section, std::size_t line,
                    const std::vector<int>& victims);
  void drive_series(const Section& section, std::size_t line, const std::vector<int>& victims);
  void add_branch(const Branch& branch, int source_group);
  int cause(int group, Path path);

  Complex electric_rest(const IslandBasis::State& adjoint) const;
  Complex conductive(const IslandBasis::State& adjoint, const BranchDrive& drive) const;
  Complex against_aggressor(const IslandBasis::State& adjoint, int b, int own_cause) const;

  const SolvedNetwork& solved_;
  Aggressors aggressors_;
  std::vector<int> victim_node_;  // of each node of the whole: its number among the victims, 0 if fixed
  FlatNetwork victims_network_;   // all that is fixed is its earth
  std::vector<ShuntDrive> shunt_drives_;
  std::vector<SeriesDrive> series_drives_;
  std::vector<BranchDrive> branch_drives_;
  std::map<Cause, int> cause_numbers_;
  std::vector<Cause> causes_;
  std::optional<IslandBasis> basis_;
};

Attribution::Impl::Impl(const SolvedNetwork& solved_network, const Aggressors& wanted)
    : solved_(solved_network), aggressors_(wanted) {
  require_consistent();
  number_victims();
  const Network& network = solved_.network();
  for (std::size_t line = 0; line < network.lines.size(); ++line) add_line(line);
  const std::size_t elements = network.elements.size();
  for (std::size_t i = 0; i < whole().branches.size(); ++i)
    add_branch(whole().branches[i], i < elements ? k_victim : aggressors_.of_source[i - elements]);
  basis_.emplace(std::move(victims_network_));
}

void Attribution::Impl::require_consistent() const {
  const Network& network = solved_.network();
  const auto refuse = [](const std::string& what) { throw std::invalid_argument("aggressors: " + what); };
  if (aggressors_.of_node.size() != static_cast<std::size_t>(network.node_count) ||
      aggressors_.of_segment.size() != network.lines.size() ||
      aggressors_.of_source.size() != network.sources.size())
    refuse("a group is due for each node, each line and each source");
  const auto is_fixed = [&](int node) { return node == 0 || aggressors_.of_node[node] != k_victim; };
  for (std::size_t line = 0; line < network.lines.size(); ++line) {
    const Line& ends = network.lines[line];
    const std::string where = "line " + std::to_string(line);
    if (aggressors_.of_segment[line].size() != ends.from.size())
      refuse(where + ": a group is due for each conductor");
    for (std::size_t i = 0; i < ends.from.size(); ++i) {
      const bool fixed = aggressors_.of_segment[line][i] != k_victim;
      if (fixed != is_fixed(ends.from[i]) || fixed != is_fixed(ends.to[i]))
        refuse(where + ", conductor " + std::to_string(i) +
               ": is an aggressor or victim, but not both its ends are");
    }
  }
  for (std::size_t i = 0; i < network.sources.size(); ++i) {
    const Source& source = network.sources[i];
    if (aggressors_.of_source[i] == k_victim && !(is_fixed(source.a) && is_fixed(source.b)))
      refuse("source " + std::to_string(i) + ": feeds a victim and has no group");
  }
}

void Attribution::Impl::number_victims() {
  const Network& network = solved_.network();
  victim_node_.assign(whole().node_count, 0);
  const auto number = [&](int node) {
    if (victim_node_[node] == 0) victim_node_[node] = victims_network_.node_count++;
  };
  for (int node = 1; node < network.node_count; ++node)
    if (aggressors_.of_node[node] == k_victim) number(node);
  for (std::size_t line = 0; line < network.lines.size(); ++line)
    for (int cell = 0; cell + 1 < network.lines[line].cells; ++cell) {
      const auto boundary = whole().to(whole().sections[solved_.impl_->first_section[line] + cell]);
      for (const int i : victims_of(aggressors_.of_segment[line])) number(boundary[i]);
    }
}

int Attribution::Impl::cause(int group, Path path) {
  const auto [found, is_new] = cause_numbers_.try_emplace({group, path}, static_cast<int>(causes_.size()));
  if (is_new) causes_.emplace_back(group, path);
  return found->second;
}

/// The victims of a line keep their own block of its impedance, not of its admittance: the currents of the
/// others are fixed, not their drops.
void Attribution::Impl::add_line(std::size_t line) {
  const std::vector<int> victims = victims_of(aggressors_.of_segment[line]);
  if (victims.empty()) return;
  const Line& source = solved_.network().lines[line];
  const int first = solved_.impl_->first_section[line];
  const Eigen::MatrixXcd& shunt = whole().sections[first].blocks->half_shunt;
  const Eigen::MatrixXcd impedance = source.matrices->impedance(victims, victims);
  const auto blocks = std::make_shared<CellBlocks>(CellBlocks{
      inverse_impedance(impedance, "line " + std::to_string(line)) / (source.length / source.cells),
      shunt(victims, victims)});
  for (int cell = 0; cell < source.cells; ++cell)
    add_section(whole().sections[first + cell], line, victims, blocks);
}

void Attribution::Impl::add_section(const Section& section, std::size_t line, const std::vector<int>& victims,
                                    const std::shared_ptr<const CellBlocks>& blocks) {
  victims_network_.sections.push_back({blocks, victims_network_.ends.size()});
  for (const auto ends : {whole().from(section), whole().to(section)}) {
    for (const int i : victims) victims_network_.ends.push_back(victim_node_[ends[i]]);
    drive_shunts(ends, section, line, victims);
  }
  drive_series(section, line, victims);
}

void Attribution::Impl::drive_shunts(std::span<const int> ends, const Section& section, std::size_t line,
                                     const std::vector<int>& victims) {
  const std::vector<int>& groups = aggressors_.of_segment[line];
  for (int j = 0; j < section.size(); ++j) {
    if (groups[j] == k_victim || ends[j] == 0) continue;
    const int by = cause(groups[j], Path::electric);
    const Complex volts = whole_volts(ends[j]);
    for (const int i : victims)
      if (const Complex y = section.blocks->half_shunt(i, j); y != Complex{})
        shunt_drives_.push_back({victim_node_[ends[i]], by, -y * volts});
  }
}

void Attribution::Impl::drive_series(const Section& section, std::size_t line,
                                     const std::vector<int>& victims) {
  const std::vector<int>& groups = aggressors_.of_segment[line];
  const Line& source = solved_.network().lines[line];
  const double length = source.length / source.cells;  // m
  const Eigen::VectorXcd currents = solved_.impl_->basis.series_currents(solved_.impl_->state, section);
  const int number = static_cast<int>(victims_network_.sections.size()) - 1;
  for (int j = 0; j < section.size(); ++j) {
    if (groups[j] == k_victim) continue;
    const int by = cause(groups[j], Path::magnetic);
    for (std::size_t k = 0; k < victims.size(); ++k)
      series_drives_.push_back({number, static_cast<int>(k), by,
                                source.matrices->impedance(victims[k], j) * length * currents[j]});
  }
}

void Attribution::Impl::add_branch(const Branch& branch, int source_group) {
  if (!is_victim(branch.a) && !is_victim(branch.b)) return;
  const int number = static_cast<int>(victims_network_.branches.size());
  victims_network_.branches.push_back(
      {victim_node_[branch.a], victim_node_[branch.b], branch.admittance, Complex{}});
  if (branch.emf != Complex{})
    branch_drives_.push_back({number, cause(source_group, Path::conductive), branch.emf, -1});
  for (const auto& [node, sign] : {std::pair{branch.a, -1.0}, std::pair{branch.b, 1.0}})
    if (!is_victim(node) && node != 0)
      branch_drives_.push_back(
          {number, cause(aggressors_.of_node[node], Path::conductive), sign * whole_volts(node), node});
}

/// The part of a unit potential on all that is fixed that reaches the probe through shunts.
Complex Attribution::Impl::electric_rest(const IslandBasis::State& adjoint) const {
  Complex sum;
  const FlatNetwork& network = basis_->network();
  for (const Section& section : network.sections)
    for (const auto ends : {network.from(section), network.to(section)})
      for (int i = 0; i < section.size(); ++i)
        sum += section.blocks->half_shunt.row(i).sum() * basis_->potential(adjoint, ends[i]);
  return sum;
}

Complex Attribution::Impl::conductive(const IslandBasis::State& adjoint, const BranchDrive& drive) const {
  const Branch& branch = basis_->network().branches[drive.branch];
  return branch.admittance * drive.emf * basis_->drop(adjoint, branch.a, branch.b);
}

/// What the group of aggressor b conducts to v_a - v_b, b's own potential counted. All that is fixed, raised
/// together, raises the victims with it, so the parts t of its ties add up to one and
///   sum(t_own v) - v_b = sum(t_own (v - v_b)) - sum(t_others) v_b,
/// which keeps its digits where a victim lies a microvolt from an aggressor.
Complex Attribution::Impl::against_aggressor(const IslandBasis::State& adjoint, int b, int own_cause) const {
  std::vector<bool> is_own(basis_->network().branches.size(), false);
  Complex sum;
  for (const BranchDrive& drive : branch_drives_) {
    if (drive.cause != own_cause) continue;
    BranchDrive shifted = drive;
    if (drive.aggressor >= 0) {
      is_own[drive.branch] = true;
      const bool at_a = basis_->network().branches[drive.branch].a == 0;
      shifted.emf = (at_a ? -1.0 : 1.0) * solved_.impl_->basis.drop(solved_.impl_->state, drive.aggressor, b);
    }
    sum += conductive(adjoint, shifted);
  }
  Complex others = electric_rest(adjoint);
  for (std::size_t i = 0; i < is_own.size(); ++i) {
    const Branch& branch = basis_->network().branches[i];
    if (is_own[i] || (branch.a != 0 && branch.b != 0)) continue;
    others += branch.admittance * basis_->potential(adjoint, branch.a == 0 ? branch.b : branch.a);
  }
  return sum - others * whole_volts(b);
}

std::vector<Contribution> Attribution::Impl::contributions(int a, int b) const {
  if (a < 0 || a >= solved_.network().node_count || !is_victim(a))
    throw std::invalid_argument("node " + std::to_string(a) + " is no victim");
  if (b < 0 || b >= solved_.network().node_count)
    throw std::invalid_argument("node " + std::to_string(b) + " is out of range");
  if (a == b || !solved_.impl_->basis.is_determined(a, b)) return {};
  Drive probe{false, {{victim_node_[a], 1.0}}};
  if (is_victim(b)) probe.injections.push_back({victim_node_[b], -1.0});
  const IslandBasis::State adjoint = basis_->solve(probe);

  std::vector<Complex> volts(causes_.size());
  for (const ShuntDrive& drive : shunt_drives_)
    volts[drive.cause] += drive.current * basis_->potential(adjoint, drive.node);
  Eigen::VectorXcd currents;
  for (std::size_t i = 0; i < series_drives_.size(); ++i) {
    const SeriesDrive& drive = series_drives_[i];
    if (i == 0 || drive.section != series_drives_[i - 1].section)
      currents = basis_->series_currents(adjoint, basis_->network().sections[drive.section]);
    volts[drive.cause] += drive.emf * currents[drive.conductor];
  }
  for (const BranchDrive& drive : branch_drives_) volts[drive.cause] += conductive(adjoint, drive);

  std::vector<Contribution> result;
  if (!is_victim(b) && b != 0) {
    const auto own = cause_numbers_.find({aggressors_.of_node[b], Path::conductive});
    const int own_cause = own == cause_numbers_.end() ? -1 : own->second;
    if (own_cause >= 0) volts[own_cause] = Complex{};
    result.push_back({aggressors_.of_node[b], Path::conductive, against_aggressor(adjoint, b, own_cause)});
  }
  for (std::size_t i = 0; i < causes_.size(); ++i)
    if (volts[i] != Complex{}) result.push_back({causes_[i].first, causes_[i].second, volts[i]});
  std::stable_sort(result.begin(), result.end(), [](const Contribution& x, const Contribution& y) {
    return std::abs(x.volts) > std::abs(y.volts);
  });
  return result;
}

Attribution::Attribution(const SolvedNetwork& solved, const Aggressors& aggressors)
    : impl_(std::make_unique<Impl>(solved, aggressors)) {}
Attribution::~Attribution() = default;

std::vector<Contribution> Attribution::contributions(int a, int b) const {
  return impl_->contributions(a, b);
}

}  // namespace engine
