// What is uncertain in a building, how far, and the points at which it is sampled.
#pragma once

#include <Eigen/Core>
#include <cstdint>
#include <string>
#include <utility>
#include <vector>

#include "netlists/building.h"
#include "netlists/lower.h"
#include "netlists/sections.h"

namespace netlists {

/// Clearances of runs that give none, where the model does not say either: p05 and p95, m.
inline constexpr std::pair<double, double> k_usual_clearance{5e-3, 1.0};

/// A distribution by what people say of it. Continuous everywhere, so that a quantile is a number.
struct Spread {
  enum class Shape {
    lognormal,    // in two halves that meet at the median: ln x is normal on either side of it
    log_uniform,  // ln x is uniform, and p05 and p95 are where they are said to be
    uniform,      // from `low` to `high`, all of it
    chance        // 1 with probability `mid`, else 0
  };
  Shape shape = Shape::lognormal;
  double low = 1.0;   // p05
  double mid = 1.0;   // p50
  double high = 1.0;  // p95

  double quantile(double u) const;  // 0 < u < 1
  /// Derivative of the quantile by the standard normal score of u, at the median: what one standard
  /// deviation of the quantity is near its centre. 0 for a chance.
  double sigma() const;
};

/// Spreads of supplies and instruments about their nominal values, as factors; sources in
/// netlists/README.md, "Draws".
Spread supply_spread(double frequency);
Spread instrument_resistance_spread();
Spread instrument_reading_spread();

/// One uncertain quantity.
struct Quantity {
  enum class Kind {
    supply_volts,           // factor
    supply_angle,           // rad
    length,                 // factor, of a run
    clearance,              // m, of a run
    wander,                 // m, of a run
    permittivity,           // relative, of one insulation
    thickness,              // factor, of the insulation of one wire type
    instrument_resistance,  // factor
    instrument_reading,     // factor
    unlisted_load,          // chance that it is there; its power is drawn with it
    state                   // chance that a breaker, switch or load that may vary is on or closed
  };
  Kind kind = Kind::length;
  std::string name;    // in words: "clearance of C3"
  std::string target;  // supply, instrument, circuit, wire type or setting
  int index = -1;      // run, or insulation
  Spread spread;
};

/// Everything uncertain, in a fixed order.
struct Uncertain {
  std::vector<Quantity> quantities;
  std::vector<Insulation> insulations;   // that Kind::permittivity counts through
  std::vector<double> permittivities;    // central, of each
  std::vector<std::string> assumptions;  // spreads that the model did not give, in words

  int find(Quantity::Kind kind, const std::string& target) const;  // -1: certain
  int find(Quantity::Kind kind, int index) const;
};

/// What is uncertain in a staged building. `lowered` is its lowering with unlisted loads, `insulations`
/// what its sections are insulated with. Spreads: netlists/README.md, "Draws".
Uncertain uncertain(const Building& staged, const Lowered& lowered,
                    const std::vector<Insulation>& insulations);

/// Points 0 to count - 1 of a Sobol sequence of `dimensions`, each coordinate shifted modulo 1 by an amount
/// that `seed` draws (Cranley and Patterson 1976); count x dimensions, all inside (0, 1). Point k does not
/// depend on count. Beyond the sequence's own 3667 dimensions coordinates are pseudorandom.
Eigen::MatrixXd sample_points(int count, int dimensions, unsigned seed);

/// A well mixed 64 bit number for each (seed, draw, stream), as the picks of layouts need it.
std::uint64_t mixed(std::uint64_t seed, std::uint64_t draw, std::uint64_t stream);

}  // namespace netlists
