#include "netlists/settling.h"

#include <algorithm>

#include "netlists/plan.h"
#include "netlists/reading.h"
#include "netlists/uncertain.h"

namespace netlists {

Settle Settling::settle(std::size_t index, const ConductorFindings& found) const {
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
  if (found.leakage) {
    Settle settle;
    settle.why =
        "leakage: conductance carries over a tenth of what it reads, so a real if weak source is in it; "
        "an instrument that loads hides it and proves nothing; treat as live until the leak is found";
    return settle;
  }
  return settle_coupling(worst_readings(found), weakest_source(found));
}

// What each voltmeter shows at most, over the places, and the resistance it then has.
std::vector<CouplingReading> Settling::worst_readings(const ConductorFindings& found) const {
  std::vector<CouplingReading> worst;
  for (const InstrumentType& instrument : building_.instruments) {
    CouplingReading most;
    for (const PlaceFindings& at : found.places) {
      for (const Reading& reading : at.readings) {
        if (reading.instrument != instrument.name || reading.reference != at.reference || reading.indicator)
          continue;
        const auto weight = [](double volts, const std::optional<Band>& band) {
          return band ? band->p95 : volts;
        };
        if (!most.instrument.empty() && weight(reading.volts, reading.band) <= weight(most.volts, most.band))
          continue;
        most = {instrument.name, resistance_in_force(instrument, reading), reading.volts, reading.band};
      }
    }
    if (!most.instrument.empty()) worst.push_back(most);
  }
  return worst;
}

RealSource Settling::weakest_source(const ConductorFindings& found) const {
  RealSource source{0.0,
                    0.0,
                    building_.limits.body_current,
                    supply_spread(building_.frequency).sigma(),
                    instrument_resistance_spread().sigma(),
                    instrument_reading_spread().sigma()};
  for (const PlaceFindings& at : found.places) {
    const double volts = places_.nominal(at.place).least_to_ground;
    const double live_like = places_.live_like(at.place);
    source.volts = source.volts == 0.0 ? volts : std::min(source.volts, volts);
    source.live_like = source.live_like == 0.0 ? live_like : std::min(source.live_like, live_like);
  }
  return source;
}

}  // namespace netlists
