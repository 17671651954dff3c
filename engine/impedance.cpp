#include "engine/impedance.h"

#include <cmath>
#include <map>
#include <numbers>
#include <stdexcept>
#include <string>
#include <vector>

#include "engine/constants.h"
#include "engine/earth_return.h"
#include "engine/equivalent_tube.h"
#include "engine/proximity.h"
#include "engine/section_tree.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Eigen::MatrixXcd;
using Eigen::MatrixXd;

constexpr int k_outside = -1;  // the parent of whatever lies in no shell

const Eigen::Vector2d& centre(const CrossSection& section, int k) {
  const int wires = static_cast<int>(section.conductors.size());
  return k < wires ? section.conductors[k].centre : section.shells[k - wires].centre;
}

/// For each conductor the number of the innermost shell that holds it, or k_outside.
std::vector<int> enclosing_shells(const CrossSection& section) {
  const SectionTree tree(section);
  std::vector<int> parents(static_cast<size_t>(section.conductor_count()), k_outside);
  for (int i = 0; i < tree.size(); ++i) {
    if (tree.solid(i).kind == Solid::Kind::body) continue;
    int holder = tree.solid(i).parent;
    while (holder >= 0 && tree.solid(holder).kind == Solid::Kind::body) holder = tree.solid(holder).parent;
    if (holder >= 0) parents[static_cast<size_t>(tree.number_of(i))] = tree.number_of(holder);
  }
  return parents;
}

TubeWall wall_of(const Shell& shell) {
  return equivalent_tube(shell.core, shell.inner_radius, shell.outer_radius);
}

TubeWall tube_of(const CrossSection& section) {
  return equivalent_tube(section.tube_core, section.tube_inner_radius, section.tube_outer_radius);
}

double metal_radius(const CrossSection& section, int k) {
  const int wires = static_cast<int>(section.conductors.size());
  return k < wires ? section.conductors[k].radius : wall_of(section.shells[k - wires]).outer_radius;
}

/// Row k holds 1 for every conductor whose current flows inside the outline of conductor k: its own, and
/// where it is a shell, those of all that it holds.
MatrixXd currents_within(const std::vector<int>& parent) {
  const int n = static_cast<int>(parent.size());
  MatrixXd within = MatrixXd::Identity(n, n);
  for (int k = 0; k < n; ++k) {
    for (int p = parent[k]; p != k_outside; p = parent[p]) within(p, k) = 1.0;
  }
  return within;
}

/// The impedances of the wall of a shell. A stated dc resistance stands for the conductivity that gives it.
TubeImpedance wall_impedance(const Shell& shell, const ImpedanceConditions& conditions) {
  const TubeWall wall = wall_of(shell);
  Metal metal = shell.metal;
  if (shell.dc_resistance > 0.0) {
    const double area =
        std::numbers::pi * (wall.outer_radius - wall.inner_radius) * (wall.outer_radius + wall.inner_radius);
    metal.conductivity = 1.0 / (shell.dc_resistance * area);
  }
  return tube_impedance(wall.inner_radius, wall.outer_radius, metal, conditions.frequency,
                        conditions.temperature);
}

/// What closes the loops of the outermost conductors: a mutual of ln(radius / distance), and an impedance
/// that all their currents share.
struct Return {
  double radius = 1.0;   // m; in the open it cancels
  Complex shared = 0.0;  // ohm/m
};

Return outer_return(const CrossSection& section, const ImpedanceConditions& conditions) {
  switch (section.surroundings) {
    case Surroundings::plane: {
      const EarthReturn earth = earth_return(conditions.frequency, conditions.earth_resistivity);
      return {.radius = earth.depth, .shared = earth.resistance};
    }
    case Surroundings::metal_tube: {
      const TubeWall tube = tube_of(section);
      return {.radius = tube.inner_radius,
              .shared = tube_impedance(tube.inner_radius, tube.outer_radius, section.tube_metal,
                                       conditions.frequency, conditions.temperature)
                            .inner};
    }
    case Surroundings::open:
      break;
  }
  return {};
}

