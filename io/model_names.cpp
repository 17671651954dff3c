#include <fmt/format.h>

#include "io/model_reading.h"

namespace io {

using netlists::Name;

Name required_name(const YamlMap& map, std::string_view key) {
  const YamlNode* node = map.require(key);
  if (node == nullptr) return {"", map.reader().mark(map.place())};
  return {map.text(key).value_or(""), map.reader().mark(*node)};
}

std::optional<Name> optional_name(const YamlMap& map, std::string_view key) {
  if (!map.has(key)) return std::nullopt;
  auto text = map.text(key);
  if (!text) return std::nullopt;
  return Name{std::move(*text), map.reader().mark(*map.find(key))};
}

std::vector<Name> names(const YamlMap& map, std::string_view key, std::string_view form) {
  std::vector<Name> list;
  for (auto& [text, mark] : map.texts(key, form)) list.push_back({std::move(text), std::move(mark)});
  return list;
}

std::pair<Name, Name> required_pair(const YamlMap& map, std::string_view key) {
  map.require(key);
  const YamlNode* node = map.key_node(key);
  if (node == nullptr || node[1].kind == YamlKind::null) return {};
  const auto ends = names(map, key, "[hot, neutral]");
  if (ends.size() == 2) {
    if (ends[0].text == ends[1].text)
      map.error(node[1], fmt::format("{} names '{}' twice", key, ends[0].text));
    return {ends[0], ends[1]};
  }
  if (node[1].kind == YamlKind::sequence && node[1].items.size() != 2)
    map.error(node[1], fmt::format("{} must name two, as in [hot, neutral]", key));
  return {};
}

void check_id(YamlReader& reader, const YamlNode& key, const std::string& owner) {
  const auto bad = key.text.find_first_of(".@");
  if (bad == std::string::npos) return;
  reader.error(key, owner,
               fmt::format("a name here has no '{}': it joins CIRCUIT.wire@place", key.text[bad]));
}

}  // namespace io
