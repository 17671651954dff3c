#include "netlists/drawn_network.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>
#include <utility>

#include "netlists/plan.h"
#include "netlists/stage.h"

namespace netlists {
namespace {

constexpr int k_most_picks = 64;           // wander lengths of a run; beyond it the average hardly scatters
constexpr double k_least_unlisted = 10.0;  // W
constexpr double k_largest_unlisted = 1000.0;  // W

std::uint64_t stream(int line, int pick) { return static_cast<std::uint64_t>(line) * k_most_picks + pick; }
std::uint64_t stream_of_bank(int content, int layout) {
  constexpr std::uint64_t k_apart = 1ull << 40;  // from the streams of lines
  return k_apart + static_cast<std::uint64_t>(content) * k_most_layouts + layout;
}

/// Sets one thing that may vary on (closed, position 1) or off (open, position 2).
std::string vary(Building& building, const std::string& target, bool on) {
  std::string wrong;
  for (const auto& [form, yes, no] :
       {std::tuple{"", "on", "off"}, {".state", "on", "off"}, {".position", "1", "2"}}) {
    wrong = apply_setting(building, target + form, on ? yes : no);
    if (wrong.empty()) return "";
  }
  return wrong;
}

}  // namespace

DrawnValues::DrawnValues(const Uncertain& uncertain, Eigen::RowVectorXd point)
    : uncertain_(uncertain), point_(std::move(point)) {}

double DrawnValues::value(int quantity) const {
  return uncertain_.quantities[quantity].spread.quantile(point_(quantity));
}

double DrawnValues::value(Quantity::Kind kind, const std::string& target, double otherwise) const {
  const int quantity = uncertain_.find(kind, target);
  return quantity < 0 ? otherwise : value(quantity);
}

double DrawnValues::value(Quantity::Kind kind, int index, double otherwise) const {
  const int quantity = uncertain_.find(kind, index);
  return quantity < 0 ? otherwise : value(quantity);
}

double DrawnValues::unlisted_power(const std::string& circuit) const {
  const int quantity = uncertain_.find(Quantity::Kind::unlisted_load, circuit);
  if (quantity < 0 || value(quantity) == 0.0) return 0.0;
  // Below the chance the coordinate is uniform again: it says how large the load is.
  const double within = point_(quantity) / uncertain_.quantities[quantity].spread.mid;
  return k_least_unlisted * std::pow(k_largest_unlisted / k_least_unlisted, within);
}

Eigen::VectorXd DrawnValues::log_permittivities(const Catalogue& catalogue) const {
  Eigen::VectorXd logs = Eigen::VectorXd::Zero(static_cast<Eigen::Index>(uncertain_.insulations.size()));
  for (std::size_t i = 0; i < uncertain_.insulations.size(); ++i) {
    const double central = uncertain_.permittivities[i];
    const double drawn = std::max(1.0, value(Quantity::Kind::permittivity, static_cast<int>(i), central));
    logs(static_cast<Eigen::Index>(i)) = std::log(drawn / central);
    const std::string& owner = uncertain_.insulations[i].owner;
    const int thickness = uncertain_.find(Quantity::Kind::thickness, owner);
    if (thickness < 0) continue;
    const WireType& type = catalogue.wires.at(owner);
    const double core = type.conductor_diameter;
    const double coat = type.outer_diameter() - core;
    logs(static_cast<Eigen::Index>(i)) +=
        std::log(std::log1p(coat / core) / std::log1p(value(thickness) * coat / core));
  }
  return logs;
}

std::string DrawnValues::states() const {
  std::string out;
  for (std::size_t q = 0; q < uncertain_.quantities.size(); ++q)
    if (uncertain_.quantities[q].kind == Quantity::Kind::state)
      out += value(static_cast<int>(q)) > 0.5 ? '1' : '0';
  return out;
}

Building in_states(const Building& staged, const Uncertain& uncertain, const std::string& states) {
  Building building = staged;
  std::size_t next = 0;
  for (const Quantity& quantity : uncertain.quantities) {
    if (quantity.kind != Quantity::Kind::state) continue;
    const std::string wrong = vary(building, quantity.target, states[next++] == '1');
    if (!wrong.empty()) throw std::invalid_argument("uncertainty: may_vary: " + wrong);
  }
  return building;
}

NetworkDrawer::NetworkDrawer(const Building& staged, const Uncertain& uncertain, const SectionBank& bank,
                             const SectionLibrary& library, unsigned seed)
    : building_(staged), uncertain_(uncertain), bank_(bank), library_(library), seed_(seed) {
  for (const Supply& supply : staged.supplies) roots_[supply.name.text] = root_supply_of(supply.name.text);
}

int NetworkDrawer::root_supply_of(const std::string& supply) const {
  const Supply* at = find_supply(building_, supply);
  for (std::size_t steps = 0; at != nullptr && at->fed_from && steps <= building_.supplies.size(); ++steps) {
    const Circuit* circuit = find_circuit(building_, at->fed_from->circuit.text);
    const Panel* panel = circuit && circuit->panel ? find_panel(building_, circuit->panel->text) : nullptr;
    at = panel ? root_supply(building_, *panel) : nullptr;
  }
  for (std::size_t s = 0; at != nullptr && s < building_.supplies.size(); ++s)
    if (&building_.supplies[s] == at) return static_cast<int>(s);
  return -1;
}

SectionDraw NetworkDrawer::section_draw(const Stretch& stretch, double length, const DrawnValues& values,
                                        int draw, int line) const {
  const SectionContent& content = bank_.content(stretch);
  const int run = stretch.runs.front();
  SectionDraw drawn;
  drawn.picks.assign(content.layout_count(), 0);
  const double wander = values.value(Quantity::Kind::wander, run, length);
  const int picks = std::clamp(static_cast<int>(std::lround(length / wander)), 1, k_most_picks);
  // The bank's layouts are a sample themselves, and a long run's mean is no better known than theirs. So each
  // draw picks from layouts that are drawn from the bank with replacement (the bootstrap of Efron 1979), the
  // same ones for all lines of that content.
  const auto any = [&](std::uint64_t of) {
    return mixed(seed_, static_cast<std::uint64_t>(draw), of) % drawn.picks.size();
  };
  for (int pick = 0; pick < picks; ++pick) {
    const int slot = static_cast<int>(any(stream(line, pick)));
    ++drawn.picks[any(stream_of_bank(content.number(), slot))];
  }
  if (uncertain_.find(Quantity::Kind::clearance, run) >= 0)
    drawn.clearance = values.value(Quantity::Kind::clearance, run, 0.0);
  return drawn;
}

engine::Network NetworkDrawer::network(const Lowered& lowered, const DrawnValues& values, int draw) const {
  engine::Network network = lowered.network;
  const Eigen::VectorXd logs = values.log_permittivities(building_.catalogue);
  for (std::size_t l = 0; l < network.lines.size(); ++l) {
    engine::Line& line = network.lines[l];
    const Stretch& stretch = lowered.line_stretches[l];
    line.length *= values.value(Quantity::Kind::length, stretch.runs.front(), 1.0);
    SectionDraw section = section_draw(stretch, line.length, values, draw, static_cast<int>(l));
    section.log_permittivity = logs;
    line.matrices = std::make_shared<engine::LineMatrices>(bank_.content(stretch).drawn(section));
  }
  for (const UnlistedLoad& load : lowered.unlisted_loads)
    network.elements[load.element].admittance =
        values.unlisted_power(load.circuit) / (load.nominal_volts * load.nominal_volts);
  for (std::size_t s = 0; s < network.sources.size(); ++s) {
    const std::string& name = lowered.source_names[s];
    const int root = roots_.at(name.substr(0, name.rfind(' ')));
    if (root < 0) continue;
    const std::string& supply = building_.supplies[root].name.text;
    network.sources[s].volts *= values.value(Quantity::Kind::supply_volts, supply, 1.0);
    const int angle = uncertain_.find(Quantity::Kind::supply_angle, supply);
    if (angle >= 0) network.sources[s].volts *= std::polar(1.0, values.value(angle));
  }
  return network;
}

Lowered NetworkDrawer::with_loads(const Lowered& lowered, const DrawnValues& values) const {
  Lowered out = lowered;
  for (auto load = lowered.unlisted_loads.rbegin(); load != lowered.unlisted_loads.rend(); ++load)
    if (values.unlisted_power(load->circuit) == 0.0)
      out.connections.erase(out.connections.begin() + load->connection);
  return out;
}

}  // namespace netlists
