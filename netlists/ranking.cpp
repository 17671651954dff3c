#include "netlists/ranking.h"

#include <algorithm>

namespace netlists {
namespace {

int group(const ConductorFindings& found) {
  switch (found.misleads) {
    case Misleads::false_dead:
      return 0;
    case Misleads::false_live:
      return 1;
    case Misleads::no:
      break;
  }
  return 2;
}

}  // namespace

bool fed(Condition condition) {
  return condition == Condition::energised || condition == Condition::through_load;
}

void set_misleads(ConductorFindings& found) {
  const bool live = fed(found.condition);
  const Appearance contradicts = live ? Appearance::dead_like : Appearance::live_like;
  found.misleads = Misleads::no;
  found.expected_reading = 0.0;
  for (const PlaceFindings& place : found.places) {
    for (const Reading& reading : place.readings) {
      if (!reading.judged) continue;
      found.expected_reading = std::max(found.expected_reading, reading.volts);
      if (reading.appearance == contradicts)
        found.misleads = live ? Misleads::false_dead : Misleads::false_live;
    }
  }
}

void rank(std::vector<ConductorFindings>& all) {
  std::stable_sort(all.begin(), all.end(), [](const ConductorFindings& a, const ConductorFindings& b) {
    if (group(a) != group(b)) return group(a) < group(b);
    if (a.misleads == Misleads::no) return false;
    if (a.probability.value_or(0.0) != b.probability.value_or(0.0))
      return a.probability.value_or(0.0) > b.probability.value_or(0.0);
    return a.expected_reading > b.expected_reading;
  });
  int next = 1;
  for (ConductorFindings& found : all) {
    found.rank.reset();
    if (found.misleads != Misleads::no) found.rank = next++;
  }
}

}  // namespace netlists
