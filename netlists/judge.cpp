#include "netlists/judge.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "netlists/causes.h"
#include "netlists/condition.h"
#include "netlists/effects.h"
#include "netlists/places.h"
#include "netlists/plan.h"
#include "netlists/probes.h"
#include "netlists/ranking.h"
#include "netlists/reading.h"
#include "netlists/receptacle.h"
#include "netlists/settle.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_soft = 10e3;    // ohm from earth, from here on a common lead's capacitance may matter
constexpr double k_leakage = 0.1;  // of a reading: carried by conductance, it is leakage
constexpr double k_net_current = 10e-3;  // A, from here on a run's net current is worth a warning
constexpr double k_net_share = 0.05;     // of the largest current in the run

using Ports = std::map<std::pair<int, int>, Port>;

std::vector<bool> determined_nodes(const engine::SolvedNetwork& solved) {
  std::vector<bool> determined(static_cast<std::size_t>(solved.network().node_count), true);
  for (const int node : solved.undetermined()) determined[node] = false;
  return determined;
}

std::vector<double> magnitudes(const engine::SolvedNetwork& solved) {
  std::vector<double> volts;
  for (int node = 0; node < solved.network().node_count; ++node)
    volts.push_back(std::abs(solved.volts(node)));
  return volts;
}

void append(std::vector<Probe>& all, const std::vector<Probe>& more) {
  all.insert(all.end(), more.begin(), more.end());
}

bool stiff(const ConductorFindings& found) {
  return found.condition == Condition::grounded ||
         (found.condition == Condition::energised && !found.isolated_supply);
}

class Judge {
 public:
  Judge(const Building& building, const Lowered& lowered, const engine::SolvedNetwork& solved)
      : building_(building),
        lowered_(lowered),
        solved_(solved),
        determined_(determined_nodes(solved)),
        volts_(magnitudes(solved)),
        conditions_(conditions(lowered)),
        places_(building, lowered, conditions_),
        probes_(lowered, conditions_, places_, determined_),
        causes_(building, lowered, conditions_, solved) {}

  Findings judge() {
    Findings findings;
    findings.title = building_.title;
    findings.model_sha256 = building_.sha256;
    findings.frequency = building_.frequency;
    findings.states = lowered_.states;
    findings.assumptions = lowered_.assumptions;
    findings.residual = solved_.residual();
    findings.instruments = building_.instruments;
    for (std::size_t i = 0; i < lowered_.conductors.size(); ++i) findings.conductors.push_back(conductor(i));
    take_readings(findings.conductors);
    for (std::size_t i = 0; i < findings.conductors.size(); ++i) {
      set_misleads(findings.conductors[i]);
      findings.conductors[i].settle = settle(i, findings.conductors[i]);
    }
    findings.effects = effects(building_, lowered_, conditions_, solved_);
    findings.patterns = receptacle_patterns(building_, lowered_, solved_);
    findings.warnings = warnings(findings.conductors);
    rank(findings.conductors);
    findings.assumptions.emplace_back(
        "no draws are made: readings are those of the nominal case, ranked by that alone");
    return findings;
  }

 private:
  // ---- one conductor -----------------------------------------------------------------------------

  ConductorFindings conductor(std::size_t index) {
    const ConductorPath& path = lowered_.conductors[index];
    ConductorFindings found;
    found.id = path.id;
    found.condition = conditions_.of_conductor[index];
    found.not_predicted = path.near_drive;
    found.supply = conditions_.supply[index];
    found.isolated_supply =
        found.condition == Condition::energised && lowered_.floating_supplies.count(found.supply) > 0;
    for (const Access& access : path.access) {
      if (determined_[access.node]) found.places.push_back(place(index, access, found));
    }
    for (const PlaceFindings& at : found.places)
      found.leakage = found.leakage || (found.condition == Condition::floating && leaks(at));
    return found;
  }

  // A reading scales all that adds up to it alike: the share of conductance is that of the open circuit.
  // Of a voltage that looks dead the share means nothing: millivolts of a neutral's drop come by loss as
  // well.
  bool leaks(const PlaceFindings& at) const {
    Complex conductive = 0.0;
    Complex all = 0.0;
    for (const ContributionEntry& entry : at.contributions) {
      all += entry.volts;
      if (entry.path == "conductive") conductive += entry.volts;
    }
    return places_.appearance(std::abs(all), at.place) != Appearance::dead_like &&
           std::abs(conductive) > k_leakage * std::abs(all);
  }

