// What settles each conductor's case, of whatever condition it is.
#pragma once

#include <cstddef>

#include "netlists/building.h"
#include "netlists/condition.h"
#include "netlists/findings.h"
#include "netlists/places.h"
#include "netlists/settle.h"

namespace netlists {

/// All that it is built from must outlive it.
class Settling {
 public:
  Settling(const Building& building, const Conditions& conditions, const Places& places)
      : building_(building), conditions_(conditions), places_(places) {}

  /// `index` is that of Lowered::conductors. Readings with a band count by its 95th percentile.
  Settle settle(std::size_t index, const ConductorFindings& found) const;

  /// The weakest source that a person feels, over the places where the conductor is reached.
  RealSource weakest_source(const ConductorFindings& found) const;

 private:
  std::vector<CouplingReading> worst_readings(const ConductorFindings& found) const;

  const Building& building_;
  const Conditions& conditions_;
  const Places& places_;
};

}  // namespace netlists
