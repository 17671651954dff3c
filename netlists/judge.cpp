#include "netlists/judge.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <memory>
#include <set>

#include "engine/attribution.h"
#include "netlists/condition.h"
#include "netlists/plan.h"
#include "netlists/reading.h"
#include "netlists/settle.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_live_like_most = 50.0;  // V
constexpr double k_live_like_share = 0.4;  // of the lowest line voltage at the place
constexpr double k_dead_like = 3.0;        // V
constexpr double k_smallest_share = 1e-3;  // of the largest contribution; less goes into "others"
constexpr double k_net_current = 10e-3;    // A, from here on a run's net current is worth a warning
constexpr double k_net_share = 0.05;       // of the largest current in the run

/// Supplies, and the bars of panels, as aggressors where no conductor of the model stands for them.
class Groups {
 public:
  Groups(const Building& building, const Lowered& lowered)
      : ground_(static_cast<int>(lowered.conductors.size())) {
    for (const ConductorPath& path : lowered.conductors) names_.push_back(path.id);
    names_.emplace_back("ground");
    for (const Supply& supply : building.supplies) {
      supply_[supply.name.text] = static_cast<int>(names_.size());
      names_.push_back("supply:" + supply.name.text);
    }
  }

  const std::string& name(int group) const { return names_[group]; }
  int ground() const { return ground_; }
  int supply(const std::string& name) const {
    const auto found = supply_.find(name);
    return found == supply_.end() ? ground_ : found->second;
  }

 private:
  std::vector<std::string> names_;
  std::map<std::string, int> supply_;
  int ground_ = 0;
};

class Judge {
 public:
  Judge(const Building& building, const Lowered& lowered, const engine::SolvedNetwork& solved)
      : building_(building),
        lowered_(lowered),
        solved_(solved),
        conditions_(conditions(lowered)),
        groups_(building, lowered),
        undetermined_(solved.undetermined().begin(), solved.undetermined().end()) {
    for (const ConductorPath& path : lowered.conductors) by_wire_[path.wire].push_back(&path);
    for (std::size_t i = 0; i < lowered.conductors.size(); ++i) {
      for (const Access& access : lowered.conductors[i].access)
        at_place_[access.place].push_back({static_cast<int>(i), access.node});
    }
  }

  Findings judge() {
    Findings findings;
    findings.title = building_.title;
    findings.model_sha256 = building_.sha256;
    findings.frequency = building_.frequency;
    findings.states = lowered_.states;
    findings.assumptions = lowered_.assumptions;
    findings.warnings = lowered_.warnings;
    findings.residual = solved_.residual();
    findings.instruments = building_.instruments;
    for (std::size_t i = 0; i < lowered_.conductors.size(); ++i) findings.conductors.push_back(conductor(i));
    rank(findings.conductors);
    findings.warnings.insert(findings.warnings.end(), conditions_.warnings.begin(),
                             conditions_.warnings.end());
    findings.warnings.insert(findings.warnings.end(), warnings_.begin(), warnings_.end());
    warn_of_net_currents(findings.warnings);
    findings.assumptions.emplace_back(
        "no draws are made: readings are those of the nominal case, ranked by that alone");
    return findings;
  }

 private:
  struct AtPlace {
    int conductor = 0;
    int node = 0;
  };

  // ---- one conductor -----------------------------------------------------------------------------

  ConductorFindings conductor(std::size_t index) {
    const ConductorPath& path = lowered_.conductors[index];
    ConductorFindings found;
    found.id = path.id;
    found.condition = conditions_.of_conductor[index];
    found.not_predicted = path.near_drive;
    found.supply = conditions_.supply[index];
    found.isolated_supply = found.condition == Condition::energised &&
                            std::find(lowered_.floating_supplies.begin(), lowered_.floating_supplies.end(),
                                      found.supply) != lowered_.floating_supplies.end();
    for (const Access& access : path.access) {
      if (undetermined_.count(access.node)) {
        warnings_.push_back(
            fmt::format("{} at {}: nothing in the model ties it to anything; no reading is predicted",
                        path.id, access.place));
        continue;
      }
      found.places.push_back(place(index, access, found));
    }
    mislead(found);
    found.settle = settle(index, found);
    return found;
  }

  bool stiff(const ConductorFindings& found) const {
    return found.condition == Condition::grounded ||
           (found.condition == Condition::energised && !found.isolated_supply);
  }

