// The entries of a catalogue file, kind by kind.
#pragma once

#include <map>
#include <string>

#include "io/yaml_reader.h"
#include "netlists/catalogue.h"

namespace io {

/// What entries are read with: where faults go, the file's own `sources`, and the catalogue as it
/// stands, which they refer to and are added to.
struct CatalogueReading {
  YamlReader& reader;
  const std::map<std::string, std::string>& sources;
  netlists::Catalogue& catalogue;
};

/// Each takes the map of one kind and adds its entries, replacing those of the same name whole. A name
/// that an entry refers to must be in the catalogue by then: materials before wires before cables.
void read_materials(const CatalogueReading& reading, const YamlNode& node);
void read_wires(const CatalogueReading& reading, const YamlNode& node);
void read_cables(const CatalogueReading& reading, const YamlNode& node);
void read_raceways(const CatalogueReading& reading, const YamlNode& node);
void read_systems(const CatalogueReading& reading, const YamlNode& node);
void read_instruments(const CatalogueReading& reading, const YamlNode& node);
void read_loads(const CatalogueReading& reading, const YamlNode& node);

}  // namespace io
