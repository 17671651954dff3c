// Many networks in place of one: every uncertain quantity sampled, every reading taken anew.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "netlists/building.h"
#include "netlists/findings.h"
#include "netlists/lower.h"
#include "netlists/section_bank.h"
#include "netlists/uncertain.h"

namespace netlists {

/// From here on a chance of misleading is worth a rank, even where the nominal case does not mislead.
inline constexpr double k_worth_a_rank = 0.05;

/// Percentiles of values with their standard errors: half the distance between the order statistics one
/// binomial standard deviation to either side, whatever the distribution. Values that are not finite are
/// left out; all zero where none is.
Band band_of(std::vector<double> values);

class Draws {
 public:
  /// `nominal` are the findings of the staged building without draws, which say what is measured where;
  /// `lowered` its lowering. All must outlive the draws. Solves the sections that draws are made of.
  Draws(const Building& staged, const Lowered& lowered, const Findings& nominal, unsigned seed, int threads,
        std::shared_ptr<SectionCache> sections);
  ~Draws();

  /// Makes draws until there are `count`, on all threads. What a draw gives depends on the seed and its
  /// number alone.
  void make(int count);
  int count() const;

  /// Bands, probabilities and what misleads, into the findings that were given or a copy of them.
  void fill(Findings& findings) const;

  /// Once what settles a conductor is known: the chance that coupling alone shows more than its limit on the
  /// instrument that settles it, at some place.
  void add_wrong_calls(ConductorFindings& found) const;

  /// One reading in every draw, V; whether a quantity that is there or not was there in each.
  std::vector<double> readings(const ConductorFindings& found, const PlaceFindings& at,
                               const Reading& reading) const;
  std::vector<bool> there(int quantity) const;

  /// Name of the supply whose voltage and phase a supply follows.
  std::string root_supply_of(const std::string& supply) const;

  const Uncertain& uncertain() const;
  const SectionBank& bank() const;

  /// The network of one draw, to look at.
  engine::Network network(int draw) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace netlists
