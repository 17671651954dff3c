// The whole road from a building to its findings, in one call.
#pragma once

#include <string>

#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"

namespace netlists {

struct PredictOptions {
  std::string stage;          // "": the first, or as drawn
  unsigned seed = 1;          // of layouts and draws
  int draws = 200;            // 0: the nominal case alone
  bool until_stable = false;  // double the draws until the first twenty of the ranking stand, instead
  std::string explain;        // a conductor whose influences are wanted, ranked or not
  int threads = 0;            // 0: as many as the machine has; no result depends on it
};

/// Draws are doubled at most up to this many.
inline constexpr int k_most_draws = 6400;

/// The findings with what they were found from.
struct Predicted {
  Building building;  // in the stage
  Lowered network;    // the nominal one
  Findings findings;
};

/// Lowers, solves, judges, draws and ranks. Throws std::invalid_argument for what the model asks and cannot
/// be had (a stage that is not there, too much in a raceway), std::runtime_error where the network cannot be
/// solved to 1e-6 of its currents.
Predicted predict(const Building& building, const PredictOptions& options);

/// Throws std::runtime_error unless the currents of a solved network balance within 1e-6.
void require_solved(double residual);

}  // namespace netlists
