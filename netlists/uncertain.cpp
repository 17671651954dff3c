#include "netlists/uncertain.h"

#include <fmt/format.h>

#include <algorithm>
#include <boost/math/distributions/normal.hpp>
#include <boost/random/sobol.hpp>
#include <cmath>
#include <numbers>
#include <set>
#include <utility>

#include "netlists/plan.h"

namespace netlists {
namespace {

constexpr double k_z95 = 1.6448536269514722;  // of the standard normal distribution
constexpr double k_nearest_to_end = 1e-9;     // no quantile is asked for nearer to 0 or 1
constexpr int k_sobol_dimensions = 3667;      // of the tables of Joe and Kuo in Boost

// Spreads where the model gives none; p05 and p95.
constexpr std::pair<double, double> k_thickness{0.9, 1.1};  // of the nominal
constexpr double k_instrument_resistance = 0.05;
constexpr double k_instrument_reading = 0.02;
constexpr double k_unlisted_load = 0.7;

double score(double u) {
  return boost::math::quantile(boost::math::normal_distribution<double>(),
                               std::clamp(u, k_nearest_to_end, 1 - k_nearest_to_end));
}

Spread around_one(double tolerance) { return {Spread::Shape::lognormal, 1 - tolerance, 1.0, 1 + tolerance}; }

class Collector {
 public:
  Collector(const Building& building, const Lowered& lowered, const std::vector<Insulation>& insulations)
      : building_(building), lowered_(lowered) {
    out_.insulations = insulations;
  }

  Uncertain collect() {
    add_supplies();
    add_runs();
    add_insulations();
    add_instruments();
    add_unlisted_loads();
    for (const Name& setting : building_.uncertainty.may_vary)
      add(Quantity::Kind::state, "state of " + setting.text, setting.text, -1,
          {Spread::Shape::chance, 0.0, 0.5, 1.0});
    return std::move(out_);
  }

 private:
  void add(Quantity::Kind kind, std::string name, std::string target, int index, const Spread& spread) {
    out_.quantities.push_back({kind, std::move(name), std::move(target), index, spread});
  }

  void assume(const std::string& text) { out_.assumptions.push_back(text); }

  void add_supplies() {
    for (std::size_t s = 0; s < building_.supplies.size(); ++s) {
      const Supply& supply = building_.supplies[s];
      if (supply.fed_from) continue;
      add(Quantity::Kind::supply_volts, "voltage of " + supply.name.text, supply.name.text, -1,
          supply_spread(building_.frequency));
      if (s > 0 && !supply.angle)
        add(Quantity::Kind::supply_angle, "phase of " + supply.name.text, supply.name.text, -1,
            {Spread::Shape::uniform, 0.0, std::numbers::pi, 2 * std::numbers::pi});
    }
    assume(fmt::format("draws: supply voltages within {:.0f} % in nine of ten cases",
                       100 * (supply_spread(building_.frequency).high - 1)));
  }

  bool in_use(int run) const {
    return std::any_of(
        lowered_.line_stretches.begin(), lowered_.line_stretches.end(), [&](const Stretch& stretch) {
          return std::find(stretch.runs.begin(), stretch.runs.end(), run) != stretch.runs.end();
        });
  }

  void add_runs() {
    const Uncertainty& given = building_.uncertainty;
    const double spread = given.length_spread;
    const auto [near, far] = given.clearance.value_or(k_usual_clearance);
    const auto [shortest, longest] = given.wander_length;
    for (std::size_t r = 0; r < building_.runs.size(); ++r) {
      const Run& run = building_.runs[r];
      const int index = static_cast<int>(r);
      if (!in_use(index)) continue;
      if (spread > 0)
        add(Quantity::Kind::length, "length of " + run.name.text, "", index,
            {Spread::Shape::lognormal, 1 - spread, 1.0, 1 + spread});
      if (!run.clearance)
        add(Quantity::Kind::clearance, "clearance of " + run.name.text, "", index,
            {Spread::Shape::log_uniform, near, std::sqrt(near * far), far});
      if (run.layout.empty())
        add(Quantity::Kind::wander, "wander length in " + run.name.text, "", index,
            {Spread::Shape::log_uniform, shortest, std::sqrt(shortest * longest), longest});
    }
    if (spread > 0)
      assume(fmt::format("draws: run lengths within {:.0f} % in nine of ten cases", 100 * spread));
    assume(fmt::format("draws: clearances that the model does not give between {:.3g} m and {:.3g} m", near,
                       far));
    assume(fmt::format("draws: conductors change places every {:.2g} m to {:.2g} m", shortest, longest));
  }

  void add_insulations() {
    std::set<std::string> coated;
    for (std::size_t i = 0; i < out_.insulations.size(); ++i) {
      const Insulation& insulation = out_.insulations[i];
      const Material& material = building_.catalogue.materials.at(insulation.material);
      out_.permittivities.push_back(material.permittivity);
      double low = material.permittivity_low;
      double high = material.permittivity_high;
      const auto given = building_.uncertainty.permittivity.find(insulation.material);
      if (given != building_.uncertainty.permittivity.end()) std::tie(low, high) = given->second;
      if (low < high)
        add(Quantity::Kind::permittivity,
            fmt::format("permittivity of {} of {}", insulation.material, insulation.owner), "",
            static_cast<int>(i),
            {Spread::Shape::lognormal, low, std::clamp(material.permittivity, low, high), high});
      if (building_.catalogue.wires.count(insulation.owner)) coated.insert(insulation.owner);
    }
    for (const std::string& type : coated)
      add(Quantity::Kind::thickness, "insulation thickness of " + type, type, -1,
          {Spread::Shape::lognormal, k_thickness.first, 1.0, k_thickness.second});
    assume(
        "draws: permittivities over the range of each material, one value for all wires of a type; "
        "insulation within 10 % of its thickness in nine of ten cases");
  }

