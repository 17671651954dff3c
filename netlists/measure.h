// Every port that is probed, and what the instruments show at it.
#pragma once

#include <vector>

#include "engine/solve.h"
#include "netlists/catalogue.h"
#include "netlists/findings.h"
#include "netlists/probes.h"

namespace netlists {

/// What is probed at one place of one conductor; the first probe is the one to the place's reference.
using ProbedPlace = std::vector<Probe>;

/// Open circuit, source impedance, short-circuit current and readings of each place, in the order of
/// `probed`: readings probe by probe, each with every instrument that can take it. Ports are solved
/// together. Names of places, appearances and contributions are left to the caller.
std::vector<PlaceFindings> measure(const std::vector<InstrumentType>& instruments,
                                   const std::vector<ProbedPlace>& probed,
                                   const engine::SolvedNetwork& solved);

}  // namespace netlists