  // Causes, and what will be probed; the readings follow once all probes are known.
  PlaceFindings place(std::size_t index, const Access& access, const ConductorFindings& owner) {
    PlaceFindings found;
    found.place = access.place;
    const Probe to_ground = probes_.to_ground(access);
    found.reference = to_ground.reference;
    std::vector<Probe> probes{to_ground};
    append(probes, probes_.to_neutral(index, access));
    if (!stiff(owner)) {
      found.contributions = causes_.contributions(access.node, to_ground.reference_node,
                                                  owner.isolated_supply ? owner.supply : "");
      append(probes, probes_.to_partners(index, access));
      append(probes, probes_.to_neighbour(index, access, found.contributions, volts_));
    }
    probed_.push_back(std::move(probes));
    return found;
  }

  // ---- readings ----------------------------------------------------------------------------------

  void take_readings(std::vector<ConductorFindings>& all) {
    const Ports ports = solve_ports();
    std::size_t next = 0;
    for (ConductorFindings& found : all) {
      for (PlaceFindings& at : found.places) {
        const std::vector<Probe>& probes = probed_[next++];
        const Port& port = ports.at({probes.front().node, probes.front().reference_node});
        at.open_circuit = port.volts;
        at.source_impedance = port.impedance;
        at.short_circuit = port.impedance == 0.0 ? 0.0 : std::abs(port.volts / port.impedance);
        for (const Probe& probe : probes) add_readings(at, probe, ports);
      }
    }
  }

  // Every pair of points that is probed, solved together, and the points of those that are not to ground by
  // themselves: an instrument's common lead has a capacitance to earth.
  Ports solve_ports() const {
    Ports ports;
    std::vector<std::pair<int, int>> apart;
    const auto want = [&](int a, int b) {
      if (ports.try_emplace({a, b}).second && a != b) apart.emplace_back(a, b);
    };
    for (const std::vector<Probe>& probes : probed_) {
      for (const Probe& probe : probes) {
        want(probe.node, probe.reference_node);
        if (probe.reference == probes.front().reference) continue;
        want(probe.node, 0);
        want(probe.reference_node, 0);
      }
    }
    const std::vector<Complex> impedances = solved_.source_impedances(apart);
    for (std::size_t i = 0; i < apart.size(); ++i)
      ports[apart[i]] = {solved_.volts(apart[i].first, apart[i].second), impedances[i]};
    return ports;
  }

  void add_readings(PlaceFindings& found, const Probe& probe, const Ports& ports) const {
    const Port& port = ports.at({probe.node, probe.reference_node});
    const bool to_ground = probe.reference == found.reference;
    const std::optional<PointPair> soft = to_ground ? std::nullopt : soft_pair(probe, ports);
    for (const InstrumentType& instrument : building_.instruments) {
      if (instrument.to_ground_only && !to_ground) continue;
      const bool three = soft && instrument.common_to_earth > 0.0;
      Reading reading = three ? read_soft(instrument, *soft, building_.frequency)
                              : read(instrument, port, building_.frequency);
      if (to_ground && !reading.indicator && instrument.common_to_earth > 0.0)
        reading.lead_in_air = read_lead_in_air(instrument, port, building_.frequency);
      reading.reference = probe.reference;
      reading.appearance = places_.appearance(reading.volts, found.place);
      reading.judged = probe.judged && !reading.indicator;
      found.readings.push_back(std::move(reading));
    }
  }

  // Both points with their impedances from earth, where neither is held by anything firmer than coupling.
  static std::optional<PointPair> soft_pair(const Probe& probe, const Ports& ports) {
    const Port& a = ports.at({probe.node, 0});
    const Port& b = ports.at({probe.reference_node, 0});
    if (std::abs(a.impedance) < k_soft || std::abs(b.impedance) < k_soft) return std::nullopt;
    const Complex between = ports.at({probe.node, probe.reference_node}).impedance;
    return PointPair{a.volts, b.volts, a.impedance, b.impedance, (a.impedance + b.impedance - between) / 2.0};
  }

  // ---- what settles it ---------------------------------------------------------------------------

