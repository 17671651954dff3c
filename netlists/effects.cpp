#include "netlists/effects.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>
#include <set>
#include <tuple>

#include "netlists/load_effects.h"
#include "netlists/touch.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_fault = 0.1;             // ohm, of a line faulted to ground
constexpr double k_worth_telling = 0.01;    // of the threshold
constexpr std::size_t k_most_touched = 64;  // conductors of one place that are taken together

/// A conductor as it can be touched at a place.
struct Touched {
  std::size_t conductor = 0;
  int node = 0;
};

bool by_wire(Condition condition) {
  return condition == Condition::grounded || condition == Condition::energised;
}

class EffectFinder {
 public:
  EffectFinder(const Building& building, const Lowered& lowered, const Conditions& conditions,
               const engine::SolvedNetwork& solved)
      : building_(building),
        lowered_(lowered),
        conditions_(conditions),
        solved_(solved),
        body_(body_impedance(building.frequency)) {
    for (const int node : solved.undetermined()) undetermined_.insert(node);
    for (std::size_t c = 0; c < lowered.conductors.size(); ++c) {
      for (const Access& access : lowered.conductors[c].access) conductor_at_.try_emplace(access.node, c);
    }
  }

  std::vector<Effect> find() {
    for (const LoweredLoad& load : lowered_.loads) add_load(load);
    add_touches();
    return std::move(found_);
  }

 private:
  // ---- loads -------------------------------------------------------------------------------------

  void add_load(const LoweredLoad& load) {
    const auto kind = building_.catalogue.loads.find(load.kind);
    if (kind == building_.catalogue.loads.end()) return;
    for (const LoadEffect& effect : kind->second.effects) {
      if (effect.what == "device_trips") {
        add_trip(load, kind->second, effect);
      } else if (is_coupled(load)) {
        add_load_effect(load, kind->second, effect);
      }
    }
  }

  // A load between what is fed and what is grounded, by wire at both ends, works or rests as drawn.
  bool is_coupled(const LoweredLoad& load) const {
    if (load.a == load.b || undetermined_.count(load.a) || undetermined_.count(load.b)) return false;
    return !by_wire(conditions_.of_node[load.a]) || !by_wire(conditions_.of_node[load.b]);
  }

  void add_load_effect(const LoweredLoad& load, const LoadKind& kind, const LoadEffect& effect) {
    const Port loaded{solved_.volts(load.a, load.b), solved_.source_impedance(load.a, load.b)};
    const Port port = without_load(loaded, load.admittance);
    Effect found = effect_on(load, kind, effect);
    if (effect.rectifies) {
      found.value = rectified_current(port, effect.volts, building_.frequency);
      found.threshold = effect.current;
      found.unit = "A";
      found.subject += fmt::format(", its operating point solved as a rectifier into {:.3g} V", effect.volts);
      // The mean current goes as one over the impedance, hence as the length.
      if (found.value > 0.0) found.run_length = scaled(found.threshold / found.value, length_of(load));
    } else {
      const Complex input = 1.0 / (load.admittance * effect.admittance_factor);
      found.value = std::abs(port.volts * input / (input + port.impedance));
      found.threshold = threshold_volts(effect, load.nominal_volts, input);
      found.unit = "V";
      found.run_length = scaled(length_share(port, input, found.threshold), length_of(load));
    }
    add(std::move(found));
  }

  Effect effect_on(const LoweredLoad& load, const LoadKind& kind, const LoadEffect& effect) const {
    Effect found;
    found.what = effect.what;
    found.where = load.place;
    found.subject = load.name + ", " + kind.label;
    found.source = effect.source;
    return found;
  }

  // Residual current: what leaves through a circuit's wires and does not come back through them.
  void add_trip(const LoweredLoad& load, const LoadKind& kind, const LoadEffect& effect) {
    Effect found = effect_on(load, kind, effect);
    found.value = residual_current(load.circuit);
    found.threshold = effect.current;
    found.unit = "A";
    double length = 0.0;
    for (const ConductorPath& path : lowered_.conductors) {
      if (path.circuit == load.circuit && !path.ground) length = std::max(length, length_of(path));
    }
    if (found.value > 0.0) found.run_length = length * found.threshold / found.value;
    add(std::move(found));
  }

  // The largest over the circuit's runs, at the end of each where it is largest: that of its beginning.
  double residual_current(const std::string& circuit) const {
    std::map<int, std::pair<Complex, Complex>> net;  // by line, at its two ends
    for (const ConductorPath& path : lowered_.conductors) {
      if (path.circuit != circuit || path.ground) continue;
      for (const auto& [line, row] : path.segments) {
        net[line].first += end_current(line, row, true);
        net[line].second += end_current(line, row, false);
      }
    }
    double most = 0.0;
    for (const auto& [line, ends] : net) {
      for (const Complex current : {ends.first, ends.second}) {
        if (std::isfinite(std::abs(current))) most = std::max(most, std::abs(current));
      }
    }
    return most;
  }

