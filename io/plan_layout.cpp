#include "io/plan_layout.h"

#include <algorithm>
#include <deque>
#include <map>
#include <ranges>
#include <set>

namespace io {
namespace {
using netlists::Building;

constexpr double k_lane = 0.5;  // rows, that a further run to the same place takes

/// The forest that grows from the panels over the wanted runs.
class Forest {
 public:
  Forest(const Building& building, const std::vector<bool>& wanted)
      : building_(building), drawn_(building.runs.size(), false) {
    for (const auto& panel : building.panels) panels_.insert(panel.name.text);
    for (std::size_t r = 0; r < building.runs.size(); ++r) {
      if (!wanted[r]) continue;
      at_[building.runs[r].from.text].push_back(r);
      at_[building.runs[r].to.text].push_back(r);
    }
    for (const bool supplied : {true, false})
      for (const auto& panel : building.panels)
        if (panel.supply.has_value() == supplied) grow(panel.name.text);
    for (std::size_t r = 0; r < building.runs.size(); ++r)
      if (wanted[r]) grow(building.runs[r].from.text);
  }

  PlanLayout take() {
    double row = 0.0;
    for (std::size_t n = 0; n < out_.nodes.size(); ++n)
      if (parent_[n] < 0) place(n, row);
    out_.rows = row;
    return std::move(out_);
  }

 private:
  std::size_t add_node(const std::string& name, int parent, int column) {
    number_[name] = out_.nodes.size();
    out_.nodes.push_back({name, panels_.count(name) > 0, column, 0.0, 0});
    out_.columns = std::max(out_.columns, column + 1);
    parent_.push_back(parent);
    children_.emplace_back();
    return out_.nodes.size() - 1;
  }

  void grow(const std::string& root) {
    if (number_.count(root) > 0 || at_.count(root) == 0) return;
    std::deque<std::size_t> open{add_node(root, -1, 0)};
    while (!open.empty()) {
      const std::size_t node = open.front();
      open.pop_front();
      for (const std::size_t run : at_[out_.nodes[node].name]) follow(run, node, open);
    }
  }

  /// A run goes to a new place, beside another run to a place that hangs here, or closes a loop.
  void follow(std::size_t run, std::size_t node, std::deque<std::size_t>& open) {
    if (drawn_[run]) return;
    drawn_[run] = true;
    const auto& model = building_.runs[run];
    const std::string& far = model.from.text == out_.nodes[node].name ? model.to.text : model.from.text;
    const auto known = number_.find(far);
    if (known == number_.end()) {
      const std::size_t made = add_node(far, static_cast<int>(node), out_.nodes[node].column + 1);
      children_[node].push_back(made);
      open.push_back(made);
      out_.edges.push_back({run, node, made, out_.nodes[made].lanes++, false});
    } else if (parent_[known->second] == static_cast<int>(node)) {
      out_.edges.push_back({run, node, known->second, out_.nodes[known->second].lanes++, false});
    } else {
      out_.edges.push_back({run, node, known->second, 0, true});
    }
  }

  /// Rows of a tree, children before their parents; without recursion, for chains of any length.
  void place(std::size_t root, double& row) {
    std::vector<std::pair<std::size_t, bool>> todo{{root, false}};
    while (!todo.empty()) {
      const auto [node, seen] = todo.back();
      todo.pop_back();
      PlanNode& one = out_.nodes[node];
      const auto& below = children_[node];
      if (below.empty()) {
        one.row = row;
        row += 1.0 + k_lane * std::max(0, one.lanes - 1);
      } else if (seen) {
        one.row = (out_.nodes[below.front()].row + out_.nodes[below.back()].row) / 2;
        row = std::max(row, one.row + 1.0 + k_lane * std::max(0, one.lanes - 1));
      } else {
        todo.emplace_back(node, true);
        for (const std::size_t child : below | std::views::reverse) todo.emplace_back(child, false);
      }
    }
  }

  const Building& building_;
  std::vector<bool> drawn_;  // by run
  std::set<std::string> panels_;
  std::map<std::string, std::vector<std::size_t>> at_;
  std::map<std::string, std::size_t> number_;
  std::vector<int> parent_;
  std::vector<std::vector<std::size_t>> children_;
  PlanLayout out_;
};

}  // namespace

PlanLayout plan_layout(const Building& building, const std::vector<bool>& wanted) {
  return Forest(building, wanted).take();
}

std::vector<std::vector<std::size_t>> ways_to_panels(const Building& building) {
  const PlanLayout all = plan_layout(building, std::vector<bool>(building.runs.size(), true));
  std::vector<std::vector<std::size_t>> by_node(all.nodes.size()), out(building.runs.size());
  for (const PlanEdge& edge : all.edges) {
    out[edge.run] = by_node[edge.from];
    out[edge.run].push_back(edge.run);
    if (!edge.closes && edge.lane == 0) by_node[edge.to] = out[edge.run];
  }
  return out;
}

}  // namespace io
