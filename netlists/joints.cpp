#include "netlists/joints.h"

#include <algorithm>

namespace netlists {

Joints::Joints() { point("earth"); }

int Joints::point(const std::string& name) {
  const auto [entry, fresh] = points_.try_emplace(name, static_cast<int>(names_.size()));
  if (fresh) {
    names_.push_back(name);
    parent_.push_back(entry->second);
  }
  return entry->second;
}

int Joints::find_point(const std::string& name) const {
  const auto entry = points_.find(name);
  return entry == points_.end() ? -1 : entry->second;
}

int Joints::root(int point) const {
  while (parent_[point] != point) {
    parent_[point] = parent_[parent_[point]];
    point = parent_[point];
  }
  return point;
}

// The older point stays the root, so that earth is node 0 and names are those of first points.
void Joints::join(int a, int b) {
  const int first = root(a);
  const int second = root(b);
  parent_[std::max(first, second)] = std::min(first, second);
}

Joints::Nodes Joints::nodes() const {
  Nodes result;
  result.of_point.assign(names_.size(), -1);
  for (std::size_t p = 0; p < names_.size(); ++p) {
    const int top = root(static_cast<int>(p));
    if (top == static_cast<int>(p)) {
      result.of_point[p] = static_cast<int>(result.names.size());
      result.names.push_back(names_[p]);
    } else {
      result.of_point[p] = result.of_point[top];
    }
  }
  return result;
}

}  // namespace netlists
