#include "netlists/condition.h"

#include <Eigen/LU>
#include <algorithm>
#include <boost/graph/adjacency_list.hpp>
#include <boost/graph/connected_components.hpp>
#include <cmath>
#include <map>
#include <set>

namespace netlists {
namespace {

using engine::Complex;
using Graph = boost::adjacency_list<boost::vecS, boost::vecS, boost::undirectedS>;

constexpr double k_person = 2000.0;        // ohm, a person in the definition of through_load
constexpr double k_felt_current = 0.5e-3;  // A, the threshold of perception (IEC 60479-1)
constexpr const char* k_earth = "";        // the frame of all supplies that are tied to earth

/// A galvanic component: nodes joined by wires.
struct Component {
  bool grounded = false;
  std::vector<const LivePole*> poles;  // live and not grounded
};

/// A load between two components.
struct LoadEdge {
  int a = 0;
  int b = 0;
  Complex admittance;
  const std::string* what = nullptr;
};

class Classifier {
 public:
  explicit Classifier(const Lowered& lowered) : lowered_(lowered) {
    find_components();
    find_poles();
    find_loads();
  }

  Conditions classify() {
    condition_.assign(components_.size(), Condition::floating);
    through_.assign(components_.size(), "");
    for (std::size_t c = 0; c < components_.size(); ++c) {
      if (components_[c].grounded) {
        condition_[c] = Condition::grounded;
      } else if (!components_[c].poles.empty()) {
        condition_[c] = Condition::energised;
      }
    }
    judge_loads();
    return report();
  }

 private:
  void find_components() {
    const engine::Network& network = lowered_.network;
    Graph graph(static_cast<std::size_t>(network.node_count));
    for (const engine::Line& line : network.lines) {
      for (std::size_t i = 0; i < line.from.size(); ++i) boost::add_edge(line.from[i], line.to[i], graph);
    }
    for (const Connection& connection : lowered_.connections) {
      if (connection.join == Join::wire) boost::add_edge(connection.a, connection.b, graph);
    }
    of_node_.resize(static_cast<std::size_t>(network.node_count));
    const int count = boost::connected_components(graph, of_node_.data());
    components_.resize(static_cast<std::size_t>(count));
  }

  void find_poles() {
    components_[of_node_[0]].grounded = true;
    for (const LivePole& pole : lowered_.poles) {
      Component& component = components_[of_node_[pole.node]];
      if (pole.grounded) {
        component.grounded = true;
      } else {
        component.poles.push_back(&pole);
      }
      frame_[pole.supply] = lowered_.floating_supplies.count(pole.supply) ? pole.supply : k_earth;
    }
    for (const Component& component : components_) {
      if (component.grounded && !component.poles.empty() && frame_[component.poles[0]->supply] == k_earth) {
        warnings_.push_back("pole " + component.poles[0]->name + " of supply '" + component.poles[0]->supply +
                            "' is joined to ground in the model: a short circuit that a breaker would clear");
      }
    }
  }

  void find_loads() {
    for (const Connection& connection : lowered_.connections) {
      const int a = of_node_[connection.a];
      const int b = of_node_[connection.b];
      if (connection.join == Join::load && a != b)
        edges_.push_back({a, b, 1.0 / connection.impedance, &connection.what});
    }
  }

  bool is_free(int component) const {
    return !components_[component].grounded && components_[component].poles.empty();
  }

  // Free components that loads join are judged together.
  void judge_loads() {
    Graph graph(components_.size());
    for (const LoadEdge& edge : edges_) {
      if (is_free(edge.a) && is_free(edge.b)) boost::add_edge(edge.a, edge.b, graph);
    }
    std::vector<int> cluster_of(components_.size());
    const int count = boost::connected_components(graph, cluster_of.data());
    std::vector<std::vector<int>> members(static_cast<std::size_t>(count));
    for (std::size_t c = 0; c < components_.size(); ++c) {
      if (is_free(static_cast<int>(c))) members[cluster_of[c]].push_back(static_cast<int>(c));
    }
    std::vector<std::vector<const LoadEdge*>> incident(static_cast<std::size_t>(count));
    for (const LoadEdge& edge : edges_) {
      if (is_free(edge.a)) {
        incident[cluster_of[edge.a]].push_back(&edge);
      } else if (is_free(edge.b)) {
        incident[cluster_of[edge.b]].push_back(&edge);
      }
    }
    for (int cluster = 0; cluster < count; ++cluster) {
      if (!incident[cluster].empty()) judge_cluster(members[cluster], incident[cluster]);
    }
  }

  void judge_cluster(const std::vector<int>& members, const std::vector<const LoadEdge*>& edges) {
    std::set<std::string> frames{k_earth};
    for (const auto& [supply, frame] : frame_) frames.insert(frame);
    for (const std::string& frame : frames) drive_from(frame, members, edges);
  }

