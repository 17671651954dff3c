// Named points of a building, and which of them are one node.
#pragma once

#include <map>
#include <string>
#include <vector>

namespace netlists {

/// Points by name, made on first use, and joined by contacts without resistance. Point 0 is "earth".
class Joints {
 public:
  Joints();

  int point(const std::string& name);             // made if new
  int find_point(const std::string& name) const;  // -1 if never made
  void join(int a, int b);

  /// Nodes after all joining, numbered from 0 (earth's) in order of their first point, with the name
  /// each is known by: that of its first point.
  struct Nodes {
    std::vector<int> of_point;
    std::vector<std::string> names;
  };
  Nodes nodes() const;

 private:
  int root(int point) const;

  std::map<std::string, int> points_;
  std::vector<std::string> names_;
  mutable std::vector<int> parent_;
};

}  // namespace netlists