  PlaceFindings place(std::size_t index, const Access& access, const ConductorFindings& owner) {
    const ConductorPath& path = lowered_.conductors[index];
    PlaceFindings found;
    found.place = access.place;
    const auto ground = lowered_.at.find("ground@" + access.place);
    const int reference = ground == lowered_.at.end() ? 0 : ground->second;
    found.reference = ground == lowered_.at.end() ? "earth" : "ground";
    if (found.reference == "earth") {
      earth_places_.insert(access.place);
    }
    const Port port = port_between(access.node, reference);
    found.open_circuit = port.volts;
    found.source_impedance = port.impedance;
    found.short_circuit = port.impedance == 0.0 ? 0.0 : std::abs(port.volts / port.impedance);
    add_readings(found, port, found.reference, true);
    const auto [neutral, neutral_id] = neutral_at(path, access);
    if (neutral >= 0) add_readings(found, port_between(access.node, neutral), neutral_id, true);
    if (!stiff(owner)) {
      found.contributions = contributions(access.node, reference, owner);
      add_partners(found, path, access, neutral);
      add_neighbour(found, index, access);
    }
    return found;
  }

  Port port_between(int a, int b) {
    if (a == b) return {0.0, 0.0};
    const auto [entry, fresh] = ports_.try_emplace({a, b});
    if (fresh) entry->second = {solved_.volts(a, b), solved_.source_impedance(a, b)};
    return entry->second;
  }

  // The own neutral's node at a place and the id of the piece that is reached there: a cut neutral goes
  // by another name beyond its cut. Node -1 where there is none.
  std::pair<int, std::string> neutral_at(const ConductorPath& path, const Access& access) const {
    const auto pieces = by_wire_.find(path.neutral);
    if (path.neutral.empty() || pieces == by_wire_.end()) return {-1, ""};
    for (const ConductorPath* piece : pieces->second) {
      for (const Access& reached : piece->access) {
        if (reached.place != access.place || undetermined_.count(reached.node)) continue;
        return {reached.node == access.node ? -1 : reached.node, piece->id};
      }
    }
    return {-1, ""};
  }

  void add_readings(PlaceFindings& found, const Port& port, const std::string& reference, bool judged) {
    for (const InstrumentType& instrument : building_.instruments) {
      Reading reading = read(instrument, port, building_.frequency);
      reading.reference = reference;
      reading.appearance = appearance(reading.volts, found.place);
      reading.judged = judged && !reading.indicator;
      found.readings.push_back(std::move(reading));
    }
  }

  // The other wires of its circuit, shown and not judged.
  void add_partners(PlaceFindings& found, const ConductorPath& path, const Access& access, int neutral) {
    if (path.circuit.empty()) return;
    for (const AtPlace& other : at_place_.at(access.place)) {
      const ConductorPath& partner = lowered_.conductors[other.conductor];
      if (partner.circuit != path.circuit || other.node == access.node || other.node == neutral ||
          partner.ground)
        continue;
      if (undetermined_.count(other.node)) continue;
      add_readings(found, port_between(access.node, other.node), partner.id, false);
    }
  }

  // The live conductor of another circuit there that puts most on it, else the one of most voltage.
  void add_neighbour(PlaceFindings& found, std::size_t index, const Access& access) {
    std::map<std::string, double> share;
    for (const ContributionEntry& entry : found.contributions) share[entry.from] += std::abs(entry.volts);
    const AtPlace* best = nullptr;
    std::pair<double, double> best_weight{-1.0, -1.0};
    for (const AtPlace& other : at_place_.at(access.place)) {
      const ConductorPath& neighbour = lowered_.conductors[other.conductor];
      if (other.node == access.node || neighbour.ground) continue;
      if (conditions_.of_conductor[other.conductor] != Condition::energised) continue;
      if (!neighbour.circuit.empty() && neighbour.circuit == lowered_.conductors[index].circuit) continue;
      const std::pair<double, double> weight{share.count(neighbour.id) ? share[neighbour.id] : 0.0,
                                             std::abs(solved_.volts(other.node))};
      if (weight > best_weight) {
        best_weight = weight;
        best = &other;
      }
    }
    if (best)
      add_readings(found, port_between(access.node, best->node), lowered_.conductors[best->conductor].id,
                   false);
  }

  // ---- appearance --------------------------------------------------------------------------------

  std::set<std::string> supplies_at(const std::string& place) const {
    std::set<std::string> names;
    const auto here = at_place_.find(place);
    if (here == at_place_.end()) return names;
    for (const AtPlace& other : here->second) {
      const std::string& drawn = lowered_.conductors[other.conductor].supply;
      const std::string& solved = conditions_.supply[other.conductor];
      if (!drawn.empty()) names.insert(drawn);
      if (!solved.empty()) names.insert(solved);
    }
    return names;
  }

