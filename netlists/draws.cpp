#include "netlists/draws.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <utility>

#include "engine/solve.h"
#include "netlists/condition.h"
#include "netlists/drawn_network.h"
#include "netlists/measure.h"
#include "netlists/meter.h"
#include "netlists/parallel.h"
#include "netlists/places.h"
#include "netlists/ranking.h"
#include "netlists/wiring.h"

namespace netlists {
namespace {

/// One place of one conductor as the nominal findings have it.
struct Target {
  std::string conductor;
  std::string place;
  std::vector<std::pair<std::string, bool>> references;  // and whether readings to it are judged
  double live_like = 0.0;                                // V, from here on
  double dead_like = 0.0;                                // V, below it
};

/// What one draw gives: the numbers of each target in turn, and how each conductor misleads.
struct Outcome {
  std::vector<double> open_circuit;      // V, by target
  std::vector<double> source_impedance;  // ohm, by target
  std::vector<double> short_circuit;     // A, by target
  std::vector<double> readings;          // V, target by target
  std::vector<Misleads> misleads;        // by conductor of the findings
};

}  // namespace

Band band_of(std::vector<double> values) {
  std::erase_if(values, [](double value) { return !std::isfinite(value); });
  Band band;
  if (values.empty()) return band;
  std::sort(values.begin(), values.end());
  const auto n = static_cast<double>(values.size());
  // Between order statistics linearly, the k-th of n standing at (k - 1/2) / n (Hazen 1914).
  const auto at = [&](double place) {
    const double k = std::clamp(place - 0.5, 0.0, n - 1);
    const auto below = static_cast<std::size_t>(k);
    const std::size_t above = std::min(below + 1, values.size() - 1);
    return values[below] + (k - static_cast<double>(below)) * (values[above] - values[below]);
  };
  const auto percentile = [&](double p, double& value, double& error) {
    const double spread = std::sqrt(n * p * (1 - p));
    value = at(n * p);
    error = (at(n * p + spread) - at(n * p - spread)) / 2;
  };
  percentile(0.05, band.p05, band.p05_error);
  percentile(0.50, band.p50, band.p50_error);
  percentile(0.95, band.p95, band.p95_error);
  return band;
}

struct Draws::Impl {
  const Building& staged;
  unsigned seed;
  int threads;
  std::shared_ptr<SectionCache> cache;
  Wiring wires;
  SectionLibrary library;
  Lowered base;  // with unlisted loads
  SectionBank bank;
  Uncertain all;
  NetworkDrawer drawer;
  std::vector<Target> targets;
  std::vector<std::size_t> first_target;        // of each conductor of the findings, and the end
  std::vector<Condition> nominal_condition;     // of each
  std::map<std::string, std::size_t> number;    // of each, by id
  std::vector<std::string> conductors;          // ids, of each
  std::vector<std::size_t> first_reading;       // of each target, in Outcome::readings
  std::map<std::string, StateLowering> states;  // by the characters of DrawnValues::states
  std::vector<Outcome> outcomes;
  Eigen::MatrixXd points;  // of all draws made
  bool conditions_vary = false;

  Impl(const Building& building, const Lowered& lowered, const Findings& nominal, unsigned s, int t,
       std::shared_ptr<SectionCache> sections)
      : staged(building),
        seed(s),
        threads(t),
        cache(sections ? std::move(sections) : std::make_shared<SectionCache>()),
        wires(wiring(building)),
        library(building, wires, s, cache),
        base(lower_staged(building, {s, cache, true})),
        bank(building, library, base.line_stretches, clearances(building), t),
        all(netlists::uncertain(building, base, bank.insulations())),
        drawer(building, all, bank, library, s) {
    add_targets(nominal, lowered);
    conditions_vary = std::any_of(all.quantities.begin(), all.quantities.end(), [](const Quantity& quantity) {
      return quantity.kind == Quantity::Kind::state || quantity.kind == Quantity::Kind::unlisted_load;
    });
  }

  static std::pair<double, double> clearances(const Building& building) {
    return building.uncertainty.clearance.value_or(k_usual_clearance);
  }

  void add_targets(const Findings& nominal, const Lowered& lowered) {
    const Conditions found = conditions(lowered);
    const Places places(staged, lowered, found);
    for (const ConductorFindings& conductor : nominal.conductors) {
      first_target.push_back(targets.size());
      nominal_condition.push_back(conductor.condition);
      number[conductor.id] = conductors.size();
      conductors.push_back(conductor.id);
      for (const PlaceFindings& at : conductor.places) {
        Target target{
            conductor.id, at.place, {{at.reference, true}}, places.live_like(at.place), places.dead_like()};
        for (const Reading& reading : at.readings)
          if (target.references.back().first != reading.reference)
            target.references.emplace_back(reading.reference,
                                           reading.judged || judged_by_another(at, reading));
        targets.push_back(std::move(target));
      }
    }
    first_target.push_back(targets.size());
    std::size_t next = 0;
    for (const ConductorFindings& conductor : nominal.conductors)
      for (const PlaceFindings& at : conductor.places) {
        first_reading.push_back(next);
        next += at.readings.size();
      }
  }

