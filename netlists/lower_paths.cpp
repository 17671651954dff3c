// The way back from the network to the conductors of the model.
#include <fmt/format.h>

#include "netlists/lowering.h"

namespace netlists {

void Lowering::finish() {
  const Joints::Nodes nodes = joints_.nodes();
  const auto map = [&](int& point) { point = nodes.of_point[point]; };
  collect_conductors(nodes);
  for (engine::Line& line : out_.network.lines) {
    for (int& point : line.from) map(point);
    for (int& point : line.to) map(point);
  }
  for (engine::Element& element : out_.network.elements) map(element.a), map(element.b);
  for (engine::Source& source : out_.network.sources) map(source.a), map(source.b);
  for (Connection& connection : out_.connections) map(connection.a), map(connection.b);
  for (LivePole& pole : out_.poles) map(pole.node);
  for (LoweredLoad& load : out_.loads) map(load.a), map(load.b);
  out_.network.frequency = building_.frequency;
  out_.network.node_count = static_cast<int>(nodes.names.size());
  out_.node_names = nodes.names;
  for (const std::string& place : places_) {
    const int ground = joints_.find_point("ground@" + place);
    if (ground >= 0) out_.at["ground@" + place] = nodes.of_point[ground];
  }
  tell_assumptions();
}

void Lowering::collect_conductors(const Joints::Nodes& nodes) {
  std::map<std::string, std::vector<std::pair<int, int>>> segments;  // wire id -> (line, row)
  std::vector<std::string> order;
  for (std::size_t l = 0; l < out_.line_conductors.size(); ++l) {
    for (std::size_t i = 0; i < out_.line_conductors[l].size(); ++i) {
      segments[out_.line_conductors[l][i]].emplace_back(static_cast<int>(l), static_cast<int>(i));
    }
  }
  for (const PhysicalWire& wire : wiring_.wires) order.push_back(wire.id);
  for (const Run& run : building_.runs) {
    if (has_metal_raceway(run)) order.push_back(raceway_id(run));
  }
  for (const Run& run : building_.runs) places_.insert({run.from.text, run.to.text});
  for (const std::string& id : order) {
    const auto found = segments.find(id);
    if (found != segments.end()) add_conductor(id, found->second, nodes);
  }
}

void Lowering::add_conductor(const std::string& id, const std::vector<std::pair<int, int>>& segments,
                             const Joints::Nodes& nodes) {
  std::vector<bool> used(segments.size(), false);
  for (std::size_t first = 0; first < segments.size(); ++first) {
    if (used[first]) continue;
    ConductorPath path;
    std::set<int> points;
    // Grow the piece from its first segment over shared points.
    for (bool grown = true; grown;) {
      grown = false;
      for (std::size_t s = 0; s < segments.size(); ++s) {
        const engine::Line& line = out_.network.lines[segments[s].first];
        const int a = line.from[segments[s].second];
        const int b = line.to[segments[s].second];
        if (used[s] || (!points.empty() && !points.count(a) && !points.count(b))) continue;
        if (points.empty() && s != first) continue;
        used[s] = grown = true;
        points.insert({a, b});
        path.segments.push_back(segments[s]);
      }
    }
    path.wire = id;
    path.id = first == 0 ? id : id + "/" + out_.line_runs[segments[first].first];
    for (const std::string& place : places_) add_access(path, points, place, nodes);
    describe(path);
    out_.conductors.push_back(std::move(path));
  }
}

void Lowering::add_access(ConductorPath& path, const std::set<int>& points, const std::string& place,
                          const Joints::Nodes& nodes) {
  for (const auto& [point, name] : point_names(path.wire, place)) {
    if (!points.count(point)) continue;
    path.access.push_back({place, nodes.of_point[point]});
    out_.at[path.id + "@" + place] = nodes.of_point[point];
    return;
  }
}

std::vector<std::pair<int, std::string>> Lowering::point_names(const std::string& id,
                                                               const std::string& place) const {
  std::vector<std::pair<int, std::string>> result;
  const auto consider = [&](const std::string& name) {
    const int point = joints_.find_point(name);
    if (point >= 0) result.emplace_back(point, name);
  };
  consider(id + "@" + place);
  for (const Run& run : building_.runs) {
    if (run.from.text == place || run.to.text == place) consider(id + "/" + run.name.text + "@" + place);
  }
  return result;
}

void Lowering::describe(ConductorPath& path) const {
  for (const auto& [line, row] : path.segments) {
    for (const StretchRow& other : line_rows_[line]) {
      if (drive_runs_.count(other.run)) path.near_drive = true;
    }
    const StretchRow& own = line_rows_[line][row];
    if (own.wire < 0) {
      path.ground = true;
      continue;
    }
    const PhysicalWire& wire = wiring_.wires[own.wire];
    path.ground = wire.ground || wire.armour || wire.isolated_ground;
    if (wire.circuit < 0) continue;
    const Circuit& circuit = building_.circuits[wire.circuit];
    path.circuit = circuit.name.text;
    const Panel* panel = circuit.panel ? find_panel(building_, circuit.panel->text) : nullptr;
    const Supply* supply = panel ? root_supply(building_, *panel) : nullptr;
    if (supply) path.supply = supply->name.text;
    for (const Wire& candidate : circuit.wires) {
      if (!names_neutral(candidate.name.text)) continue;
      const int neutral = wiring_.find(circuit.name.text, candidate.name.text);
      if (neutral >= 0 && wiring_.wires[neutral].id != path.wire) path.neutral = wiring_.wires[neutral].id;
    }
  }
}

void Lowering::tell_assumptions() {
  if (!unlisted_.empty()) {
    std::string names;
    for (std::size_t i = 0; i < unlisted_.size() && i < 8; ++i) names += (i ? ", " : "") + unlisted_[i];
    if (unlisted_.size() > 8) names += fmt::format(" and {} more", unlisted_.size() - 8);
    assumptions_.insert("loads are not listed (unknown, not none); the nominal case has no load on: " +
                        names);
  }
  for (const std::string& text : building_.defaults) out_.assumptions.push_back(text);
  for (const std::string& text : sections_.assumptions()) out_.assumptions.push_back(text);
  out_.assumptions.insert(out_.assumptions.end(), assumptions_.begin(), assumptions_.end());
}

}  // namespace netlists
