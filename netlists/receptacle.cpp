#include "netlists/receptacle.h"

#include <Eigen/LU>
#include <cmath>
#include <set>

#include "netlists/reading.h"
#include "netlists/wiring.h"

namespace netlists {
namespace {

using engine::Complex;

/// The three contacts of a receptacle.
struct Contacts {
  std::string place;
  std::string circuit;
  int hot = 0;  // nodes
  int neutral = 0;
  int ground = 0;
};

const Access* reached_at(const Lowered& lowered, const std::string& wire, const std::string& place) {
  for (const ConductorPath& path : lowered.conductors) {
    if (path.wire != wire) continue;
    for (const Access& access : path.access) {
      if (access.place == place) return &access;
    }
  }
  return nullptr;
}

bool is_panel(const Building& building, const std::string& place) {
  for (const Panel& panel : building.panels) {
    if (panel.name.text == place) return true;
  }
  return false;
}

// The first line of a circuit at a place is its hot.
std::vector<Contacts> contacts(const Building& building, const Lowered& lowered) {
  std::vector<Contacts> found;
  std::set<std::pair<std::string, std::string>> seen;  // circuit, place
  for (const ConductorPath& path : lowered.conductors) {
    if (path.ground || path.circuit.empty() || path.neutral.empty()) continue;
    for (const Access& access : path.access) {
      const auto ground = lowered.at.find("ground@" + access.place);
      const Access* neutral = reached_at(lowered, path.neutral, access.place);
      if (!neutral || ground == lowered.at.end() || is_panel(building, access.place)) continue;
      if (!seen.insert({path.circuit, access.place}).second) continue;
      found.push_back({access.place, path.circuit, access.node, neutral->node, ground->second});
    }
  }
  return found;
}

ReceptaclePattern pattern_at(const Contacts& at, const InstrumentType& tester, double frequency,
                             const engine::SolvedNetwork& solved) {
  const std::vector<std::pair<int, int>> pairs{
      {at.hot, at.ground}, {at.neutral, at.ground}, {at.hot, at.neutral}};
  const std::vector<Complex> z = solved.source_impedances(pairs);
  const Complex mutual = (z[0] + z[1] - z[2]) / 2.0;
  Eigen::Matrix2cd impedance;
  impedance << z[0], mutual, mutual, z[1];
  const Complex lamp = 1.0 / input_impedance(tester, tester.resistance, frequency);
  Eigen::Matrix2cd load;
  load << 2.0 * lamp, -lamp, -lamp, 2.0 * lamp;
  const Eigen::Vector2cd open(solved.volts(at.hot, at.ground), solved.volts(at.neutral, at.ground));
  const Eigen::Vector2cd volts = (Eigen::Matrix2cd::Identity() + impedance * load).inverse() * open;
  ReceptaclePattern pattern{tester.name,        at.place,           at.circuit, std::abs(volts(0) - volts(1)),
                            std::abs(volts(0)), std::abs(volts(1)), "",         ""};
  name_pattern(pattern, tester.threshold);
  return pattern;
}

}  // namespace

void name_pattern(ReceptaclePattern& pattern, double threshold) {
  const bool hn = pattern.hot_neutral >= threshold;
  const bool hg = pattern.hot_ground >= threshold;
  const bool ng = pattern.neutral_ground >= threshold;
  pattern.lit.clear();
  for (const auto& [on, name] : {std::pair{hn, "L-N"}, std::pair{hg, "L-G"}, std::pair{ng, "N-G"}}) {
    if (on) pattern.lit += (pattern.lit.empty() ? "" : ", ") + std::string(name);
  }
  if (pattern.lit.empty()) pattern.lit = "none";
  pattern.meaning = hn && hg && ng ? "no pattern of one fault"
                    : hn && hg     ? "wired as it should be, or neutral and ground swapped"
                    : hn && ng     ? "hot and neutral reversed"
                    : hg && ng     ? "hot and ground reversed"
                    : hn           ? "open ground"
                    : hg           ? "open neutral"
                    : ng           ? "hot on the neutral, hot open"
                                   : "open hot, or dead, or lamps that see too little: proves nothing";
}

std::vector<ReceptaclePattern> receptacle_patterns(const Building& building, const Lowered& lowered,
                                                   const engine::SolvedNetwork& solved) {
  std::vector<ReceptaclePattern> patterns;
  const std::set<int> unknown(solved.undetermined().begin(), solved.undetermined().end());
  for (const InstrumentType& tester : building.instruments) {
    if (!tester.three_lamps) continue;
    for (const Contacts& at : contacts(building, lowered)) {
      const bool apart = at.hot != at.neutral && at.hot != at.ground && at.neutral != at.ground;
      if (!apart || unknown.count(at.hot) || unknown.count(at.neutral) || unknown.count(at.ground)) continue;
      patterns.push_back(pattern_at(at, tester, building.frequency, solved));
    }
  }
  return patterns;
}

}  // namespace netlists
