#include "io/model_file.h"

#include <fmt/format.h>
#include <openssl/evp.h>

#include <array>
#include <filesystem>

#include "io/catalogue_file.h"
#include "io/model_reading.h"
#include "io/yaml_tree.h"

namespace io {
namespace {

std::string sha256(const std::string& text) {
  std::array<unsigned char, EVP_MAX_MD_SIZE> digest{};
  unsigned size = 0;
  EVP_Digest(text.data(), text.size(), digest.data(), &size, EVP_sha256(), nullptr);
  std::string hex;
  for (unsigned i = 0; i < size; ++i) hex += fmt::format("{:02x}", digest[i]);
  return hex;
}

void read_format(const YamlMap& top) {
  if (top.require("format") == nullptr) return;
  const auto format = top.text("format");
  if (format && *format != "idlewire/1")
    top.error(*top.find("format"),
              fmt::format("format '{}' is not read here; a model begins with 'format: idlewire/1'", *format));
}

/// The model's own catalogue files, beside the model unless their path says otherwise.
void read_catalogues(ModelReading& reading, const YamlMap& top) {
  const auto* list = top.list("catalogue", "[mine.yaml]");
  if (list == nullptr) return;
  for (const YamlNode& node : *list) {
    const auto file = reading.reader.text(node, {top.owner(), "a catalogue file"});
    if (!file) continue;
    const auto path = std::filesystem::path(reading.building.file).parent_path() / *file;
    std::vector<netlists::Fault> faults;
    const auto text = read_text_file(path.string(), faults);
    for (const auto& fault : faults) top.error(node, fmt::format("catalogue '{}': {}", *file, fault.what));
    if (text) add_catalogue_text(*text, path.string(), reading.building.catalogue, reading.reader.faults());
  }
}

/// Names of all that own wires, needed before the first wire is read.
void collect_owners(ModelReading& reading, const YamlMap& top) {
  for (const char* key : {"circuits", "panels"}) {
    const YamlNode* name = top.key_node(key);
    if (name == nullptr || name[1].kind != YamlKind::map) continue;
    for (std::size_t i = 0; i + 1 < name[1].items.size(); i += 2)
      reading.owners.insert(name[1].items[i].text);
  }
}

bool read_top(ModelReading& reading, const YamlNode& tree) {
  const YamlMap top(reading.reader, tree, "",
                    {"format", "title", "frequency", "temperature", "earth_resistivity", "catalogue",
                     "supplies", "panels", "places", "runs", "alongside", "circuits", "bonds", "cuts",
                     "leaks", "instruments", "uncertainty", "limits", "stages"});
  if (!top.is_map()) return false;
  read_format(top);
  read_catalogues(reading, top);
  collect_owners(reading, top);
  read_settings(reading, top);
  read_supplies(reading, top);
  read_runs(reading, top);
  read_circuits(reading, top);
  read_connections(reading, top);
  read_stages(reading, top);
  tell_defaults(reading.building, top);
  return true;
}

}  // namespace

ModelFile read_model_text(const std::string& text, const std::string& name,
                          const netlists::Catalogue& catalogue) {
  ModelFile model;
  model.building.file = name;
  model.building.sha256 = sha256(text);
  model.building.catalogue = catalogue;
  if (const auto tree = parse_yaml(text, name, model.faults)) {
    YamlReader reader(name, model.faults);
    ModelReading reading{reader, model.building, {}};
    model.is_read = read_top(reading, *tree);
  }
  sort_by_place(model.faults);
  return model;
}

ModelFile read_model_text(const std::string& text, const std::string& name) {
  return read_model_text(text, name, builtin_catalogue());
}

ModelFile read_model(const std::string& path) {
  ModelFile model;
  model.building.file = path;
  const auto text = read_text_file(path, model.faults);
  return text ? read_model_text(*text, path) : model;
}

}  // namespace io