/// Field along conductor k's outer surface, and the flux between it and what encloses it, per ampere of
/// the currents within each outline: symmetric, with zeros between conductors in different enclosures.
MatrixXcd loop_impedance(const CrossSection& section, const ImpedanceConditions& conditions,
                         const std::vector<int>& parent, const std::vector<TubeImpedance>& walls) {
  const int n = section.conductor_count();
  const int wires = static_cast<int>(section.conductors.size());
  const Return outside = outer_return(section, conditions);
  const Complex s(0.0, conditions.frequency * k_mu_0);  // ohm/m, j w mu_0 / (2 pi)
  MatrixXcd loop = MatrixXcd::Zero(n, n);
  for (int i = 0; i < n; ++i) {
    const bool enclosed = parent[i] != k_outside;
    const double radius = enclosed ? wall_of(section.shells[parent[i] - wires]).inner_radius : outside.radius;
    const Complex shared = enclosed ? walls[parent[i] - wires].inner : outside.shared;
    for (int j = 0; j < i; ++j) {
      if (parent[j] != parent[i]) continue;
      const double distance = (centre(section, i) - centre(section, j)).norm();  // m
      loop(i, j) = loop(j, i) = shared + s * std::log(radius / distance);
    }
    const Complex own =
        i < wires ? internal_impedance(section.conductors[i], conditions.frequency, conditions.temperature)
                  : walls[i - wires].outer;
    loop(i, i) = own + shared + s * std::log(radius / metal_radius(section, i));
  }
  return loop;
}

/// Adds what eddy currents do among the conductors of one enclosure. The currents within shells act there as
/// lines, their own walls not.
void add_proximity(MatrixXcd& loop, const CrossSection& section, const ImpedanceConditions& conditions,
                   const std::vector<int>& parent) {
  const int wires = static_cast<int>(section.conductors.size());
  std::map<int, std::vector<int>> members;
  for (int k = 0; k < section.conductor_count(); ++k) members[parent[k]].push_back(k);
  for (const auto& [enclosure, rows] : members) {
    std::vector<EddyWire> eddies;
    for (const int k : rows) {
      const bool wire = k < wires;
      eddies.push_back({centre(section, k), wire ? section.conductors[k].radius : 0.0,
                        wire ? dc_resistance(section.conductors[k], conditions.temperature) : 0.0,
                        wire ? section.conductors[k].metal.relative_permeability : 1.0});
    }
    loop(rows, rows) += proximity_impedance(eddies, conditions.frequency);
  }
}

/// Impedances between single conductors' currents instead of currents within outlines. On a shell's outer
/// surface its inner current also acts, by the transfer impedance, and the other way round.
MatrixXcd per_conductor(const MatrixXcd& loop, const std::vector<int>& parent,
                        const std::vector<TubeImpedance>& walls) {
  const int wires = static_cast<int>(parent.size() - walls.size());
  const MatrixXd within = currents_within(parent);
  MatrixXcd z = within.transpose() * loop * within;
  for (int s = 0; s < static_cast<int>(walls.size()); ++s) {
    const Eigen::VectorXd outer = within.row(wires + s);
    Eigen::VectorXd inner = outer;
    inner(wires + s) = 0.0;
    z -= walls[s].transfer * (inner * outer.transpose() + outer * inner.transpose());
  }
  return 0.5 * (z + z.transpose());
}

/// Every current returns in conductor r, every voltage drop is counted from that of r; row r goes.
MatrixXcd returned_in(const MatrixXcd& z, int r) {
  const Eigen::Index m = z.rows() - 1;
  const auto number = [r](Eigen::Index i) { return i < r ? i : i + 1; };
  MatrixXcd reduced(m, m);
  for (Eigen::Index i = 0; i < m; ++i) {
    for (Eigen::Index j = 0; j <= i; ++j) {
      const Eigen::Index a = number(i);
      const Eigen::Index b = number(j);
      reduced(i, j) = reduced(j, i) = (z(a, b) - z(a, r)) - (z(b, r) - z(r, r));
    }
  }
  return reduced;
}

}  // namespace

Eigen::MatrixXcd series_impedance(const CrossSection& section, const ImpedanceConditions& conditions) {
  require_valid(section);
  if (!(conditions.frequency > 0.0 && std::isfinite(conditions.frequency))) {
    throw std::invalid_argument("a series impedance needs a positive frequency, not " +
                                std::to_string(conditions.frequency) + " Hz");
  }
  const std::vector<int> parent = enclosing_shells(section);
  std::vector<TubeImpedance> walls;
  for (const Shell& shell : section.shells) walls.push_back(wall_impedance(shell, conditions));

  MatrixXcd z = loop_impedance(section, conditions, parent, walls);
  add_proximity(z, section, conditions, parent);
  if (!walls.empty()) z = per_conductor(z, parent, walls);
  return section.surroundings == Surroundings::open ? returned_in(z, section.reference) : z;
}

}  // namespace engine
