// What the entries of every kind share: their source, their other names, how they are added.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "io/catalogue_entries.h"

namespace io {

/// A value with the range it is met in.
struct Spread {
  double central;
  double low;
  double high;
};

/// The `source` of an entry, words of the file's `sources` written out, several joined by "; ". An
/// entry without one gets a warning.
std::string read_source(const CatalogueReading& reading, const YamlMap& map);

/// A plain number, a pair [a, b] whose geometric middle is central, or {central: c, range: [a, b]}.
std::optional<Spread> read_spread(const YamlMap& map, std::string_view key, const Range& range);

/// "5.32 ohm/km", "1.62 ohm/1000 ft": a resistance per length, in ohm/m.
std::optional<double> read_resistance_per_length(const YamlMap& map, std::string_view key);

/// The name of a material that conducts (`metal`) or insulates. Any other is reported.
std::optional<std::string> read_material(const netlists::Catalogue& catalogue, const YamlMap& map,
                                         std::string_view key, bool metal);

/// True for a number of strands that lie in full rings around one: 1, 7, 19, 37, ...
bool is_concentric(int strands);

/// Reads every entry of a kind with `read(map, entry)` and adds it under its name and its `also`.
/// An entry under other names too is replaced under all of them.
template <class T, class Read>
void read_entries(const CatalogueReading& reading, const YamlNode& node, const std::string& what,
                  std::vector<std::string> keys, std::map<std::string, T>& entries, Read read) {
  keys.insert(keys.end(), {"also", "source"});
  for_each_entry(reading.reader, node, what, [&](const YamlNode& key, const YamlNode& value) {
    const YamlMap map(reading.reader, value, what + " '" + key.text + "'", keys, &key);
    T entry;
    entry.name = key.text;
    if (map.is_map()) {
      entry.source = read_source(reading, map);
      read(map, entry);
    }
    for (auto& [name, old] : entries)
      if (old.name == entry.name) old = entry;
    for (const auto& [name, mark] : map.texts("also", "[another name]")) entries[name] = entry;
    entries[entry.name] = std::move(entry);
  });
}

}  // namespace io