  Settle settle(std::size_t index, const ConductorFindings& found) const {
    switch (found.condition) {
      case Condition::grounded:
        return settle_grounded();
      case Condition::through_load:
        return settle_through_load(conditions_.through[index]);
      case Condition::energised: {
        if (!found.isolated_supply) return settle_energised(found.supply);
        const Supply* supply = find_supply(building_, found.supply);
        return settle_isolated(found.supply, supply ? most_to_ground(building_, *supply) : 0.0);
      }
      case Condition::grounded_through_load:
      case Condition::floating:
        break;
    }
    if (found.leakage)
      return {
          std::nullopt, 0.0, 0.0,
          "leakage: conductance carries over a tenth of what it reads, so a real if weak source is in it; "
          "an instrument that loads hides it and proves nothing; treat as live until the leak is found"};
    return settle_coupling(worst_readings(found), weakest_source(found));
  }

  // What each voltmeter shows at most, over the places, and the resistance it then has.
  std::vector<CouplingReading> worst_readings(const ConductorFindings& found) const {
    std::vector<CouplingReading> worst;
    for (const InstrumentType& instrument : building_.instruments) {
      CouplingReading most;
      for (const PlaceFindings& at : found.places) {
        for (const Reading& reading : at.readings) {
          if (reading.instrument != instrument.name || reading.reference != at.reference || reading.indicator)
            continue;
          if (!most.instrument.empty() && reading.volts <= most.volts) continue;
          most = {instrument.name, resistance_in_force(instrument, reading), reading.volts};
        }
      }
      if (!most.instrument.empty()) worst.push_back(most);
    }
    return worst;
  }

  RealSource weakest_source(const ConductorFindings& found) const {
    RealSource source{0.0, 0.0, building_.limits.body_current};
    for (const PlaceFindings& at : found.places) {
      const double volts = places_.nominal(at.place).least_to_ground;
      const double live_like = places_.live_like(at.place);
      source.volts = source.volts == 0.0 ? volts : std::min(source.volts, volts);
      source.live_like = source.live_like == 0.0 ? live_like : std::min(source.live_like, live_like);
    }
    return source;
  }

  // ---- warnings ----------------------------------------------------------------------------------

  std::vector<std::string> warnings(const std::vector<ConductorFindings>& all) const {
    std::vector<std::string> found = lowered_.warnings;
    found.insert(found.end(), conditions_.warnings.begin(), conditions_.warnings.end());
    warn_of_untied_conductors(found);
    warn_of_places_without_ground(all, found);
    warn_of_net_currents(found);
    return found;
  }

  void warn_of_untied_conductors(std::vector<std::string>& warnings) const {
    for (const ConductorPath& path : lowered_.conductors) {
      for (const Access& access : path.access) {
        if (determined_[access.node]) continue;
        warnings.push_back(
            fmt::format("{} at {}: nothing in the model ties it to anything; no reading is predicted",
                        path.id, access.place));
      }
    }
  }

  static void warn_of_places_without_ground(const std::vector<ConductorFindings>& all,
                                            std::vector<std::string>& warnings) {
    std::set<std::string> places;
    for (const ConductorFindings& found : all) {
      for (const PlaceFindings& at : found.places) {
        if (at.reference == "earth") places.insert(at.place);
      }
    }
    for (const std::string& place : places) {
      warnings.push_back(
          fmt::format("place '{}' has no ground: readings there are to earth, which nobody can take "
                      "without a stake or a long lead",
                      place));
    }
  }

  void warn_of_net_currents(std::vector<std::string>& warnings) const {
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
                      "induces in other runs is not in the model and may lie anywhere from nothing to "
                      "several volts",
                      lowered_.line_runs[l], std::abs(net)));
    }
  }

  const Building& building_;
  const Lowered& lowered_;
  const engine::SolvedNetwork& solved_;
  std::vector<bool> determined_;  // by node
  std::vector<double> volts_;     // from earth, by node
  Conditions conditions_;
  Places places_;
  Probes probes_;
  Causes causes_;
  std::vector<std::vector<Probe>> probed_;  // of every place of every conductor, in order
};

}  // namespace

Findings judge(const Building& building, const Lowered& lowered, const engine::SolvedNetwork& solved) {
  return Judge(building, lowered, solved).judge();
}

}  // namespace netlists
