#include "io/json_text.h"
#include "io/writers.h"

namespace io {
namespace {
using netlists::ConductorFindings;
using netlists::Findings;
using netlists::PlaceFindings;
using netlists::Reading;
using nlohmann::ordered_json;

/// Percentiles over the draws, null without; then their standard errors in the same order.
void add_percentiles(ordered_json& out, const std::optional<netlists::Band>& band, const std::string& where,
                     Numbers& number) {
  for (const char* key : {"p05", "p50", "p95"}) out[key] = nullptr;
  if (!band) return;
  out["p05"] = number.real(band->p05, where);
  out["p50"] = number.real(band->p50, where);
  out["p95"] = number.real(band->p95, where);
  out["standard_errors"] = {number.real(band->p05_error, where), number.real(band->p50_error, where),
                            number.real(band->p95_error, where)};
}

ordered_json optional_json(const std::optional<double>& value, const std::string& where, Numbers& number) {
  return value ? number.real(*value, where) : ordered_json(nullptr);
}

ordered_json reading_json(const Reading& reading, const std::string& where, Numbers& number) {
  ordered_json out;
  out["instrument"] = reading.instrument;
  out["reference"] = reading.reference;
  out["range_V"] = reading.range ? ordered_json(*reading.range) : ordered_json(nullptr);
  out["volts"] =
      number.real(reading.volts, where + ": reading of " + reading.instrument + " to " + reading.reference);
  add_percentiles(out, reading.band, where + ": percentiles of " + reading.instrument, number);
  out["appearance"] = netlists::to_string(reading.appearance);
  out["judged"] = reading.judged;
  if (!reading.on_ranges.empty()) {
    out["on_ranges"] = ordered_json::array();
    for (const auto& range : reading.on_ranges)
      out["on_ranges"].push_back({{"full_scale_V", range.full_scale}, {"volts", range.volts}});
  }
  if (reading.swapped) out["leads_swapped_volts"] = *reading.swapped;
  if (reading.lead_in_air) out["common_lead_in_air_volts"] = *reading.lead_in_air;
  if (reading.indicator) out["indicates"] = reading.indicates;
  return out;
}

ordered_json place_json(const PlaceFindings& place, const std::string& id, Numbers& number) {
  const std::string where = id + " at " + place.place;
  ordered_json out;
  out["place"] = place.place;
  ordered_json open{{"reference", place.reference}};
  open.update(number.phasor(place.open_circuit, "volts", where + ": open-circuit voltage"));
  add_percentiles(open, place.open_circuit_band, where + ": percentiles of the open circuit", number);
  out["open_circuit"] = open;
  out["source_impedance"] = number.phasor(place.source_impedance, "ohms", where + ": source impedance");
  if (place.source_impedance_band)
    add_percentiles(out["source_impedance"], place.source_impedance_band, where + ": source impedance",
                    number);
  out["short_circuit_A"] = number.real(place.short_circuit, where + ": short-circuit current");
  if (place.short_circuit_band) {
    ordered_json band;
    add_percentiles(band, place.short_circuit_band, where + ": short-circuit current", number);
    out["short_circuit_band_A"] = band;
  }
  out["readings"] = ordered_json::array();
  for (const Reading& reading : place.readings)
    out["readings"].push_back(reading_json(reading, where, number));
  out["contributions"] = ordered_json::array();
  for (const auto& entry : place.contributions) {
    ordered_json one{{"from", entry.from}, {"path", entry.path}};
    one.update(number.phasor(entry.volts, "volts", where + ": contribution of " + entry.from));
    out["contributions"].push_back(one);
  }
  return out;
}

ordered_json settle_json(const netlists::Settle& settle, const std::string& id, Numbers& number) {
  const bool settles = settle.instrument.has_value();
  ordered_json out;
  out["instrument"] = settles ? ordered_json(*settle.instrument) : ordered_json(nullptr);
  out["expect_V"] = settles ? number.real(settle.expect, id + ": expected reading") : ordered_json(nullptr);
  out["treat_as_live_above_V"] =
      settles ? number.real(settle.treat_as_live_above, id + ": limit from which to treat as live")
              : ordered_json(nullptr);
  if (settle.band) add_percentiles(out, settle.band, id + ": expected reading", number);
  out["coupling_taken_for_live"] = optional_json(settle.coupling_taken_for_live, id, number);
  out["source_taken_for_coupling"] = optional_json(settle.source_taken_for_coupling, id, number);
  out["why"] = settle.why;
  return out;
}

ordered_json conductor_json(const ConductorFindings& conductor, Numbers& number) {
  ordered_json out;
  out["id"] = conductor.id;
  out["rank"] = conductor.rank ? ordered_json(*conductor.rank) : ordered_json(nullptr);
  out["condition"] = netlists::to_string(conductor.condition);
  out["supply"] = conductor.supply.empty() ? ordered_json(nullptr) : ordered_json(conductor.supply);
  out["isolated_supply"] = conductor.isolated_supply;
  out["leakage"] = conductor.leakage;
  out["not_predicted"] = conductor.not_predicted;
  out["misleads"] = {{"how", netlists::to_string(conductor.misleads)},
                     {"probability", optional_json(conductor.probability, conductor.id, number)}};
  if (conductor.probability)
    out["misleads"]["standard_error"] = number.real(conductor.probability_error, conductor.id);
  out["expected_reading_V"] = number.real(conductor.expected_reading, conductor.id + ": expected reading");
  out["settle"] = settle_json(conductor.settle, conductor.id, number);
  out["moved_by"] = ordered_json::array();
  for (const auto& influence : conductor.influences)
    out["moved_by"].push_back(
        {{"quantity", influence.quantity},
         {"V_per_standard_deviation", number.real(influence.derivative, conductor.id + ": influence")},
         {"share_of_variance", number.real(influence.share, conductor.id + ": influence")}});
  out["places"] = ordered_json::array();
  for (const PlaceFindings& place : conductor.places)
    out["places"].push_back(place_json(place, conductor.id, number));
  return out;
}

/// Where no length decides, run_length_m is null; the margin is negative where it happens.
ordered_json effect_json(const netlists::Effect& effect, Numbers& number) {
  const std::string where = effect.what + " at " + effect.where;
  ordered_json out;
  out["what"] = effect.what;
  out["where"] = effect.where;
  out["subject"] = effect.subject;
  out["value"] = number.real(effect.value, where);
  out["threshold"] = number.real(effect.threshold, where + ": threshold");
  out["margin"] = number.real(effect.threshold - effect.value, where + ": margin");
  out["unit"] = effect.unit;
  out["source"] = effect.source;
  out["happens"] = effect.happens;
  out["run_length_m"] =
      effect.run_length ? number.real(*effect.run_length, where + ": run length") : ordered_json(nullptr);
  return out;
}

ordered_json pattern_json(const netlists::ReceptaclePattern& pattern, Numbers& number) {
  const std::string where = pattern.circuit + " at " + pattern.place + ": lamp of " + pattern.instrument;
  return {{"instrument", pattern.instrument},
          {"place", pattern.place},
          {"circuit", pattern.circuit},
          {"hot_neutral_V", number.real(pattern.hot_neutral, where)},
          {"hot_ground_V", number.real(pattern.hot_ground, where)},
          {"neutral_ground_V", number.real(pattern.neutral_ground, where)},
          {"lit", pattern.lit},
          {"meaning", pattern.meaning}};
}

/// What each reading was loaded with, so that anyone can compute it from the open circuit.
ordered_json instrument_json(const netlists::InstrumentType& instrument) {
  ordered_json out;
  out["name"] = instrument.name;
  out["label"] = instrument.label;
  out["indicator"] = instrument.kind == netlists::InstrumentKind::indicator;
  out["resistance_ohm"] = instrument.resistance;
  out["capacitance_F"] = instrument.capacitance;
  out["common_to_earth_F"] = instrument.common_to_earth;
  out["ranges"] = ordered_json::array();
  for (const auto& range : instrument.ranges)
    out["ranges"].push_back({{"full_scale_V", range.full_scale}, {"resistance_ohm", range.resistance}});
  return out;
}

}  // namespace

std::string findings_json(const Findings& findings) {
  Numbers number;
  ordered_json out;
  out["format"] = "idlewire-findings/1";
  out["program"] = {{"name", "idlewire"}, {"version", findings.program_version}};
  out["model"] = {{"title", findings.title}, {"sha256", findings.model_sha256}};
  out["frequency_Hz"] = findings.frequency;
  out["stage"] = findings.stage;
  out["draws"] = findings.draws;
  out["seed"] = findings.seed;
  out["residual"] = number.real(findings.residual, "the residual of the network solution");
  out["instruments"] = ordered_json::array();
  for (const auto& instrument : findings.instruments)
    out["instruments"].push_back(instrument_json(instrument));
  out["effects"] = ordered_json::array();
  for (const auto& effect : findings.effects) out["effects"].push_back(effect_json(effect, number));
  out["receptacle_patterns"] = ordered_json::array();
  for (const auto& pattern : findings.patterns)
    out["receptacle_patterns"].push_back(pattern_json(pattern, number));
  out["conductors"] = ordered_json::array();
  for (const ConductorFindings& conductor : findings.conductors)
    out["conductors"].push_back(conductor_json(conductor, number));
  out["states"] = findings.states;
  out["assumptions"] = findings.assumptions;
  out["warnings"] = findings.warnings;
  for (const std::string& warning : number.warnings()) out["warnings"].push_back(warning);
  out["caution"] = netlists::caution();
  return json_text(out);
}

}  // namespace io
