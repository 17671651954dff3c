// Reading values out of a YAML tree: every fault collected with its place, none thrown.
#pragma once

#include <initializer_list>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "io/quantity.h"
#include "io/yaml_tree.h"
#include "netlists/fault.h"

namespace io {

/// What a value may be, in SI, ends included, and how to say so to a user: "1 mm to 100 km".
struct Range {
  double least;
  double most;
  const char* words;
};

/// The allowed words of a value with what they stand for.
template <class E>
using Choices = std::initializer_list<std::pair<std::string_view, E>>;

/// Who a value belongs to and what it is called there: "run 'C2'" and "length" make messages begin
/// "run 'C2': length". The owner may be "".
struct Label {
  const std::string& owner;
  std::string_view name;
};

/// Takes single values out of nodes. Each function returns the value, or nothing after reporting why.
class YamlReader {
 public:
  YamlReader(std::string file, std::vector<netlists::Fault>& faults)
      : file_(std::move(file)), faults_(faults) {}

  netlists::Mark mark(const YamlNode& node) const { return {file_, node.line, node.column}; }
  void error(const YamlNode& at, const std::string& owner, const std::string& what);
  void warn(const YamlNode& at, const std::string& owner, const std::string& what);
  const std::string& file() const { return file_; }
  std::vector<netlists::Fault>& faults() { return faults_; }

  /// A word or sentence: any scalar but an empty one.
  std::optional<std::string> text(const YamlNode& node, const Label& label);
  /// A quantity with its unit, in SI.
  std::optional<double> quantity(const YamlNode& node, Dimension dimension, const Range& range,
                                 const Label& label);
  /// Two quantities [a, b] with a <= b.
  std::optional<std::pair<double, double>> interval(const YamlNode& node, Dimension dimension,
                                                    const Range& range, const Label& label);
  /// Numbers without a unit: permittivities, permeabilities, power factors.
  std::optional<double> number(const YamlNode& node, const Range& range, const Label& label);
  std::optional<std::pair<double, double>> number_interval(const YamlNode& node, const Range& range,
                                                           const Label& label);
  std::optional<int> whole(const YamlNode& node, int least, int most, const Label& label);
  /// on, yes, true against off, no, false; quoted or not, small or capital letters.
  std::optional<bool> flag(const YamlNode& node, const Label& label);
  /// The items of a list, null after a fault. `form` shows a list as it should be: "[C1, C2]".
  const std::vector<YamlNode>* list(const YamlNode& node, std::string_view form, const Label& label);
  /// A list of words.
  std::vector<std::pair<std::string, netlists::Mark>> texts(const YamlNode& node, std::string_view form,
                                                            const Label& label);
  /// One of a few words. on/off/yes/no/true/false count as the word of theirs that is among them.
  template <class E>
  std::optional<E> choice(const YamlNode& node, Choices<E> choices, const Label& label);

 private:
  std::optional<int> word_number(const YamlNode& node, const std::vector<std::string>& words,
                                 const Label& label);

  std::string file_;
  std::vector<netlists::Fault>& faults_;
};

/// A map with named keys. Its constructor reports a node of another kind and every key that is not
/// among `allowed`, with the nearest that is; the rest of the functions then look keys up.
class YamlMap {
 public:
  /// `owner` begins every message: "circuit 'LP2-7'". `place` is where a missing key is reported,
  /// by default the map itself.
  YamlMap(YamlReader& reader, const YamlNode& node, std::string owner,
          const std::vector<std::string>& allowed, const YamlNode* place = nullptr);

  bool is_map() const { return node_.kind == YamlKind::map; }
  const std::string& owner() const { return owner_; }
  const YamlNode& place() const { return *place_; }
  YamlReader& reader() const { return reader_; }
  void error(const YamlNode& at, const std::string& what) const { reader_.error(at, owner_, what); }
  void warn(const YamlNode& at, const std::string& what) const { reader_.warn(at, owner_, what); }

  /// The value of a key, null if it is not there. An empty value is reported and counts as absent.
  const YamlNode* find(std::string_view key) const;
  const YamlNode* key_node(std::string_view key) const;
  bool has(std::string_view key) const { return key_node(key) != nullptr; }
  /// The same, reported if it is not there.
  const YamlNode* require(std::string_view key) const;

  /// Values of optional keys: nothing if the key is absent, or after a fault.
  std::optional<std::string> text(std::string_view key) const;
  std::optional<double> quantity(std::string_view key, Dimension dimension, const Range& range) const;
  std::optional<std::pair<double, double>> interval(std::string_view key, Dimension dimension,
                                                    const Range& range) const;
  std::optional<double> number(std::string_view key, const Range& range) const;
  std::optional<int> whole(std::string_view key, int least, int most) const;
  std::optional<bool> flag(std::string_view key) const;
  const std::vector<YamlNode>* list(std::string_view key, std::string_view form) const;
  std::vector<std::pair<std::string, netlists::Mark>> texts(std::string_view key,
                                                            std::string_view form) const;
  template <class E>
  std::optional<E> choice(std::string_view key, Choices<E> choices) const {
    const YamlNode* node = find(key);
    return node != nullptr ? reader_.choice<E>(*node, choices, Label{owner_, key}) : std::nullopt;
  }

 private:
  void check_keys(const std::vector<std::string>& allowed) const;

  YamlReader& reader_;
  const YamlNode& node_;
  const YamlNode* place_;
  std::string owner_;
};

/// Calls f(key node, value node) for every entry of a map whose keys are names of the user's, each
/// name once (a second one has been reported already). Reports a node of another kind, empty values
/// and names with control characters or of more than 200 bytes.
template <class F>
void for_each_entry(YamlReader& reader, const YamlNode& node, std::string_view what, F f);

/// What for_each_entry checks first: the entries worth reading.
std::vector<std::pair<const YamlNode*, const YamlNode*>> named_entries(YamlReader& reader,
                                                                       const YamlNode& node,
                                                                       std::string_view what);

template <class F>
void for_each_entry(YamlReader& reader, const YamlNode& node, std::string_view what, F f) {
  for (const auto& [key, value] : named_entries(reader, node, what)) f(*key, *value);
}

template <class E>
std::optional<E> YamlReader::choice(const YamlNode& node, Choices<E> choices, const Label& label) {
  std::vector<std::string> words;
  for (const auto& entry : choices) words.emplace_back(entry.first);
  const auto number = word_number(node, words, label);
  if (!number) return std::nullopt;
  return (choices.begin() + *number)->second;
}

}  // namespace io
