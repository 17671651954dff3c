#include "netlists/judge.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "netlists/causes.h"
#include "netlists/condition.h"
#include "netlists/effects.h"
#include "netlists/measure.h"
#include "netlists/places.h"
#include "netlists/probes.h"
#include "netlists/ranking.h"
#include "netlists/receptacle.h"
#include "netlists/settling.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_leakage = 0.1;        // of a reading: carried by conductance, it is leakage
constexpr double k_net_current = 10e-3;  // A, from here on a run's net current is worth a warning
constexpr double k_net_share = 0.05;     // of the largest current in the run

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
        settling_(building, conditions_, places_),
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
      findings.conductors[i].settle = settling_.settle(i, findings.conductors[i]);
    }
    findings.effects = effects(building_, lowered_, conditions_, solved_);
    findings.patterns = receptacle_patterns(building_, lowered_, solved_);
    findings.warnings = warnings(findings.conductors);
    rank(findings.conductors);
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
    std::vector<PlaceFindings> measured = measure(building_.instruments, probed_, solved_);
    std::size_t next = 0;
    for (ConductorFindings& found : all) {
      for (PlaceFindings& at : found.places) {
        PlaceFindings& here = measured[next++];
        at.open_circuit = here.open_circuit;
        at.source_impedance = here.source_impedance;
        at.short_circuit = here.short_circuit;
        at.readings = std::move(here.readings);
        for (Reading& reading : at.readings) reading.appearance = places_.appearance(reading.volts, at.place);
      }
    }
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
  Settling settling_;
  Causes causes_;
  std::vector<ProbedPlace> probed_;  // of every place of every conductor, in order
};

}  // namespace

Findings judge(const Building& building, const Lowered& lowered, const engine::SolvedNetwork& solved) {
  return Judge(building, lowered, solved).judge();
}

}  // namespace netlists
