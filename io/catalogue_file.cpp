#include "io/catalogue_file.h"

#include <map>
#include <stdexcept>

#include "io/catalogue_entries.h"
#include "io/embedded_catalogue.h"
#include "io/yaml_reader.h"

namespace io {
namespace {

using Sources = std::map<std::string, std::string>;

struct Kind {
  const char* key;
  void (*read)(const CatalogueReading&, const YamlNode&);
};

/// In the order in which one refers to another, whatever their order in the file.
constexpr Kind k_kinds[] = {{"materials", read_materials}, {"wires", read_wires},
                            {"cables", read_cables},       {"raceways", read_raceways},
                            {"systems", read_systems},     {"instruments", read_instruments},
                            {"loads", read_loads}};

Sources read_sources(const YamlMap& top) {
  Sources sources;
  if (const YamlNode* node = top.find("sources"))
    for_each_entry(top.reader(), *node, "sources", [&](const YamlNode& key, const YamlNode& value) {
      sources[key.text] = top.reader().text(value, {"source '" + key.text + "'", "it"}).value_or("");
    });
  return sources;
}

netlists::Catalogue read_builtin() {
  netlists::Catalogue catalogue;
  std::vector<netlists::Fault> faults;
  for (const EmbeddedFile& file : embedded_catalogue())
    add_catalogue_text(std::string(file.text), std::string(file.name), catalogue, faults);
  if (!faults.empty()) throw std::logic_error("built-in catalogue: " + to_string(faults.front()));
  return catalogue;
}

}  // namespace

const netlists::Catalogue& builtin_catalogue() {
  static const netlists::Catalogue catalogue = read_builtin();
  return catalogue;
}

void add_catalogue_text(const std::string& text, const std::string& name, netlists::Catalogue& catalogue,
                        std::vector<netlists::Fault>& faults) {
  const auto tree = parse_yaml(text, name, faults);
  if (!tree) return;
  YamlReader reader(name, faults);
  std::vector<std::string> keys{"format", "sources"};
  for (const Kind& kind : k_kinds) keys.emplace_back(kind.key);
  const YamlMap top(reader, *tree, "", keys);
  if (!top.is_map()) return;
  top.require("format");
  top.choice<int>("format", {{"idlewire-catalogue/1", 1}});
  const Sources sources = read_sources(top);
  for (const Kind& kind : k_kinds)
    if (const YamlNode* node = top.find(kind.key)) kind.read({reader, sources, catalogue}, *node);
}

}  // namespace io
