// A YAML file as a plain tree with places: what every reader of this folder starts from.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "netlists/fault.h"

namespace io {

enum class YamlKind : unsigned char { null, scalar, sequence, map };

/// A node of a YAML file. A scalar is text, whatever it looks like; what it means is for the reader
/// to say, so `no`, `12e3` and `1_000` are never turned into something else on the way.
struct YamlNode {
  YamlKind kind = YamlKind::null;
  int line = 0;                 // from 1
  int column = 0;               // from 1, in bytes
  std::string text;             // scalar
  std::vector<YamlNode> items;  // sequence: its items; map: key, value, key, value, ...
};

/// The whole of a file, or a fault that says why not: not there, a directory, no regular file, not
/// readable, larger than 64 MB.
std::optional<std::string> read_text_file(const std::string& path, std::vector<netlists::Fault>& faults);

/// The tree of a YAML text; `name` stands for the file in messages. Nothing, with faults, if the text
/// is empty, not UTF-8, not YAML, or uses what these files have no use for and what can blow up in
/// the reader's hands: anchors and aliases, tags, keys that are not plain words, a second document,
/// more than 64 levels, more than 10 million nodes. A key given twice is a fault, and its first value
/// stands. Memory is bounded by about 100 bytes a node; nothing recurses deeper than 64 levels.
std::optional<YamlNode> parse_yaml(const std::string& text, const std::string& name,
                                   std::vector<netlists::Fault>& faults);

}  // namespace io