  // The series branches of a line begin behind half a cell's shunt admittance: what that draws passes its end
  // too.
  Complex end_current(int index, int row, bool from) const {
    const engine::Line& line = lowered_.network.lines[static_cast<std::size_t>(index)];
    const double omega = 2 * std::numbers::pi * building_.frequency;
    const std::vector<int>& nodes = from ? line.from : line.to;
    Complex shunt = 0.0;
    for (std::size_t j = 0; j < nodes.size(); ++j) {
      const auto column = static_cast<Eigen::Index>(j);
      shunt +=
          Complex(line.matrices->conductance(row, column), omega * line.matrices->capacitance(row, column)) *
          solved_.volts(nodes[j]);
    }
    shunt *= line.length / (2 * line.cells);
    const Complex branch = solved_.current(index, row, from ? 0 : line.cells - 1);
    return from ? branch + shunt : branch - shunt;
  }

  // ---- lengths -----------------------------------------------------------------------------------

  double length_of(const ConductorPath& path) const {
    double length = 0.0;
    for (const auto& [line, row] : path.segments)
      length += lowered_.network.lines[static_cast<std::size_t>(line)].length;
    return length;
  }

  double length_of(const LoweredLoad& load) const {
    for (const int node : {load.a, load.b}) {
      const auto found = conductor_at_.find(node);
      if (found != conductor_at_.end() && !by_wire(conditions_.of_node[node]))
        return length_of(lowered_.conductors[found->second]);
    }
    return 0.0;
  }

  static std::optional<double> scaled(std::optional<double> share, double length) {
    if (!share || length == 0.0) return std::nullopt;
    return *share * length;
  }

  // ---- people ------------------------------------------------------------------------------------

  void add_touches() {
    std::map<std::string, std::vector<Touched>> coupled;
    std::map<std::string, std::vector<Touched>> isolated;
    for (std::size_t c = 0; c < lowered_.conductors.size(); ++c) {
      const Condition condition = conditions_.of_conductor[c];
      const bool leg =
          condition == Condition::energised && lowered_.floating_supplies.count(conditions_.supply[c]) > 0;
      if (by_wire(condition) && !leg) continue;
      for (const Access& access : lowered_.conductors[c].access) {
        if (!undetermined_.count(access.node))
          (leg ? isolated : coupled)[access.place].push_back({c, access.node});
      }
    }
    for (const auto& [place, touched] : coupled) add_touch(place, touched, true);
    // Between the legs of an isolated supply lies the supply itself, which is no coupled current.
    for (const auto& [place, touched] : isolated) add_touch(place, touched, false);
  }

  int ground_at(const std::string& place) const {
    const auto ground = lowered_.at.find("ground@" + place);
    return ground == lowered_.at.end() || undetermined_.count(ground->second) ? 0 : ground->second;
  }

  void add_touch(const std::string& place, std::vector<Touched> touched, bool together) {
    const int ground = ground_at(place);
    const auto last = std::remove_if(touched.begin(), touched.end(),
                                     [&](const Touched& one) { return one.node == ground; });
    touched.erase(last, touched.end());
    if (touched.size() > k_most_touched) touched.resize(k_most_touched);
    if (touched.empty()) return;
    const TouchPorts ports = ports_of(touched, ground, together);
    Touch most = single_touch(ports, body_);
    if (together) {
      for (const Touch& other : {joint_touch(ports, body_), pair_touch(ports, body_)}) {
        if (other.current > most.current * (1 + 1e-6)) most = other;
      }
    }
    Effect found;
    found.what = "person_feels";
    found.where = place;
    found.subject = words(most, touched) + "; " + body_zone(most.current);
    found.value = most.current;
    found.threshold = building_.limits.body_current;
    found.unit = "A";
    found.source = "IEC 60479-1, threshold of perception; body network of IEC 60990, figure 3; from memory";
    if (most.first >= 0 && most.second < 0 && together) {
      const Port port{ports.volts(most.first), ports.impedance(most.first, most.first)};
      found.run_length =
          scaled(length_share(port, body_, found.threshold * std::abs(body_)),
                 length_of(lowered_.conductors[touched[static_cast<std::size_t>(most.first)].conductor]));
    }
    add(std::move(found));
  }

