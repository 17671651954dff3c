#include "netlists/stage.h"

#include <algorithm>
#include <optional>
#include <stdexcept>

namespace netlists {
namespace {

std::optional<bool> on_or_off(const std::string& value) {
  if (value == "on" || value == "closed" || value == "true" || value == "yes") return true;
  if (value == "off" || value == "open" || value == "false" || value == "no") return false;
  return std::nullopt;
}

Circuit* find_circuit(Building& building, const std::string& name) {
  for (Circuit& circuit : building.circuits) {
    if (circuit.name.text == name) return &circuit;
  }
  return nullptr;
}

std::string set_switch(Switch& item, const std::string& field, const std::string& value) {
  if (field == "state") {
    const auto state = on_or_off(value);
    if (!state || item.kind != SwitchKind::contact) return "a contact's state is 'open' or 'closed'";
    item.closed = *state;
    return "";
  }
  if (field == "position" && item.kind != SwitchKind::contact) {
    const int throws = item.kind == SwitchKind::four_way ? 2 : static_cast<int>(item.wires.size()) - 1;
    if (value.size() != 1 || value[0] < '1' || value[0] - '0' > throws) {
      return "a position is a number from 1 to " + std::to_string(throws);
    }
    item.position = value[0] - '0';
    return "";
  }
  return "'" + field + "' is no property of this switch; write state or position";
}

std::string set_load(Load& load, const std::string& field, const std::string& value) {
  if (field != "state") return "'" + field + "' is no property of a load that a stage can set; write state";
  if (value == "standby") {
    load.state = LoadState::standby;
    return "";
  }
  const auto state = on_or_off(value);
  if (!state) return "a load's state is 'on', 'off' or 'standby'";
  load.state = *state ? LoadState::on : LoadState::off;
  return "";
}

std::string set_breaker(Circuit& circuit, const std::string& pole, const std::string& value) {
  const auto state = on_or_off(value);
  if (!state) return "a breaker is 'on' or 'off'";
  if (circuit.breaker.empty()) circuit.breaker.assign(std::max<std::size_t>(1, circuit.poles.size()), true);
  if (pole.empty()) {
    std::fill(circuit.breaker.begin(), circuit.breaker.end(), *state);
    return "";
  }
  for (std::size_t i = 0; i < circuit.poles.size() && i < circuit.breaker.size(); ++i) {
    const auto& position = circuit.poles[i];
    if (position.line == pole || (position.slot && std::to_string(*position.slot) == pole)) {
      circuit.breaker[i] = *state;
      return "";
    }
  }
  return "the breaker has no pole '" + pole + "'";
}

std::vector<std::string> split(const std::string& text) {
  std::vector<std::string> parts;
  std::size_t begin = 0;
  for (std::size_t dot = text.find('.'); dot != std::string::npos; dot = text.find('.', begin)) {
    parts.push_back(text.substr(begin, dot - begin));
    begin = dot + 1;
  }
  parts.push_back(text.substr(begin));
  return parts;
}

const Stage* find_stage(const Building& building, const std::string& name) {
  if (name.empty()) return building.stages.empty() ? nullptr : &building.stages.front();
  for (const Stage& stage : building.stages) {
    if (stage.name.text == name) return &stage;
  }
  std::string known;
  for (const Stage& stage : building.stages) known += (known.empty() ? "'" : ", '") + stage.name.text + "'";
  throw std::invalid_argument("stage '" + name + "' is not in the model; " +
                              (known.empty() ? std::string("it has no stages") : "it has " + known));
}

}  // namespace

std::string apply_setting(Building& building, const std::string& target, const std::string& value) {
  const std::vector<std::string> parts = split(target);
  // A feeder's breaker is set by the name of the panel it feeds.
  if (parts.size() == 2 && parts[1] == "breaker") {
    for (Panel& panel : building.panels) {
      if (panel.name.text != parts[0] || !panel.feeder) continue;
      const auto state = on_or_off(value);
      if (!state) return "a breaker is 'on' or 'off'";
      panel.feeder->breaker_on = *state;
      return "";
    }
  }
  Circuit* circuit = find_circuit(building, parts[0]);
  if (!circuit) return "there is no circuit '" + parts[0] + "'";
  if (parts.size() >= 2 && parts[1] == "breaker") {
    return set_breaker(*circuit, parts.size() > 2 ? parts[2] : "", value);
  }
  if (parts.size() != 3) return "write CIRCUIT.breaker, CIRCUIT.SWITCH.state or CIRCUIT.LOAD.state";
  for (Switch& item : circuit->switches) {
    if (item.name == parts[1]) return set_switch(item, parts[2], value);
  }
  if (circuit->loads) {
    for (Load& load : *circuit->loads) {
      if (!load.name.empty() && load.name == parts[1]) return set_load(load, parts[2], value);
    }
  }
  return "circuit '" + parts[0] + "' has no switch or load named '" + parts[1] + "'";
}

Building in_stage(const Building& building, const std::string& stage) {
  const Stage* found = find_stage(building, stage);
  Building result = building;
  if (!found) return result;
  for (const auto& [target, value] : found->set) {
    const std::string wrong = apply_setting(result, target.text, value.text);
    if (!wrong.empty()) throw std::invalid_argument("stage '" + found->name.text + "': " + wrong);
  }
  result.bonds.insert(result.bonds.end(), found->bonds.begin(), found->bonds.end());
  result.cuts.insert(result.cuts.end(), found->cuts.begin(), found->cuts.end());
  for (const Name& gone : found->remove) {
    std::erase_if(result.circuits, [&](const Circuit& c) { return c.name.text == gone.text; });
  }
  return result;
}

std::string stage_name(const Building& building, const std::string& stage) {
  const Stage* found = find_stage(building, stage);
  return found ? found->name.text : "as drawn";
}

}  // namespace netlists