  void add_instruments() {
    for (const InstrumentType& instrument : building_.instruments) {
      add(Quantity::Kind::instrument_resistance, "resistance of " + instrument.name, instrument.name, -1,
          instrument_resistance_spread());
      add(Quantity::Kind::instrument_reading, "calibration of " + instrument.name, instrument.name, -1,
          instrument_reading_spread());
    }
    assume(
        "draws: instruments within 5 % of their resistance and 2 % of what they show in nine of ten cases "
        "(common practice)");
  }

  void add_unlisted_loads() {
    const double chance = building_.uncertainty.unlisted_load.value_or(k_unlisted_load);
    std::set<std::string> circuits;
    for (const UnlistedLoad& load : lowered_.unlisted_loads) circuits.insert(load.circuit);
    for (const std::string& circuit : circuits)
      add(Quantity::Kind::unlisted_load, "a load on " + circuit + " that the model does not list", circuit,
          -1, {Spread::Shape::chance, 0.0, chance, 1.0});
    if (!circuits.empty())
      assume(
          fmt::format("draws: where a circuit lists no loads, one of 10 W to 1 kW is there with a "
                      "probability of {:.2g}",
                      chance));
  }

  const Building& building_;
  const Lowered& lowered_;
  Uncertain out_;
};

}  // namespace

// ANSI C84.1, range A: 5 %; EN 50160 and IEC 60038: 10 %; from memory.
Spread supply_spread(double frequency) { return around_one(frequency > 55.0 ? 0.05 : 0.10); }
Spread instrument_resistance_spread() { return around_one(k_instrument_resistance); }
Spread instrument_reading_spread() { return around_one(k_instrument_reading); }

double Spread::quantile(double u) const {
  switch (shape) {
    case Shape::lognormal: {
      const double z = score(u);
      return mid * std::pow(z < 0 ? mid / low : high / mid, z / k_z95);
    }
    case Shape::log_uniform:
      return low * std::pow(high / low, (u - 0.05) / 0.9);
    case Shape::uniform:
      return low + (high - low) * u;
    case Shape::chance:
      return u < mid ? 1.0 : 0.0;
  }
  return mid;
}

double Spread::sigma() const {
  const double density = 1 / std::sqrt(2 * std::numbers::pi);  // of the standard normal at 0
  switch (shape) {
    case Shape::lognormal:
      return mid * std::log(high / low) / (2 * k_z95);
    case Shape::log_uniform:
      return mid * std::log(high / low) / 0.9 * density;
    case Shape::uniform:
      return (high - low) * density;
    case Shape::chance:
      break;
  }
  return 0.0;
}

int Uncertain::find(Quantity::Kind kind, const std::string& target) const {
  for (std::size_t q = 0; q < quantities.size(); ++q)
    if (quantities[q].kind == kind && quantities[q].target == target) return static_cast<int>(q);
  return -1;
}

int Uncertain::find(Quantity::Kind kind, int index) const {
  for (std::size_t q = 0; q < quantities.size(); ++q)
    if (quantities[q].kind == kind && quantities[q].index == index) return static_cast<int>(q);
  return -1;
}

Uncertain uncertain(const Building& staged, const Lowered& lowered,
                    const std::vector<Insulation>& insulations) {
  return Collector(staged, lowered, insulations).collect();
}

std::uint64_t mixed(std::uint64_t seed, std::uint64_t draw, std::uint64_t stream) {
  // The finaliser of splitmix64 (Steele, Lea and Flood 2014), over each part in turn.
  std::uint64_t state = 0;
  for (const std::uint64_t part : {seed, draw, stream}) {
    state = (state ^ part) + 0x9E3779B97F4A7C15ull;
    state = (state ^ (state >> 30)) * 0xBF58476D1CE4E5B9ull;
    state = (state ^ (state >> 27)) * 0x94D049BB133111EBull;
    state ^= state >> 31;
  }
  return state;
}

Eigen::MatrixXd sample_points(int count, int dimensions, unsigned seed) {
  constexpr double k_to_unit = 0x1p-53;
  const auto unit = [&](std::uint64_t bits) { return (static_cast<double>(bits >> 11) + 0.5) * k_to_unit; };
  Eigen::MatrixXd points(count, dimensions);
  const int sobol = std::min(dimensions, k_sobol_dimensions);
  if (sobol > 0) {
    boost::random::sobol engine(static_cast<std::size_t>(sobol));
    std::vector<double> shift;
    for (int d = 0; d < sobol; ++d) shift.push_back(unit(mixed(seed, ~0ull, static_cast<std::uint64_t>(d))));
    for (int k = 0; k < count; ++k)
      for (int d = 0; d < sobol; ++d) {
        const double shifted = unit(engine()) + shift[d];
        points(k, d) = shifted < 1 ? shifted : shifted - 1;
      }
  }
  for (int d = sobol; d < dimensions; ++d)
    for (int k = 0; k < count; ++k)
      points(k, d) = unit(mixed(seed, static_cast<std::uint64_t>(k), static_cast<std::uint64_t>(d)));
  return points;
}

}  // namespace netlists