  // An indicator's reading is never judged; the probe it belongs to may be.
  static bool judged_by_another(const PlaceFindings& at, const Reading& reading) {
    return std::any_of(at.readings.begin(), at.readings.end(), [&](const Reading& other) {
      return other.reference == reading.reference && other.judged;
    });
  }

  const StateLowering& lowering_in(const std::string& key) const { return states.at(key); }

  void add_state(const std::string& key) {
    const auto [at, fresh] = states.try_emplace(key);
    if (!fresh) return;
    StateLowering& state = at->second;
    state.lowered = key.empty() ? base : lower_staged(in_states(staged, all, key), {seed, cache, true});
    for (std::size_t c = 0; c < state.lowered.conductors.size(); ++c)
      state.conductor[state.lowered.conductors[c].id] = c;
  }

  std::vector<ProbedPlace> probes_in(const Lowered& lowered) const {
    const auto node = [&](const std::string& name, const std::string& place) {
      return name == "earth" ? 0 : lowered.at.at(name + "@" + place);
    };
    std::vector<ProbedPlace> probed;
    for (const Target& target : targets) {
      ProbedPlace& probes = probed.emplace_back();
      for (const auto& [reference, judged] : target.references)
        probes.push_back(
            {node(target.conductor, target.place), node(reference, target.place), reference, judged});
    }
    return probed;
  }

  std::vector<InstrumentType> instruments(const DrawnValues& values) const {
    std::vector<InstrumentType> drawn = staged.instruments;
    for (InstrumentType& instrument : drawn) {
      const double factor = values.value(Quantity::Kind::instrument_resistance, instrument.name, 1.0);
      instrument.resistance *= factor;
      for (InstrumentRange& range : instrument.ranges) range.resistance *= factor;
    }
    return drawn;
  }

  Outcome outcome(const DrawnValues& values, int draw) const {
    const StateLowering& state = lowering_in(values.states());
    const engine::SolvedNetwork solved(drawer.network(state.lowered, values, draw));
    std::vector<PlaceFindings> measured = measure(instruments(values), probes_in(state.lowered), solved);
    Outcome out;
    for (PlaceFindings& at : measured) {
      out.open_circuit.push_back(std::abs(at.open_circuit));
      out.source_impedance.push_back(std::abs(at.source_impedance));
      out.short_circuit.push_back(at.short_circuit);
      for (Reading& reading : at.readings) {
        reading.volts *= values.value(Quantity::Kind::instrument_reading, reading.instrument, 1.0);
        out.readings.push_back(reading.volts);
      }
    }
    out.misleads = how_each_misleads(state, values, measured);
    return out;
  }

  std::vector<Misleads> how_each_misleads(const StateLowering& state, const DrawnValues& values,
                                          const std::vector<PlaceFindings>& measured) const {
    std::vector<Condition> now = nominal_condition;
    if (conditions_vary) {
      const Conditions found = conditions(drawer.with_loads(state.lowered, values));
      for (std::size_t c = 0; c < now.size(); ++c)
        now[c] = found.of_conductor[state.conductor.at(conductors[c])];
    }
    std::vector<Misleads> how(now.size(), Misleads::no);
    for (std::size_t c = 0; c < now.size(); ++c)
      for (std::size_t t = first_target[c]; t < first_target[c + 1]; ++t)
        for (const Reading& reading : measured[t].readings) {
          if (!reading.judged) continue;
          if (fed(now[c]) && reading.volts < targets[t].dead_like) how[c] = Misleads::false_dead;
          if (!fed(now[c]) && reading.volts >= targets[t].live_like) how[c] = Misleads::false_live;
        }
    return how;
  }

  void make(int count) {
    const int before = static_cast<int>(outcomes.size());
    if (count <= before) return;
    points = sample_points(count, static_cast<int>(all.quantities.size()), seed);
    for (int draw = before; draw < count; ++draw) add_state(DrawnValues(all, points.row(draw)).states());
    outcomes.resize(count);
    meter().begin("draws", count - before);
    in_parallel(count - before, threads, [&](int i) {
      const int draw = before + i;
      outcomes[draw] = outcome(DrawnValues(all, points.row(draw)), draw);
      meter().step();
    });
  }

  Band band(const std::vector<double> Outcome::*list, std::size_t index) const {
    std::vector<double> values;
    values.reserve(outcomes.size());
    for (const Outcome& outcome : outcomes) values.push_back((outcome.*list)[index]);
    return band_of(std::move(values));
  }