  // Mutual impedances from those between pairs: Z_ij = (Z_ii + Z_jj - Z_i-j) / 2, the network being
  // reciprocal.
  TouchPorts ports_of(const std::vector<Touched>& touched, int ground, bool together) const {
    const auto n = static_cast<Eigen::Index>(touched.size());
    std::vector<std::pair<int, int>> pairs;
    for (const Touched& one : touched) pairs.emplace_back(one.node, ground);
    const auto apart = [&](std::size_t i, std::size_t j) { return touched[i].node != touched[j].node; };
    for (std::size_t i = 0; together && i < touched.size(); ++i) {
      for (std::size_t j = i + 1; j < touched.size(); ++j) {
        if (apart(i, j)) pairs.emplace_back(touched[i].node, touched[j].node);
      }
    }
    const std::vector<Complex> solved = solved_.source_impedances(pairs);
    TouchPorts ports{Eigen::VectorXcd(n), Eigen::MatrixXcd::Zero(n, n)};
    std::size_t next = touched.size();
    for (Eigen::Index i = 0; i < n; ++i) {
      ports.volts(i) = solved_.volts(touched[static_cast<std::size_t>(i)].node, ground);
      ports.impedance(i, i) = solved[static_cast<std::size_t>(i)];
    }
    for (Eigen::Index i = 0; together && i < n; ++i) {
      for (Eigen::Index j = i + 1; j < n; ++j) {
        const Complex between =
            apart(static_cast<std::size_t>(i), static_cast<std::size_t>(j)) ? solved[next++] : Complex(0.0);
        ports.impedance(i, j) = (ports.impedance(i, i) + ports.impedance(j, j) - between) / 2.0;
        ports.impedance(j, i) = ports.impedance(i, j);
      }
    }
    return ports;
  }

  std::string words(const Touch& touch, const std::vector<Touched>& touched) const {
    const auto name = [&](int i) {
      return lowered_.conductors[touched[static_cast<std::size_t>(i)].conductor].id;
    };
    if (touch.first < 0)
      return fmt::format(
          "all {} conductors there that are not fed or grounded by wire, touched together, to ground",
          touched.size());
    if (touch.second < 0) return name(touch.first) + " to ground";
    return name(touch.first) + " and " + name(touch.second) + ", hand to hand";
  }

  void add(Effect found) {
    if (!std::isfinite(found.value) || !(found.threshold > 0.0)) return;
    if (found.value < k_worth_telling * found.threshold) return;
    found.happens = found.value >= found.threshold;
    found_.push_back(std::move(found));
  }

  const Building& building_;
  const Lowered& lowered_;
  const Conditions& conditions_;
  const engine::SolvedNetwork& solved_;
  Complex body_;  // ohm
  std::set<int> undetermined_;
  std::map<int, std::size_t> conductor_at_;  // by node
  std::vector<Effect> found_;
};

// The effects while one pole of a floating supply is faulted to ground, said so in each subject.
std::vector<Effect> while_faulted(const Building& building, const Lowered& lowered,
                                  const Conditions& conditions, const LivePole& pole) {
  Lowered faulted = lowered;
  faulted.network.elements.push_back({pole.node, 0, 1.0 / k_fault});
  faulted.element_names.push_back("fault of " + pole.supply + " " + pole.name);
  const engine::SolvedNetwork solved(faulted.network);
  std::vector<Effect> found = EffectFinder(building, faulted, conditions, solved).find();
  for (Effect& effect : found)
    effect.subject += fmt::format("; while {} of {} is faulted to ground", pole.name, pole.supply);
  return found;
}

// Of a place's effects of one kind on one load, the one that goes furthest counts; of people, the place's.
void keep_larger(std::vector<Effect>& all, const std::vector<Effect>& more) {
  const auto key = [](const Effect& effect) {
    const std::size_t word = effect.what == "person_feels" ? 0 : effect.subject.find(',');
    return std::tuple(effect.what, effect.where, effect.subject.substr(0, word));
  };
  for (const Effect& effect : more) {
    const auto same =
        std::find_if(all.begin(), all.end(), [&](const Effect& a) { return key(a) == key(effect); });
    if (same == all.end())
      all.push_back(effect);
    else if (effect.value > same->value * (1 + 1e-6))
      *same = effect;
  }
}

void put_in_order(std::vector<Effect>& all) {
  std::stable_sort(all.begin(), all.end(), [](const Effect& a, const Effect& b) {
    const auto key = [](const Effect& effect) {
      const bool hurts = effect.what == "person_feels" && effect.happens;
      return std::pair(hurts ? 0 : effect.happens ? 1 : 2, -effect.value / effect.threshold);
    };
    return key(a) < key(b);
  });
}

}  // namespace

std::vector<Effect> effects(const Building& building, const Lowered& lowered, const Conditions& conditions,
                            const engine::SolvedNetwork& solved) {
  std::vector<Effect> found = EffectFinder(building, lowered, conditions, solved).find();
  for (const LivePole& pole : lowered.poles) {
    if (lowered.floating_supplies.count(pole.supply))
      keep_larger(found, while_faulted(building, lowered, conditions, pole));
  }
  put_in_order(found);
  return found;
}

}  // namespace netlists
