#include "netlists/predict.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <memory>
#include <stdexcept>
#include <vector>

#include "engine/solve.h"
#include "netlists/condition.h"
#include "netlists/draws.h"
#include "netlists/influences.h"
#include "netlists/judge.h"
#include "netlists/lower.h"
#include "netlists/meter.h"
#include "netlists/parallel.h"
#include "netlists/places.h"
#include "netlists/ranking.h"
#include "netlists/settling.h"
#include "netlists/stage.h"

namespace netlists {
namespace {

constexpr double k_residual = 1e-6;   // of a node's currents; a solved network stays far below
constexpr int k_first_draws = 100;    // before the ranking is compared for the first time
constexpr int k_most_explained = 50;  // ranks whose influences are found; each costs a solve
constexpr std::size_t k_top = 20;     // rows of the ranking that have to stand still

/// The first rows of the ranking, and how likely each misleads.
std::vector<std::pair<std::string, double>> top(const Findings& findings) {
  std::vector<std::pair<std::string, double>> rows;
  for (const ConductorFindings& found : findings.conductors)
    if (found.rank && rows.size() < k_top) rows.emplace_back(found.id, found.probability.value_or(0.0));
  return rows;
}

/// The same conductors in the same order, but that two may change places whose chances are equal within what
/// `draws` can tell: two standard errors of a chance of one half.
bool same_ranking(const std::vector<std::pair<std::string, double>>& before,
                  const std::vector<std::pair<std::string, double>>& after, int draws) {
  const double told_apart = 1.0 / std::sqrt(static_cast<double>(draws));
  if (before.size() != after.size()) return false;
  std::map<std::string, double> chance(before.begin(), before.end());
  for (std::size_t i = 0; i < after.size(); ++i) {
    if (!chance.count(after[i].first)) return false;
    if (before[i].first != after[i].first && std::abs(before[i].second - after[i].second) > told_apart)
      return false;
  }
  return true;
}

class Prediction {
 public:
  Prediction(const Building& building, const PredictOptions& options)
      : options_(options),
        threads_(options.threads > 0 ? options.threads : machine_threads()),
        staged_(in_stage(building, options.stage)),
        sections_(std::make_shared<SectionCache>()),
        lowered_(lower_staged(staged_, {options.seed, sections_, false})),
        solved_(lowered_.network) {
    require_solved(solved_.residual());
  }

  /// Once.
  Predicted predicted() {
    Findings found = findings();
    return {std::move(staged_), std::move(lowered_), std::move(found)};
  }

 private:
  Findings findings() {
    meter().begin("network and readings", 0);
    Findings found = judge(staged_, lowered_, solved_);
    found.seed = options_.seed;
    if (options_.until_stable || options_.draws > 0) {
      draw(found);
    } else {
      found.assumptions.emplace_back(
          "no draws are made: readings are those of the nominal case, ranked by that alone");
    }
    return found;
  }

  void draw(Findings& found) {
    Draws draws(staged_, lowered_, found, options_.seed, threads_, sections_);
    draws.make(options_.until_stable ? k_first_draws : options_.draws);
    apply(draws, found);
    if (options_.until_stable) {
      for (auto before = top(found); draws.count() < k_most_draws;) {
        draws.make(std::min(2 * draws.count(), k_most_draws));
        apply(draws, found);
        const auto after = top(found);
        if (same_ranking(before, after, draws.count() / 2)) break;
        before = after;
      }
    }
    find_influences(draws, found);
    found.assumptions.push_back(
        fmt::format("draws: {} of all that is uncertain, propagated after JCGM 101; p05 to p95 is a coverage "
                    "interval of 90 % in the sense of JCGM 100",
                    draws.count()));
    for (const std::string& text : draws.uncertain().assumptions) found.assumptions.push_back(text);
  }

  // Of the first that mislead, and of the one that was asked about.
  void find_influences(const Draws& draws, Findings& found) const {
    std::vector<ConductorFindings*> wanted;
    for (ConductorFindings& conductor : found.conductors)
      if ((conductor.rank && *conductor.rank <= k_most_explained) || conductor.id == options_.explain)
        wanted.push_back(&conductor);
    in_parallel(static_cast<int>(wanted.size()), threads_, [&](int i) {
      wanted[i]->influences = influences(staged_, lowered_, solved_, draws, *wanted[i]);
    });
  }

  // What misleads is judged anew each time, from the nominal case on.
  void apply(const Draws& draws, Findings& found) {
    for (ConductorFindings& conductor : found.conductors) set_misleads(conductor);
    draws.fill(found);
    const Conditions now = conditions(lowered_);
    const Places places(staged_, lowered_, now);
    const Settling settling(staged_, now, places);
    std::map<std::string, std::size_t> index;
    for (std::size_t c = 0; c < lowered_.conductors.size(); ++c) index[lowered_.conductors[c].id] = c;
    for (ConductorFindings& conductor : found.conductors) {
      conductor.settle = settling.settle(index.at(conductor.id), conductor);
      draws.add_wrong_calls(conductor);
    }
    rank(found.conductors);
  }

  PredictOptions options_;
  int threads_;
  Building staged_;
  std::shared_ptr<SectionCache> sections_;
  Lowered lowered_;
  engine::SolvedNetwork solved_;
};

}  // namespace

void require_solved(double residual) {
  if (!(residual <= k_residual))
    throw std::runtime_error(
        fmt::format("the network could not be solved: currents balance within {:.1e} only", residual));
}

Predicted predict(const Building& building, const PredictOptions& options) {
  Predicted out = Prediction(building, options).predicted();
  out.findings.stage = stage_name(building, options.stage);
  return out;
}

}  // namespace netlists