  double live_like(const std::string& place) {
    if (building_.limits.live_like) return *building_.limits.live_like;
    const auto [entry, fresh] = live_like_.try_emplace(place, k_live_like_most);
    if (!fresh) return entry->second;
    for (const std::string& name : supplies_at(place)) {
      const Supply* supply = find_supply(building_, name);
      const SystemType* system = supply ? system_of(building_, *supply) : nullptr;
      if (system) entry->second = std::min(entry->second, k_live_like_share * line_voltage(*system));
    }
    return entry->second;
  }

  Appearance appearance(double volts, const std::string& place) {
    if (volts >= live_like(place)) return Appearance::live_like;
    return volts < building_.limits.dead_like.value_or(k_dead_like) ? Appearance::dead_like
                                                                    : Appearance::unclear;
  }

  void mislead(ConductorFindings& found) const {
    const bool live = found.condition == Condition::energised || found.condition == Condition::through_load;
    const Appearance contradicts = live ? Appearance::dead_like : Appearance::live_like;
    for (const PlaceFindings& place : found.places) {
      for (const Reading& reading : place.readings) {
        if (!reading.judged) continue;
        found.expected_reading = std::max(found.expected_reading, reading.volts);
        if (reading.appearance == contradicts)
          found.misleads = live ? Misleads::false_dead : Misleads::false_live;
      }
    }
  }

  // ---- why -----------------------------------------------------------------------------------------

  std::vector<ContributionEntry> contributions(int node, int reference, const ConductorFindings& owner) {
    const std::string frame = owner.isolated_supply ? owner.supply : "";
    auto& attribution = attributions_[frame];
    if (!attribution) attribution = std::make_unique<engine::Attribution>(solved_, aggressors(frame));
    std::vector<ContributionEntry> entries;
    double largest = 0.0;
    const auto parts = attribution->contributions(node, reference);
    for (const engine::Contribution& part : parts) largest = std::max(largest, std::abs(part.volts));
    std::map<engine::Path, Complex> others;
    for (const engine::Contribution& part : parts) {
      if (std::abs(part.volts) < k_smallest_share * largest) {
        others[part.path] += part.volts;
      } else {
        entries.push_back({groups_.name(part.group), to_word(part.path), part.volts});
      }
    }
    for (const auto& [path, volts] : others) {
      if (volts != 0.0) entries.push_back({"others", to_word(path), volts});
    }
    return entries;
  }

  static std::string to_word(engine::Path path) {
    switch (path) {
      case engine::Path::electric:
        return "electric";
      case engine::Path::magnetic:
        return "magnetic";
      case engine::Path::conductive:
        return "conductive";
    }
    return "";
  }

  // Who is an aggressor: all that is energised or grounded, but for a floating supply whose own
  // conductors are asked about: what sets their potential is asked, so they are victims then.
  engine::Aggressors aggressors(const std::string& frame) const {
    const engine::Network& network = lowered_.network;
    engine::Aggressors result;
    std::vector<bool> fixed;
    for (int n = 0; n < network.node_count; ++n) {
      const Condition condition = conditions_.of_node[n];
      const bool own = !frame.empty() && conditions_.floating_supply[n] == frame;
      fixed.push_back((condition == Condition::energised || condition == Condition::grounded) && !own);
      result.of_node.push_back(fixed.back() ? owner_of(n) : -1);
    }
    for (std::size_t l = 0; l < network.lines.size(); ++l) {
      result.of_segment.emplace_back();
      for (const int node : network.lines[l].from) result.of_segment[l].push_back(fixed[node] ? 0 : -1);
    }
    for (std::size_t c = 0; c < lowered_.conductors.size(); ++c) {
      for (const auto& [line, row] : lowered_.conductors[c].segments) {
        int& group = result.of_segment[line][row];
        if (group >= 0) group = static_cast<int>(c);
      }
    }
    for (const std::string& name : lowered_.source_names) {
      result.of_source.push_back(groups_.supply(name.substr(0, name.rfind(' '))));
    }
    return result;
  }

  int owner_of(int node) const {
    if (owner_.empty()) {
      owner_.assign(static_cast<std::size_t>(lowered_.network.node_count), groups_.ground());
      for (const LivePole& pole : lowered_.poles) {
        if (!pole.grounded) owner_[pole.node] = groups_.supply(pole.supply);
      }
      std::vector<bool> taken(owner_.size(), false);
      for (const auto& [name, at] : lowered_.at) {
        if (name.rfind("ground@", 0) == 0) taken[at] = true;
      }
      for (std::size_t c = 0; c < lowered_.conductors.size(); ++c) {
        for (const Access& access : lowered_.conductors[c].access) {
          if (!taken[access.node] && owner_[access.node] == groups_.ground())
            owner_[access.node] = static_cast<int>(c);
        }
      }
    }
    return owner_[node];
  }

  // ---- what settles it ---------------------------------------------------------------------------

