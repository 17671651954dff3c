// The parts of validate(), and what they share. Private to netlists.
#pragma once

#include <string>
#include <unordered_map>
#include <vector>

#include "netlists/building.h"
#include "netlists/wiring.h"

namespace netlists {

/// Names of one kind, to look up and to suggest from.
class Names {
 public:
  void add(const std::string& name, int index);
  int find(const std::string& name) const;  // index, or -1
  bool has(const std::string& name) const { return find(name) >= 0; }
  const std::vector<std::string>& all() const { return all_; }

 private:
  std::unordered_map<std::string, int> index_;
  std::vector<std::string> all_;
};

/// A building under check: its names indexed once, its faults collected.
class Checks {
 public:
  explicit Checks(const Building& checked);

  const Building& building;
  std::vector<Fault> faults;
  Names supplies, panels, runs, circuits;
  Names places;  // ends of runs, and panels
  Wiring wiring;

  // What a fault of the reader's, or of a name, leaves open. It has been reported where it is; nothing
  // more is said of what follows from it.
  bool places_doubtful = false;        // some run has no end
  std::vector<bool> circuit_doubtful;  // its runs or wires are not all known

  void error(const Mark& mark, std::string what);
  void warn(const Mark& mark, std::string what);

  /// Reports a name that is not there: "OWNER: there is no KIND 'NAME'; the nearest is ...". A name
  /// left empty by a fault of the reader's passes.
  bool known(const Names& names, const Name& name, const std::string& owner, const std::string& kind);

  /// The wire that `name` means inside a circuit ("" for none), which must reach `at`; -1 after a
  /// fault, or where a point that is no wire is meant (ground, earth, a neutral bar, a raceway).
  int wire_at(const std::string& circuit, const Name& name, const Name& at, const std::string& owner);

  /// The supply a panel hangs on through its feeders, by the index of the panel; nullptr where they lead
  /// nowhere or in a circle.
  const Supply* supply_of_panel(const std::string& panel) const;

  bool touches(int run, const std::string& place) const;
  bool reaches(const PhysicalWire& wire, const std::string& place) const;

  /// The nearest of the names, for as many faults as a bound on the work allows: a junk file must not
  /// take minutes.
  std::string hint(const std::string& word, const std::vector<std::string>& candidates);

 private:
  void find_doubts();
  bool is_doubtful(const std::string& circuit, const std::string& name) const;
  bool is_bar_or_raceway(const std::string& name, const Name& at, const std::string& owner, bool& good);

  std::vector<const Supply*> supply_of_panel_;
  std::size_t hint_work_ = 1'000'000;  // names to compare with, in all
};

std::string circuit_label(const Circuit& circuit);

void check_names(Checks& checks);   // what refers to what
void check_stages(Checks& checks);  // stages and may_vary
void check_panels(Checks& checks);  // feeders, supplies, slots, landings
void check_trees(Checks& checks);   // loops and loose ends of runs
void check_fill(Checks& checks);    // what lies in each run, and whether it fits

}  // namespace netlists
