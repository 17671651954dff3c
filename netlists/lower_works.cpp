// Switches, bonds, leaks and loads.
#include <fmt/format.h>

#include <algorithm>

#include "netlists/lowering.h"

namespace netlists {

void Lowering::set_switches(const Circuit& circuit) {
  for (const Switch& item : circuit.switches) {
    std::vector<int> at;
    for (const Name& wire : item.wires) at.push_back(point_of(circuit.name.text, wire.text, item.at.text));
    const std::string name = circuit.name.text + "." + (item.name.empty() ? "switch" : item.name);
    if (item.kind == SwitchKind::contact) {
      if (item.closed) joints_.join(at[0], at[1]);
      out_.states.push_back(fmt::format("{} at {}: {}", name, item.at.text, item.closed ? "closed" : "open"));
      continue;
    }
    if (item.kind == SwitchKind::three_way) {
      joints_.join(at[0], at[static_cast<std::size_t>(item.position)]);
    } else {
      joints_.join(at[0], item.position == 1 ? at[2] : at[3]);
      joints_.join(at[1], item.position == 1 ? at[3] : at[2]);
    }
    out_.states.push_back(fmt::format("{} at {}: position {}", name, item.at.text, item.position));
  }
}

void Lowering::add_bond(const Bond& bond) {
  for (std::size_t i = 1; i < bond.joins.size(); ++i) {
    const int a = point_of("", bond.joins[0].text, bond.at.text);
    const int b = point_of("", bond.joins[i].text, bond.at.text);
    if (bond.resistance == 0.0) {
      joints_.join(a, b);
      continue;
    }
    const std::string what = bond.name.empty() ? bond.joins[0].text + " to " + bond.joins[i].text : bond.name;
    add_element("bond " + what, a, b, 1.0 / bond.resistance);
    out_.connections.push_back({a, b, Join::wire, bond.resistance, "bond " + what});
  }
}

void Lowering::add_leak(const Leak& leak) {
  add_element("leak " + leak.between.first.text + " to " + leak.between.second.text,
              point_of("", leak.between.first.text, leak.at.text),
              point_of("", leak.between.second.text, leak.at.text), 1.0 / leak.resistance);
}

void Lowering::add_loads(const Circuit& circuit) {
  if (!circuit.loads) {
    const bool fed = circuit.panel.has_value();
    if (fed) unlisted_.push_back(circuit.name.text);
    if (fed && assume_loads_) add_unlisted_load(circuit);
    return;
  }
  for (const Load& load : *circuit.loads) {
    const LoadModel model = load_model(building_, circuit, load);
    const std::string name = "load " + circuit.name.text + (load.name.empty() ? "" : "." + load.name);
    const int a = point_of(circuit.name.text, load.between.first.text, load.at.text);
    const int b = point_of(circuit.name.text, load.between.second.text, load.at.text);
    out_.states.push_back(fmt::format("{} at {}: {}", name, load.at.text,
                                      load.state == LoadState::on    ? "on"
                                      : load.state == LoadState::off ? "off"
                                                                     : "standby"));
    if (!model.assumption.empty()) assumptions_.insert(name + ": " + model.assumption);
    if (model.drive) mark_drive(circuit, load);
    if (model.admittance == 0.0) continue;
    add_element(name, a, b, model.admittance);
    out_.loads.push_back(
        {name, circuit.name.text, load.kind, load.at.text, a, b, model.admittance, model.nominal_volts});
    if (!model.filter) out_.connections.push_back({a, b, Join::load, 1.0 / model.admittance, name});
  }
}

// Across each hot and the neutral, or each pair of hots where there is none, at the end of the last run.
void Lowering::add_unlisted_load(const Circuit& circuit) {
  std::vector<std::string> hots;
  std::string neutral;
  for (const Wire& wire : circuit.wires) {
    if (names_neutral(wire.name.text)) neutral = wire.name.text;
    if (!names_neutral(wire.name.text) && !names_ground(wire.name.text) &&
        hots.size() < std::max<std::size_t>(1, circuit.poles.size()))
      hots.push_back(wire.name.text);
  }
  if (circuit.runs.empty() || hots.empty()) return;
  const std::string place = far_place(circuit);
  const auto reached = [&](const std::string& name) {
    const int wire = wiring_.find(circuit.name.text, name);
    return wire >= 0 && reaches(wiring_.wires[wire], place);
  };
  for (std::size_t i = 0; i < hots.size(); ++i) {
    const std::string other = !neutral.empty() ? neutral : i + 1 < hots.size() ? hots[i + 1] : "";
    if (other.empty() || !reached(hots[i]) || !reached(other)) continue;
    const double volts = nominal_volts(building_, circuit, other);
    if (volts <= 0.0) continue;
    const double admittance = k_unlisted_power / (volts * volts);
    const std::string name = "load " + circuit.name.text + " (not listed)";
    const int a = point_of(circuit.name.text, hots[i], place);
    const int b = point_of(circuit.name.text, other, place);
    add_element(name, a, b, admittance);
    out_.connections.push_back({a, b, Join::load, 1.0 / admittance, name});
    out_.unlisted_loads.push_back({circuit.name.text, static_cast<int>(out_.network.elements.size()) - 1,
                                   static_cast<int>(out_.connections.size()) - 1, volts});
  }
}

void Lowering::mark_drive(const Circuit& circuit, const Load& load) {
  for (const std::string& name : {load.between.first.text, load.between.second.text}) {
    const int wire = wiring_.find(circuit.name.text, name);
    if (wire < 0) continue;
    for (const int run : wiring_.wires[wire].runs) drive_runs_.insert(run);
  }
}

void Lowering::add_element(const std::string& name, int a, int b, Complex admittance) {
  out_.network.elements.push_back({a, b, admittance});
  out_.element_names.push_back(name);
}

}  // namespace netlists
