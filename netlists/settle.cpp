#include "netlists/settle.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace netlists {
namespace {

constexpr double k_stand_in_for_p95 = 2.0;
constexpr double k_z95 = 1.6448536269514722;  // of the standard normal distribution

// What people can do where no instrument separates the two; none of it touches or shorts the conductor.
const char* const k_otherwise =
    "use a two-impedance voltage detector to every other conductor in the box; open and lock off the "
    "neighbours one at a time and see which one takes the reading with it; or load it through a resistor "
    "rated for the highest system voltage present, at least 10 kohm, with the detector left connected";

double resistance_of(const std::vector<CouplingReading>& readings, const std::string& instrument) {
  const auto found = std::find_if(readings.begin(), readings.end(), [&](const CouplingReading& reading) {
    return reading.instrument == instrument;
  });
  return found->resistance;
}

std::string why_it_settles(const Settle& settle, const std::vector<CouplingReading>& readings,
                           const RealSource& source) {
  const double shown =
      weakest_source_reading(source.volts, resistance_of(readings, *settle.instrument), source.body_current);
  const std::string coupling = settle.band
                                   ? fmt::format("{:.2g} V, in nine of ten cases {:.2g} V to {:.2g} V,",
                                                 settle.expect, settle.band->p05, settle.band->p95)
                                   : fmt::format("{:.2g} V", settle.expect);
  return fmt::format(
      "coupling alone leaves {} on '{}', the weakest source a person feels ({:.0f} V behind {:.0f} kohm) "
      "shows {:.3g} V: treat as live above {:.3g} V; a reading below it never proves the conductor dead",
      coupling, *settle.instrument, source.volts, source.volts / source.body_current / 1e3, shown,
      settle.treat_as_live_above);
}

}  // namespace

double weakest_source_reading(double nominal, double resistance, double body_current) {
  return nominal * resistance / (resistance + nominal / body_current);
}

double weakest_source_spread(const RealSource& source, double resistance) {
  const double behind = source.volts / source.body_current;
  const double share = behind / (resistance + behind);  // of the EMF that the instrument does not get
  // U and what stands behind it grow together, so a higher U shows by the rest alone.
  return std::hypot((1 - share) * source.supply_spread, share * source.resistance_spread,
                    source.reading_spread);
}

Settle settle_coupling(const std::vector<CouplingReading>& readings, const RealSource& source) {
  Settle settle;
  double best = 1.0;  // of the limit; more separates nothing
  for (const CouplingReading& reading : readings) {
    if (reading.resistance > source.volts / source.body_current) continue;
    const double shown = weakest_source_reading(source.volts, reading.resistance, source.body_current);
    const double spread = reading.band ? weakest_source_spread(source, reading.resistance) : 0.0;
    const double limit = std::min(shown * std::exp(-k_z95 * spread), source.live_like);
    const double coupling = reading.band ? reading.band->p95 : k_stand_in_for_p95 * reading.volts;
    if (limit <= 0 || !(coupling / limit <= best)) continue;
    best = coupling / limit;
    settle.instrument = reading.instrument;
    settle.expect = reading.volts;
    settle.band = reading.band;
    settle.treat_as_live_above = limit;
    if (spread > 0)
      settle.source_taken_for_coupling = std::erfc(std::log(shown / limit) / spread / std::sqrt(2.0)) / 2;
  }
  settle.why = settle.instrument ? why_it_settles(settle, readings, source)
                                 : std::string(
                                       "no instrument of this model tells coupling from a weak real "
                                       "source here: ") +
                                       k_otherwise;
  return settle;
}

Settle settle_through_load(const std::string& load) {
  Settle settle;
  settle.why = "fed through '" + load +
               "': a real source, whatever an instrument of low impedance shows; treat as live, find and "
               "open what feeds "
               "the load, and lock it off";
  return settle;
}

Settle settle_isolated(const std::string& supply, double line_volts) {
  Settle settle;
  settle.why = fmt::format(
      "fed by '{}', which has no grounded pole: no reading to ground settles it; measure from leg to leg "
      "({:.0f} V) with "
      "a proven two-pole detector, and treat as live till the supply is opened and locked off. While one leg "
      "is loaded "
      "to ground, by a meter or a person, the other stands at full voltage to ground",
      supply, line_volts);
  return settle;
}

Settle settle_energised(const std::string& supply) {
  Settle settle;
  settle.why = "energised from '" + supply + "' by the drawing: treat as live";
  return settle;
}

Settle settle_grounded() {
  Settle settle;
  settle.why = "joined to ground by the drawing, if the drawing is right; prove it like any other";
  return settle;
}

}  // namespace netlists