  bool over_limit(const ConductorFindings& found, const Outcome& outcome) const {
    const std::size_t first = first_target[number.at(found.id)];
    for (std::size_t p = 0; p < found.places.size(); ++p) {
      const PlaceFindings& at = found.places[p];
      for (std::size_t r = 0; r < at.readings.size(); ++r)
        if (at.readings[r].instrument == *found.settle.instrument &&
            at.readings[r].reference == at.reference &&
            outcome.readings[first_reading[first + p] + r] > found.settle.treat_as_live_above)
          return true;
    }
    return false;
  }

  double share(std::size_t conductor, Misleads how) const {
    const auto hits = std::count_if(outcomes.begin(), outcomes.end(), [&](const Outcome& outcome) {
      return outcome.misleads[conductor] == how;
    });
    return static_cast<double>(hits) / static_cast<double>(outcomes.size());
  }

  void fill(ConductorFindings& found) const {
    const std::size_t conductor = number.at(found.id);
    for (std::size_t p = 0; p < found.places.size(); ++p) {
      const std::size_t target = first_target[conductor] + p;
      PlaceFindings& at = found.places[p];
      at.open_circuit_band = band(&Outcome::open_circuit, target);
      at.source_impedance_band = band(&Outcome::source_impedance, target);
      at.short_circuit_band = band(&Outcome::short_circuit, target);
      for (std::size_t r = 0; r < at.readings.size(); ++r)
        at.readings[r].band = band(&Outcome::readings, first_reading[target] + r);
    }
    judge_by_draws(found, share(conductor, Misleads::false_dead), share(conductor, Misleads::false_live));
  }

  // The worse of the two comes first where both can happen, as with a breaker that may be on or off.
  void judge_by_draws(ConductorFindings& found, double dead, double live) const {
    if (dead >= k_worth_a_rank) {
      found.misleads = Misleads::false_dead;
    } else if (live >= k_worth_a_rank && found.misleads == Misleads::no) {
      found.misleads = Misleads::false_live;
    }
    const double chance = found.misleads == Misleads::false_dead   ? dead
                          : found.misleads == Misleads::false_live ? live
                                                                   : dead + live;
    found.probability = chance;
    found.probability_error = std::sqrt(chance * (1 - chance) / static_cast<double>(outcomes.size()));
  }
};

Draws::Draws(const Building& staged, const Lowered& lowered, const Findings& nominal, unsigned seed,
             int threads, std::shared_ptr<SectionCache> sections)
    : impl_(std::make_unique<Impl>(staged, lowered, nominal, seed, threads, std::move(sections))) {}
Draws::~Draws() = default;

void Draws::make(int count) { impl_->make(count); }
int Draws::count() const { return static_cast<int>(impl_->outcomes.size()); }
const Uncertain& Draws::uncertain() const { return impl_->all; }
const SectionBank& Draws::bank() const { return impl_->bank; }

void Draws::fill(Findings& findings) const {
  findings.draws = count();
  if (count() == 0) return;
  for (ConductorFindings& found : findings.conductors) impl_->fill(found);
}

void Draws::add_wrong_calls(ConductorFindings& found) const {
  if (!found.settle.instrument || count() == 0) return;
  int over = 0;
  for (const Outcome& outcome : impl_->outcomes) over += impl_->over_limit(found, outcome) ? 1 : 0;
  found.settle.coupling_taken_for_live = static_cast<double>(over) / count();
}

std::vector<double> Draws::readings(const ConductorFindings& found, const PlaceFindings& at,
                                    const Reading& reading) const {
  const std::size_t target =
      impl_->first_target[impl_->number.at(found.id)] + static_cast<std::size_t>(&at - found.places.data());
  const std::size_t index =
      impl_->first_reading[target] + static_cast<std::size_t>(&reading - at.readings.data());
  std::vector<double> values;
  for (const Outcome& outcome : impl_->outcomes) values.push_back(outcome.readings[index]);
  return values;
}

std::vector<bool> Draws::there(int quantity) const {
  std::vector<bool> out;
  for (int draw = 0; draw < count(); ++draw)
    out.push_back(DrawnValues(impl_->all, impl_->points.row(draw)).value(quantity) > 0.5);
  return out;
}

std::string Draws::root_supply_of(const std::string& supply) const {
  const int root = impl_->drawer.root_supply_of(supply);
  return root < 0 ? "" : impl_->staged.supplies[root].name.text;
}

engine::Network Draws::network(int draw) const {
  const Eigen::MatrixXd points =
      sample_points(draw + 1, static_cast<int>(impl_->all.quantities.size()), impl_->seed);
  const DrawnValues values(impl_->all, points.row(draw));
  impl_->add_state(values.states());
  return impl_->drawer.network(impl_->lowering_in(values.states()).lowered, values, draw);
}

}  // namespace netlists