  // A fixed component's potential in a frame, if it has one there.
  const LivePole* pole_in(const Component& component, const std::string& frame) const {
    for (const LivePole* pole : component.poles) {
      if (frame_.at(pole->supply) == frame) return pole;
    }
    return nullptr;
  }

  void drive_from(const std::string& frame, const std::vector<int>& members,
                  const std::vector<const LoadEdge*>& edges) {
    std::map<int, int> row;
    for (const int member : members) row.emplace(member, static_cast<int>(row.size()));
    const auto n = static_cast<Eigen::Index>(members.size());
    Eigen::MatrixXcd y = Eigen::MatrixXcd::Zero(n, n);
    std::map<const LivePole*, Eigen::VectorXcd> injected;  // by the pole that feeds
    std::map<const LivePole*, const std::string*> feeder;
    bool tied_to_ground = false;
    for (const LoadEdge* edge : edges) {
      const bool free_a = row.count(edge->a) > 0;
      const bool free_b = row.count(edge->b) > 0;
      if (free_a && free_b) {
        const int i = row[edge->a];
        const int j = row[edge->b];
        y(i, i) += edge->admittance;
        y(j, j) += edge->admittance;
        y(i, j) -= edge->admittance;
        y(j, i) -= edge->admittance;
        continue;
      }
      const int i = free_a ? row[edge->a] : row[edge->b];
      const Component& fixed = components_[free_a ? edge->b : edge->a];
      const LivePole* pole = pole_in(fixed, frame);
      const bool ground = fixed.grounded && frame == k_earth;
      if (!pole && !ground) continue;  // fixed in another frame: no return through it
      y(i, i) += edge->admittance;
      if (ground) {
        tied_to_ground = true;
        continue;
      }
      injected.try_emplace(pole, Eigen::VectorXcd::Zero(n)).first->second(i) +=
          edge->admittance * pole->volts;
      feeder[pole] = edge->what;
    }
    if (injected.empty() && !tied_to_ground) return;
    const Eigen::FullPivLU<Eigen::MatrixXcd> lu(y);
    if (!lu.isInvertible()) return;
    const Eigen::MatrixXcd z = lu.inverse();
    for (std::size_t m = 0; m < members.size(); ++m) {
      decide(frame, members[m], static_cast<Eigen::Index>(m), z, injected, feeder, tied_to_ground);
    }
  }

  // One pole at a time as well as all together: loads that happen to balance hide nothing.
  void decide(const std::string& frame, int member, Eigen::Index i, const Eigen::MatrixXcd& z,
              const std::map<const LivePole*, Eigen::VectorXcd>& injected,
              const std::map<const LivePole*, const std::string*>& feeder, bool tied_to_ground) {
    Complex together = 0.0;
    double most = 0.0;
    const std::string* by = nullptr;
    const auto consider = [&](Complex volts, const std::string* what) {
      const double current = std::abs(volts) / std::abs(z(i, i) + k_person);
      if (current > most) {
        most = current;
        by = what;
      }
    };
    for (const auto& [pole, current] : injected) {
      const Complex alone = (z * current)(i);
      together += alone;
      if (frame == k_earth) consider(alone, feeder.at(pole));
    }
    if (frame == k_earth) {
      if (!injected.empty()) consider(together, feeder.begin()->second);
    } else {
      for (const LivePole& pole : lowered_.poles) {
        if (pole.supply == frame)
          consider(injected.empty() ? 0.0 : together - pole.volts,
                   injected.empty() ? nullptr : feeder.begin()->second);
      }
    }
    if (most >= k_felt_current && by) {
      condition_[member] = Condition::through_load;
      through_[member] = *by;
    } else if (tied_to_ground && condition_[member] == Condition::floating) {
      condition_[member] = Condition::grounded_through_load;
    }
  }

  Conditions report() const {
    Conditions result;
    result.warnings = warnings_;
    for (const int of_node : of_node_) {
      const Component& component = components_[of_node];
      result.of_node.push_back(condition_[of_node]);
      const bool energised = condition_[of_node] == Condition::energised;
      result.floating_supply.push_back(energised ? frame_.at(component.poles[0]->supply) : "");
    }
    for (const ConductorPath& path : lowered_.conductors) {
      const auto [line, row] = path.segments.front();
      const int component = of_node_[lowered_.network.lines[line].from[row]];
      result.of_conductor.push_back(condition_[component]);
      const bool energised = condition_[component] == Condition::energised;
      result.supply.push_back(energised ? components_[component].poles[0]->supply : "");
      result.through.push_back(through_[component]);
    }
    return result;
  }

  const Lowered& lowered_;
  std::vector<int> of_node_;
  std::vector<Component> components_;
  std::vector<LoadEdge> edges_;
  std::map<std::string, std::string> frame_;  // by supply: k_earth, or its own name where it floats
  std::vector<Condition> condition_;
  std::vector<std::string> through_;
  std::vector<std::string> warnings_;
};

}  // namespace

Conditions conditions(const Lowered& lowered) { return Classifier(lowered).classify(); }

}  // namespace netlists
