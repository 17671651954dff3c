// The runs of a wire: one piece, and a tree unless a ring is meant.
#include <fmt/format.h>

#include <algorithm>
#include <map>
#include <set>

#include "netlists/checks.h"

namespace netlists {
namespace {

/// Places joined by the runs taken so far.
class Pieces {
 public:
  /// False if both ends were joined already: the run closes a loop.
  bool join(const std::string& a, const std::string& b) {
    const int first = root(number(a));
    const int second = root(number(b));
    if (first == second) return false;
    parent_[static_cast<std::size_t>(second)] = first;
    return true;
  }
  bool joined(const std::string& a, const std::string& b) { return root(number(a)) == root(number(b)); }

 private:
  int number(const std::string& place) {
    const auto [found, fresh] = numbers_.emplace(place, static_cast<int>(parent_.size()));
    if (fresh) parent_.push_back(found->second);
    return found->second;
  }
  int root(int at) {
    while (parent_[static_cast<std::size_t>(at)] != at) {
      auto& up = parent_[static_cast<std::size_t>(at)];
      at = up = parent_[static_cast<std::size_t>(up)];
    }
    return at;
  }

  std::map<std::string, int> numbers_;
  std::vector<int> parent_;
};

struct Tree {
  std::string label;        // "circuit 'LP2-7'"
  std::vector<Name> names;  // runs
  Mark mark;                // where no run's own mark will do
};

void check_tree(Checks& checks, const Tree& tree, bool ring_allowed) {
  Pieces pieces;
  const Run* first = nullptr;
  std::vector<std::pair<const Run*, const Name*>> taken;
  bool loop_told = ring_allowed;
  std::set<int> seen;
  for (const Name& name : tree.names) {
    const int index = checks.runs.find(name.text);
    if (index < 0 || !seen.insert(index).second) continue;
    const Run& run = checks.building.runs[static_cast<std::size_t>(index)];
    if (run.from.text.empty() || run.to.text.empty() || run.from.text == run.to.text) continue;
    if (first == nullptr) first = &run;
    if (!pieces.join(run.from.text, run.to.text) && !loop_told) {
      checks.error(name.mark,
                   fmt::format("{}: run '{}' closes a loop from '{}' back to it; write 'ring: true' if a "
                               "ring is meant",
                               tree.label, run.name.text, run.from.text));
      loop_told = true;
    }
    taken.emplace_back(&run, &name);
  }
  for (const auto& [run, name] : taken) {
    if (pieces.joined(run->from.text, first->from.text)) continue;
    checks.error(name->mark, fmt::format("{}: run '{}', from '{}' to '{}', meets none of the runs before it",
                                         tree.label, run->name.text, run->from.text, run->to.text));
    return;  // one word per tree: the rest follows from it
  }
}

/// Names of a wire's runs for messages, with a mark: those the user wrote for it where he did.
Tree tree_of(const Checks& checks, const PhysicalWire& wire) {
  Tree tree;
  const auto& circuit = checks.building.circuits[static_cast<std::size_t>(wire.circuit)];
  tree.mark = circuit.name.mark;
  std::map<std::string, Mark> marks;
  for (const Name& run : circuit.runs) marks.emplace(run.text, run.mark);
  for (const Wire& own : circuit.wires)
    if (own.name.text == wire.name)
      for (const Name& run : own.runs) marks[run.text] = run.mark;
  for (const int run : wire.runs) {
    const std::string& name = checks.building.runs[static_cast<std::size_t>(run)].name.text;
    const auto found = marks.find(name);
    tree.names.push_back({name, found != marks.end() ? found->second : tree.mark});
  }
  return tree;
}

/// The circuit's runs as a whole first; then each wire whose runs are others, once for each set.
void check_circuit(Checks& checks, const Circuit& circuit, const std::vector<const PhysicalWire*>& wires) {
  const std::size_t before = checks.faults.size();
  std::set<std::vector<int>> seen;
  std::vector<int> all;
  for (const Name& run : circuit.runs)
    if (const int index = checks.runs.find(run.text); index >= 0) all.push_back(index);
  const bool common =
      std::any_of(wires.begin(), wires.end(), [&](const PhysicalWire* w) { return w->runs == all; });
  check_tree(checks, {circuit_label(circuit), circuit.runs, circuit.name.mark}, circuit.ring || !common);
  if (checks.faults.size() > before) return;
  seen.insert(all);
  for (const PhysicalWire* wire : wires) {
    if (!seen.insert(wire->runs).second) continue;
    Tree tree = tree_of(checks, *wire);
    tree.label = fmt::format("{}: wire '{}'", circuit_label(circuit), wire->name);
    check_tree(checks, tree, circuit.ring);
  }
}

void check_use(Checks& checks) {
  const auto& doubts = checks.circuit_doubtful;
  if (std::find(doubts.begin(), doubts.end(), true) != doubts.end()) return;
  std::vector<bool> used(checks.building.runs.size(), false);
  for (const PhysicalWire& wire : checks.wiring.wires)
    for (const int run : wire.runs) used[static_cast<std::size_t>(run)] = true;
  for (std::size_t i = 0; i < used.size(); ++i)
    if (!used[i])
      checks.warn(checks.building.runs[i].name.mark,
                  fmt::format("run '{}' holds no conductor", checks.building.runs[i].name.text));
}

}  // namespace

void check_trees(Checks& checks) {
  std::vector<std::vector<const PhysicalWire*>> wires(checks.building.circuits.size());
  for (const PhysicalWire& wire : checks.wiring.wires)
    if (wire.circuit >= 0) wires[static_cast<std::size_t>(wire.circuit)].push_back(&wire);
  for (std::size_t c = 0; c < wires.size(); ++c) check_circuit(checks, checks.building.circuits[c], wires[c]);
  for (const Panel& panel : checks.building.panels)
    if (panel.feeder)
      check_tree(checks,
                 {fmt::format("panel '{}': feeder", panel.name.text), panel.feeder->runs, panel.feeder->mark},
                 false);
  check_use(checks);
}

}  // namespace netlists