  Settle settle(std::size_t index, const ConductorFindings& found) {
    switch (found.condition) {
      case Condition::grounded:
        return settle_grounded();
      case Condition::through_load:
        return settle_through_load(conditions_.through[index]);
      case Condition::energised: {
        if (!found.isolated_supply) return settle_energised(found.supply);
        const Supply* supply = find_supply(building_, found.supply);
        const SystemType* system = supply ? system_of(building_, *supply) : nullptr;
        return settle_isolated(found.supply, system ? most_to_ground(building_, *supply) : 0.0);
      }
      case Condition::grounded_through_load:
      case Condition::floating:
        break;
    }
    double nominal = 0.0;
    std::map<std::string, CouplingReading> worst;
    for (const PlaceFindings& place : found.places) {
      nominal = std::max(nominal, nominal_at(place.place));
      for (const Reading& reading : place.readings) {
        if (reading.reference != place.reference || reading.indicator) continue;
        for (const InstrumentType& instrument : building_.instruments) {
          if (instrument.name != reading.instrument) continue;
          CouplingReading& entry = worst[reading.instrument];
          entry.instrument = reading.instrument;
          if (entry.resistance == 0.0 || reading.volts > entry.volts) {
            entry.volts = reading.volts;
            entry.resistance = resistance_in_force(instrument, reading);
          }
        }
      }
    }
    std::vector<CouplingReading> readings;
    for (const auto& [name, reading] : worst) readings.push_back(reading);
    return settle_coupling(readings, nominal, building_.limits.body_current);
  }

  // The highest nominal voltage to ground of a supply at a place; of any in the model where none is.
  double nominal_at(const std::string& place) const {
    double nominal = 0.0;
    for (const std::string& name : supplies_at(place)) {
      if (const Supply* supply = find_supply(building_, name))
        nominal = std::max(nominal, most_to_ground(building_, *supply));
    }
    if (nominal > 0) return nominal;
    for (const Supply& supply : building_.supplies)
      nominal = std::max(nominal, most_to_ground(building_, supply));
    return nominal;
  }

  // ---- all of them ---------------------------------------------------------------------------------

  static void rank(std::vector<ConductorFindings>& all) {
    const auto order = [](const ConductorFindings& c) {
      return c.misleads == Misleads::false_dead ? 0 : c.misleads == Misleads::false_live ? 1 : 2;
    };
    std::stable_sort(all.begin(), all.end(), [&](const ConductorFindings& a, const ConductorFindings& b) {
      if (order(a) != order(b)) return order(a) < order(b);
      return order(a) < 2 && a.expected_reading > b.expected_reading;
    });
    int next = 1;
    for (ConductorFindings& c : all) {
      if (c.misleads != Misleads::no) c.rank = next++;
    }
  }

  void warn_of_net_currents(std::vector<std::string>& warnings) const {
    for (const std::string& place : earth_places_) {
      warnings.push_back(
          fmt::format("place '{}' has no ground: readings there are to earth, which nobody can take "
                      "without a stake or a long lead",
                      place));
    }
    const engine::Network& network = lowered_.network;
    for (std::size_t l = 0; l < network.lines.size(); ++l) {
      Complex net = 0.0;
      double largest = 0.0;
      for (std::size_t i = 0; i < network.lines[l].from.size(); ++i) {
        const Complex current = solved_.current(static_cast<int>(l), static_cast<int>(i));
        if (!std::isfinite(std::abs(current))) continue;
        net += current;
        largest = std::max(largest, std::abs(current));
      }
      if (std::abs(net) < k_net_current || std::abs(net) < k_net_share * largest) continue;
      warnings.push_back(
          fmt::format("run '{}' carries a net current of {:.2g} A whose return is not beside it: what it "
                      "induces in other runs is "
                      "not in the model and may lie anywhere from nothing to several volts",
                      lowered_.line_runs[l], std::abs(net)));
    }
  }

  const Building& building_;
  const Lowered& lowered_;
  const engine::SolvedNetwork& solved_;
  Conditions conditions_;
  Groups groups_;
  std::set<int> undetermined_;
  std::map<std::string, std::vector<const ConductorPath*>> by_wire_;
  std::map<std::string, std::vector<AtPlace>> at_place_;
  std::map<std::pair<int, int>, Port> ports_;
  std::map<std::string, double> live_like_;
  std::map<std::string, std::unique_ptr<engine::Attribution>> attributions_;
  mutable std::vector<int> owner_;
  std::set<std::string> earth_places_;
  std::vector<std::string> warnings_;
};

}  // namespace

Findings judge(const Building& building, const Lowered& lowered, const engine::SolvedNetwork& solved) {
  return Judge(building, lowered, solved).judge();
}

}  // namespace netlists
