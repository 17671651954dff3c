#include "netlists/wiring.h"

#include <algorithm>
#include <unordered_map>

namespace netlists {
namespace {

std::vector<int> run_indices(const std::vector<Name>& names, const std::map<std::string, int>& runs) {
  std::vector<int> indices;
  for (const Name& name : names) {
    const auto found = runs.find(name.text);
    if (found != runs.end() && std::find(indices.begin(), indices.end(), found->second) == indices.end()) {
      indices.push_back(found->second);
    }
  }
  return indices;
}

void add_runs(PhysicalWire& wire, const std::vector<int>& runs) {
  for (const int run : runs) {
    if (std::find(wire.runs.begin(), wire.runs.end(), run) == wire.runs.end()) wire.runs.push_back(run);
  }
}

class Collector {
 public:
  explicit Collector(const Building& building) : building_(building) {
    for (std::size_t i = 0; i < building.runs.size(); ++i) {
      runs_[building.runs[i].name.text] = static_cast<int>(i);
    }
  }

  Wiring collect() {
    for (std::size_t p = 0; p < building_.panels.size(); ++p) add_feeder(static_cast<int>(p));
    for (std::size_t c = 0; c < building_.circuits.size(); ++c) add_circuit(static_cast<int>(c));
    resolve_aliases();
    return std::move(wiring_);
  }

 private:
  void add(PhysicalWire wire) {
    wiring_.by_name[wire.id] = static_cast<int>(wiring_.wires.size());
    wiring_.wires.push_back(std::move(wire));
  }

  void add_feeder(int panel) {
    const auto& feeder = building_.panels[panel].feeder;
    if (!feeder) return;
    for (const Wire& wire : feeder->wires) {
      const auto type = building_.catalogue.wires.find(wire.type);
      if (type == building_.catalogue.wires.end()) continue;
      PhysicalWire physical;
      physical.id = building_.panels[panel].name.text + "." + wire.name.text;
      physical.feeder_panel = panel;
      physical.name = wire.name.text;
      physical.type = &type->second;
      physical.ground = names_ground(wire.name.text) && !wire.isolated_ground;
      physical.isolated_ground = wire.isolated_ground;
      physical.runs = run_indices(wire.runs.empty() ? feeder->runs : wire.runs, runs_);
      add(std::move(physical));
    }
  }

  void add_circuit(int index) {
    const Circuit& circuit = building_.circuits[index];
    const CableType* cable = nullptr;
    if (circuit.cable) {
      const auto found = building_.catalogue.cables.find(circuit.cable->text);
      if (found != building_.catalogue.cables.end()) cable = &found->second;
    }
    const int cores = cable ? static_cast<int>(cable->cores.size()) : 0;
    for (std::size_t w = 0; w < circuit.wires.size(); ++w) {
      const Wire& wire = circuit.wires[w];
      const std::string id = circuit.name.text + "." + wire.name.text;
      if (!wire.alias.empty()) {
        aliases_.push_back(
            {id, wire.alias, run_indices(wire.runs.empty() ? circuit.runs : wire.runs, runs_)});
        continue;
      }
      PhysicalWire physical;
      physical.id = id;
      physical.circuit = index;
      physical.name = wire.name.text;
      physical.ground = names_ground(wire.name.text) && !wire.isolated_ground;
      physical.isolated_ground = wire.isolated_ground;
      physical.runs = run_indices(wire.runs.empty() ? circuit.runs : wire.runs, runs_);
      if (static_cast<int>(w) < cores) {
        physical.core = static_cast<int>(w);
        physical.type = &cable->cores[w].wire;
      } else {
        const auto type = building_.catalogue.wires.find(wire.type);
        if (type == building_.catalogue.wires.end()) continue;
        physical.type = &type->second;
      }
      add(std::move(physical));
    }
    if (cable && cable->armour) {
      PhysicalWire armour;
      armour.id = circuit.name.text + ".armour";
      armour.circuit = index;
      armour.name = "armour";
      armour.armour = true;
      armour.runs = run_indices(circuit.runs, runs_);
      add(std::move(armour));
    }
  }

  // An alias may point to an alias; a wire that is used in more runs than its owner names lies there.
  // Each alias is walked over once, however long their chains; those that lead nowhere stay unresolved.
  void resolve_aliases() {
    std::unordered_map<std::string, std::size_t> index;
    for (std::size_t i = 0; i < aliases_.size(); ++i) index.emplace(aliases_[i].id, i);
    std::vector<bool> seen(aliases_.size(), false);
    for (std::size_t start = 0; start < aliases_.size(); ++start) {
      std::vector<std::size_t> way;
      for (std::size_t at = start; !seen[at];) {
        seen[at] = true;
        way.push_back(at);
        const auto next = index.find(aliases_[at].target);
        if (next == index.end()) break;
        at = next->second;
      }
      for (; !way.empty(); way.pop_back()) resolve(aliases_[way.back()]);
    }
  }

  struct Alias;
  void resolve(const Alias& alias) {
    const auto target = wiring_.by_name.find(alias.target);
    if (target == wiring_.by_name.end() || !wiring_.by_name.emplace(alias.id, target->second).second) return;
    add_runs(wiring_.wires[target->second], alias.runs);
  }

  struct Alias {
    std::string id;
    std::string target;
    std::vector<int> runs;
  };

  const Building& building_;
  std::map<std::string, int> runs_;
  std::vector<Alias> aliases_;
  Wiring wiring_;
};

bool one_of(const std::string& word, std::initializer_list<const char*> words) {
  return std::find(words.begin(), words.end(), word) != words.end();
}

}  // namespace

int Wiring::find(const std::string& circuit, const std::string& name) const {
  if (!circuit.empty()) {
    const auto own = by_name.find(circuit + "." + name);
    if (own != by_name.end()) return own->second;
  }
  const auto full = by_name.find(name);
  return full == by_name.end() ? -1 : full->second;
}

bool names_ground(const std::string& wire) { return one_of(wire, {"ground", "cpc", "earth", "pe", "PE"}); }

bool names_neutral(const std::string& wire) { return one_of(wire, {"neutral", "n", "N"}); }

Wiring wiring(const Building& building) { return Collector(building).collect(); }

}  // namespace netlists
