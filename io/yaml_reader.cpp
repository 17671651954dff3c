#include "io/yaml_reader.h"

#include <fmt/format.h>

#include <algorithm>
#include <cctype>
#include <charconv>
#include <cmath>
#include <unordered_set>

namespace io {
namespace {

using netlists::Severity;

std::string lower_case(std::string text) {
  for (char& c : text) c = static_cast<char>(std::tolower(static_cast<unsigned char>(c)));
  return text;
}

std::optional<bool> as_flag(const std::string& text) {
  const std::string word = lower_case(text);
  if (word == "on" || word == "yes" || word == "true") return true;
  if (word == "off" || word == "no" || word == "false") return false;
  return std::nullopt;
}

/// Text for a message: a long one is cut, so that a junk file makes no junk page.
std::string quoted(const std::string& text) {
  if (text.size() <= 60) return fmt::format("'{}'", text);
  std::size_t end = 57;
  while (end > 0 && (static_cast<unsigned char>(text[end]) & 0xc0u) == 0x80) --end;
  return fmt::format("'{}...'", text.substr(0, end));
}

std::string join_words(const std::vector<std::string>& words) {
  std::string list;
  for (std::size_t i = 0; i < words.size(); ++i)
    list += fmt::format("{}{}", i == 0 ? "" : i + 1 == words.size() ? " or " : ", ", words[i]);
  return list;
}

std::string_view kind_name(YamlKind kind) {
  switch (kind) {
    case YamlKind::null:
      return "nothing";
    case YamlKind::scalar:
      return "a single value";
    case YamlKind::sequence:
      return "a list";
    case YamlKind::map:
      return "a map";
  }
  return "";
}

}  // namespace

void YamlReader::error(const YamlNode& at, const std::string& owner, const std::string& what) {
  faults_.push_back({Severity::error, mark(at), owner.empty() ? what : fmt::format("{}: {}", owner, what)});
}

void YamlReader::warn(const YamlNode& at, const std::string& owner, const std::string& what) {
  faults_.push_back({Severity::warning, mark(at), owner.empty() ? what : fmt::format("{}: {}", owner, what)});
}

std::optional<std::string> YamlReader::text(const YamlNode& node, const Label& label) {
  if (node.kind == YamlKind::scalar && !node.text.empty()) return node.text;
  error(node, label.owner,
        fmt::format("{} must be a single value, not {}", label.name,
                    node.kind == YamlKind::scalar ? "an empty one" : kind_name(node.kind)));
  return std::nullopt;
}

std::optional<double> YamlReader::quantity(const YamlNode& node, Dimension dimension, const Range& range,
                                           const Label& label) {
  const auto word = text(node, label);
  if (!word) return std::nullopt;
  const auto parsed = parse_quantity(*word, dimension, std::string(label.name));
  if (const auto* problem = std::get_if<std::string>(&parsed)) {
    error(node, label.owner, *problem);
    return std::nullopt;
  }
  const double value = std::get<double>(parsed);
  if (value >= range.least && value <= range.most) return value;
  error(node, label.owner, fmt::format("{} {} is not within {}", label.name, quoted(*word), range.words));
  return std::nullopt;
}

std::optional<std::pair<double, double>> YamlReader::interval(const YamlNode& node, Dimension dimension,
                                                              const Range& range, const Label& label) {
  const auto* ends = list(node, "[a, b]", label);
  if (ends == nullptr) return std::nullopt;
  if (ends->size() != 2) {
    error(node, label.owner, fmt::format("{} must have two values [a, b], not {}", label.name, ends->size()));
    return std::nullopt;
  }
  const auto a = quantity((*ends)[0], dimension, range, label);
  const auto b = quantity((*ends)[1], dimension, range, label);
  if (!a || !b) return std::nullopt;
  if (*a > *b) {
    error(node, label.owner, fmt::format("{}: the first of [a, b] must not be the larger", label.name));
    return std::nullopt;
  }
  return std::pair(*a, *b);
}

std::optional<double> YamlReader::number(const YamlNode& node, const Range& range, const Label& label) {
  const auto word = text(node, label);
  if (!word) return std::nullopt;
  double value = NAN;
  const char* end = word->data() + word->size();
  const auto parsed = std::from_chars(word->data(), end, value);
  if (parsed.ec != std::errc() || parsed.ptr != end || !std::isfinite(value)) {
    error(node, label.owner, fmt::format("{} {} must be a plain number", label.name, quoted(*word)));
    return std::nullopt;
  }
  if (value >= range.least && value <= range.most) return value;
  error(node, label.owner, fmt::format("{} {} is not within {}", label.name, quoted(*word), range.words));
  return std::nullopt;
}

std::optional<std::pair<double, double>> YamlReader::number_interval(const YamlNode& node, const Range& range,
                                                                     const Label& label) {
  const auto* ends = list(node, "[a, b]", label);
  if (ends == nullptr) return std::nullopt;
  if (ends->size() != 2) {
    error(node, label.owner, fmt::format("{} must have two values [a, b], not {}", label.name, ends->size()));
    return std::nullopt;
  }
  const auto a = number((*ends)[0], range, label);
  const auto b = number((*ends)[1], range, label);
  if (!a || !b) return std::nullopt;
  if (*a > *b) {
    error(node, label.owner, fmt::format("{}: the first of [a, b] must not be the larger", label.name));
    return std::nullopt;
  }
  return std::pair(*a, *b);
}

std::optional<int> YamlReader::whole(const YamlNode& node, int least, int most, const Label& label) {
  const auto word = text(node, label);
  if (!word) return std::nullopt;
  int value = 0;
  const char* end = word->data() + word->size();
  const auto parsed = std::from_chars(word->data(), end, value);
  if (parsed.ec == std::errc() && parsed.ptr == end && value >= least && value <= most) return value;
  error(node, label.owner,
        fmt::format("{} {} must be a whole number from {} to {}", label.name, quoted(*word), least, most));
  return std::nullopt;
}

std::optional<bool> YamlReader::flag(const YamlNode& node, const Label& label) {
  const auto word = text(node, label);
  if (!word) return std::nullopt;
  const auto value = as_flag(*word);
  if (!value) error(node, label.owner, fmt::format("{} {} must be on or off", label.name, quoted(*word)));
  return value;
}

const std::vector<YamlNode>* YamlReader::list(const YamlNode& node, std::string_view form,
                                              const Label& label) {
  if (node.kind == YamlKind::sequence) return &node.items;
  error(node, label.owner,
        fmt::format("{} must be a list, as in {}, not {}", label.name, form, kind_name(node.kind)));
  return nullptr;
}

std::vector<std::pair<std::string, netlists::Mark>> YamlReader::texts(const YamlNode& node,
                                                                      std::string_view form,
                                                                      const Label& label) {
  std::vector<std::pair<std::string, netlists::Mark>> words;
  const auto* items = list(node, form, label);
  if (items == nullptr) return words;
  for (const YamlNode& item : *items)
    if (auto word = text(item, label)) words.emplace_back(std::move(*word), mark(item));
  return words;
}

std::optional<int> YamlReader::word_number(const YamlNode& node, const std::vector<std::string>& words,
                                           const Label& label) {
  const auto word = text(node, label);
  if (!word) return std::nullopt;
  auto found = std::find(words.begin(), words.end(), *word);
  if (const auto value = as_flag(*word); found == words.end() && value)
    found =
        std::find_if(words.begin(), words.end(), [&](const std::string& w) { return as_flag(w) == value; });
  if (found != words.end()) return static_cast<int>(found - words.begin());
  error(node, label.owner,
        fmt::format("{} {} is not one of {}{}", label.name, quoted(*word), join_words(words),
                    netlists::nearest_hint(*word, words)));
  return std::nullopt;
}

YamlMap::YamlMap(YamlReader& reader, const YamlNode& node, std::string owner,
                 const std::vector<std::string>& allowed, const YamlNode* place)
    : reader_(reader), node_(node), place_(place != nullptr ? place : &node), owner_(std::move(owner)) {
  if (is_map())
    check_keys(allowed);
  else
    error(node, fmt::format("{}must be a map of keys and values, not {}", owner_.empty() ? "the file " : "",
                            kind_name(node.kind)));
}

void YamlMap::check_keys(const std::vector<std::string>& allowed) const {
  for (std::size_t i = 0; i + 1 < node_.items.size(); i += 2) {
    const YamlNode& key = node_.items[i];
    if (std::find(allowed.begin(), allowed.end(), key.text) != allowed.end()) continue;
    const std::string hint = netlists::nearest_hint(key.text, allowed);
    error(key, fmt::format("unknown key {}{}", quoted(key.text),
                           hint.empty() ? fmt::format("; it takes {}", join_words(allowed)) : hint));
  }
}

const YamlNode* YamlMap::key_node(std::string_view key) const {
  if (!is_map()) return nullptr;
  for (std::size_t i = 0; i + 1 < node_.items.size(); i += 2)
    if (node_.items[i].text == key) return &node_.items[i];
  return nullptr;
}

const YamlNode* YamlMap::find(std::string_view key) const {
  const YamlNode* name = key_node(key);
  if (name == nullptr) return nullptr;
  const YamlNode* value = name + 1;
  if (value->kind != YamlKind::null) return value;
  error(*value, fmt::format("{} has no value", key));
  return nullptr;
}

const YamlNode* YamlMap::require(std::string_view key) const {
  if (is_map() && !has(key)) error(*place_, fmt::format("{} is missing", key));
  return find(key);
}

std::optional<std::string> YamlMap::text(std::string_view key) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.text(*node, {owner_, key}) : std::nullopt;
}

