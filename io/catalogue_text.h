// The catalogue as text for people.
#pragma once

#include <string>

#include "netlists/catalogue.h"

namespace io {

/// The names of all entries, kind by kind and in the order of their sizes, with how to see one in full.
std::string catalogue_list(const netlists::Catalogue& catalogue, int width);

/// Every entry of that name in full, with units and sources; for the name of a kind ("wires", "cables"), its
/// entries one a line. Throws std::invalid_argument for any other name, with the nearest there is.
std::string catalogue_entry(const netlists::Catalogue& catalogue, const std::string& name, int width);

}  // namespace io