std::optional<double> YamlMap::quantity(std::string_view key, Dimension dimension, const Range& range) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.quantity(*node, dimension, range, {owner_, key}) : std::nullopt;
}

std::optional<std::pair<double, double>> YamlMap::interval(std::string_view key, Dimension dimension,
                                                           const Range& range) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.interval(*node, dimension, range, {owner_, key}) : std::nullopt;
}

std::optional<double> YamlMap::number(std::string_view key, const Range& range) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.number(*node, range, {owner_, key}) : std::nullopt;
}

std::optional<int> YamlMap::whole(std::string_view key, int least, int most) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.whole(*node, least, most, {owner_, key}) : std::nullopt;
}

std::optional<bool> YamlMap::flag(std::string_view key) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.flag(*node, {owner_, key}) : std::nullopt;
}

const std::vector<YamlNode>* YamlMap::list(std::string_view key, std::string_view form) const {
  const YamlNode* node = find(key);
  return node != nullptr ? reader_.list(*node, form, {owner_, key}) : nullptr;
}

std::vector<std::pair<std::string, netlists::Mark>> YamlMap::texts(std::string_view key,
                                                                   std::string_view form) const {
  const YamlNode* node = find(key);
  if (node == nullptr) return {};
  return reader_.texts(*node, form, {owner_, key});
}

std::vector<std::pair<const YamlNode*, const YamlNode*>> named_entries(YamlReader& reader,
                                                                       const YamlNode& node,
                                                                       std::string_view what) {
  std::vector<std::pair<const YamlNode*, const YamlNode*>> entries;
  if (node.kind != YamlKind::map) {
    reader.error(node, std::string(what),
                 fmt::format("must be a map of names and values, not {}", kind_name(node.kind)));
    return entries;
  }
  std::unordered_set<std::string_view> seen;
  for (std::size_t i = 0; i + 1 < node.items.size(); i += 2) {
    const YamlNode& key = node.items[i];
    const YamlNode& value = node.items[i + 1];
    if (!seen.insert(key.text).second) continue;
    const bool control = std::any_of(key.text.begin(), key.text.end(),
                                     [](char c) { return static_cast<unsigned char>(c) < 0x20; });
    if (key.text.size() > 200 || control)
      reader.error(key, std::string(what), fmt::format("{} is no name", quoted(key.text)));
    else if (value.kind == YamlKind::null)
      reader.error(value, std::string(what), fmt::format("{} has no value", quoted(key.text)));
    else
      entries.emplace_back(&key, &value);
  }
  return entries;
}

}  // namespace io
