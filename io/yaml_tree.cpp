#include "io/yaml_tree.h"

#include <fmt/format.h>
#include <yaml-cpp/eventhandler.h>
#include <yaml-cpp/exceptions.h>
#include <yaml-cpp/mark.h>
#include <yaml-cpp/parser.h>

#include <cerrno>
#include <cstdint>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <string_view>
#include <unordered_map>
#include <utility>

namespace io {
namespace {

constexpr std::uintmax_t k_largest_file = 64u << 20;  // bytes
constexpr std::size_t k_most_nodes = 10'000'000;
constexpr std::size_t k_most_levels = 64;
constexpr std::size_t k_most_faults = 1000;
// The parser keeps a flow collection's tokens, some 100 bytes each, until its bracket closes, so their
// number is bounded before it sees them. Brackets are counted wherever they stand, in words too: no
// model comes near either bound.
constexpr std::size_t k_most_flow_marks = 8'000'000;
constexpr long k_most_unclosed = 1000;

using netlists::Fault;
using netlists::Severity;

/// Ends the reading of a file early, with one last fault.
struct Stop {
  YAML::Mark mark;
  std::string what;
};

/// Builds the tree from the parser's events. An alias is an event like any other and is refused, so
/// nothing is ever expanded.
class TreeBuilder : public YAML::EventHandler {
 public:
  TreeBuilder(std::string file, std::vector<Fault>& faults) : file_(std::move(file)), faults_(faults) {}

  YamlNode root;
  bool refused = false;

  void OnDocumentStart(const YAML::Mark&) override {}
  void OnDocumentEnd() override {}
  void OnNull(const YAML::Mark& mark, YAML::anchor_t) override { add(mark, YamlKind::null); }
  void OnAlias(const YAML::Mark& mark, YAML::anchor_t) override {
    if (!std::exchange(alias_told_, true))
      refuse(mark, "an alias (*name) is not taken here; write the value out");
    add(mark, YamlKind::null);
  }
  void OnAnchor(const YAML::Mark& mark, const std::string& name) override {
    if (std::exchange(anchor_told_, true)) return;
    refuse(mark,
           fmt::format("an anchor (&{}) is not taken here; write the value out where it is needed", name));
  }
  void OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t,
                const std::string& value) override {
    check_tag(mark, tag);
    add(mark, YamlKind::scalar).text = value;
  }
  void OnSequenceStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t,
                       YAML::EmitterStyle::value) override {
    open(mark, tag, YamlKind::sequence);
  }
  void OnSequenceEnd() override { open_.pop_back(); }
  void OnMapStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t,
                  YAML::EmitterStyle::value) override {
    open(mark, tag, YamlKind::map);
  }
  void OnMapEnd() override {
    check_keys(*open_.back());
    open_.pop_back();
  }

 private:
  /// The only open child of a node is its last, so a node never moves while something is added to it.
  YamlNode& add(const YAML::Mark& mark, YamlKind kind) {
    if (++count_ > k_most_nodes)
      throw Stop{mark, fmt::format("more than {} values in one file", k_most_nodes)};
    YamlNode& node = open_.empty() ? root : open_.back()->items.emplace_back();
    node.kind = kind;
    node.line = mark.line + 1;
    node.column = mark.column + 1;
    if (kind == YamlKind::null && !open_.empty() && open_.back()->kind == YamlKind::map) {
      // The parser puts an empty value where the next thing begins; people look for it at its key.
      const auto& items = open_.back()->items;
      if (items.size() % 2 == 0) {
        node.line = items[items.size() - 2].line;
        node.column = items[items.size() - 2].column;
      }
    }
    return node;
  }

  void open(const YAML::Mark& mark, const std::string& tag, YamlKind kind) {
    check_tag(mark, tag);
    if (open_.size() >= k_most_levels)
      throw Stop{mark, fmt::format("more than {} levels, one inside the other", k_most_levels)};
    open_.push_back(&add(mark, kind));
  }

  void check_tag(const YAML::Mark& mark, const std::string& tag) {
    if (!tag.empty() && tag != "?" && tag != "!")
      refuse(mark, fmt::format("a tag ({}) is not taken here; write the value alone", tag));
  }

  void check_keys(YamlNode& map) {
    std::unordered_map<std::string_view, const YamlNode*> seen;
    for (std::size_t i = 0; i + 1 < map.items.size(); i += 2) {
      const YamlNode& key = map.items[i];
      if (key.kind != YamlKind::scalar || key.text.empty()) {
        refuse(key, "a key must be a plain word");
        continue;
      }
      const auto [first, is_new] = seen.emplace(key.text, &key);
      if (!is_new)
        report(key, fmt::format("'{}' is given twice; first in line {}", key.text, first->second->line));
    }
  }

  void refuse(const YAML::Mark& mark, std::string what) {
    refused = true;
    report({YamlKind::null, mark.line + 1, mark.column + 1, "", {}}, std::move(what));
  }
  void refuse(const YamlNode& node, std::string what) {
    refused = true;
    report(node, std::move(what));
  }
  void report(const YamlNode& node, std::string what) {
    faults_.push_back({Severity::error, {file_, node.line, node.column}, std::move(what)});
    if (faults_.size() >= k_most_faults)
      throw Stop{YAML::Mark::null_mark(), fmt::format("gave up after {} faults", k_most_faults)};
  }

  std::string file_;
  std::vector<Fault>& faults_;
  std::vector<YamlNode*> open_;
  std::size_t count_ = 0;
  bool alias_told_ = false;  // each once: a file that uses them uses many
  bool anchor_told_ = false;
};

/// Throws at the first event: after the one document of a file nothing may come.
class NoMore : public YAML::EventHandler {
 public:
  void OnDocumentStart(const YAML::Mark& mark) override {
    throw Stop{mark, "a second document begins; one file is one document"};
  }
  void OnDocumentEnd() override {}
  void OnNull(const YAML::Mark&, YAML::anchor_t) override {}
  void OnAlias(const YAML::Mark&, YAML::anchor_t) override {}
  void OnScalar(const YAML::Mark&, const std::string&, YAML::anchor_t, const std::string&) override {}
  void OnSequenceStart(const YAML::Mark&, const std::string&, YAML::anchor_t,
                       YAML::EmitterStyle::value) override {}
  void OnSequenceEnd() override {}
  void OnMapStart(const YAML::Mark&, const std::string&, YAML::anchor_t, YAML::EmitterStyle::value) override {
  }
  void OnMapEnd() override {}
};

/// Bytes of the UTF-8 sequence at `at`; 0 if there is none.
std::size_t utf8_length(std::string_view text, std::size_t at) {
  const auto byte = [&](std::size_t i) {
    return static_cast<unsigned char>(i < text.size() ? text[i] : '\0');
  };
  const unsigned lead = byte(at);
  if (lead < 0x80) return 1;
  const std::size_t length = lead >= 0xc2 && lead < 0xe0   ? 2
                             : lead >= 0xe0 && lead < 0xf0 ? 3
                             : lead >= 0xf0 && lead < 0xf5 ? 4
                                                           : 0;
  for (std::size_t i = 1; i < length; ++i)
    if ((byte(at + i) & 0xc0u) != 0x80) return 0;
  if (length == 3 && ((lead == 0xe0 && byte(at + 1) < 0xa0) || (lead == 0xed && byte(at + 1) > 0x9f)))
    return 0;
  if (length == 4 && ((lead == 0xf0 && byte(at + 1) < 0x90) || (lead == 0xf4 && byte(at + 1) > 0x8f)))
    return 0;
  return length;
}

/// Counts what would make the parser hoard tokens; false once there is too much of it.
class FlowMarks {
 public:
  bool take(unsigned char c) {
    if (c == '[' || c == '{')
      ++unclosed_;
    else if (c == ']' || c == '}')
      --unclosed_;
    else if (c != ',')
      return true;
    return ++count_ <= k_most_flow_marks && unclosed_ <= k_most_unclosed;
  }

 private:
  std::size_t count_ = 0;
  long unclosed_ = 0;
};

/// The first byte that no text file holds, a tab where YAML wants spaces, or too many brackets.
std::optional<Fault> unreadable_text(std::string_view text, const std::string& name) {
  int line = 1;
  std::size_t line_start = 0;
  bool indentation = true;
  bool tab = false;
  FlowMarks flow_marks;
  for (std::size_t at = 0; at < text.size();) {
    const auto here = [&](std::string what) {
      return Fault{Severity::error, {name, line, static_cast<int>(at - line_start) + 1}, std::move(what)};
    };
    const unsigned char c = static_cast<unsigned char>(text[at]);
    if (c == '\n') {
      ++line;
      line_start = at + 1;
      indentation = true;
      tab = false;
    } else if (c == '\t') {
      tab = tab || indentation;
    } else if (c != ' ') {
      if (indentation && tab && c != '#' && c != '\r')
        return here("a tab in the indentation; YAML takes spaces only");
      indentation = false;
    }
    if ((c < 0x20 && c != '\n' && c != '\r' && c != '\t') || c == 0x7f)
      return here(fmt::format("byte 0x{:02x} is no text; a model is a plain text file", c));
    if (!flow_marks.take(c)) return here("more than 64 levels of brackets, or too many brackets and commas");
    const std::size_t length = utf8_length(text, at);
    if (length == 0) return here(fmt::format("byte 0x{:02x} is no UTF-8; save the file as UTF-8 text", c));
    at += length;
  }
  return std::nullopt;
}

std::string reason() { return errno == 0 ? "unknown reason" : std::strerror(errno); }

void parse_into(TreeBuilder& builder, const std::string& text, bool& any) {
  std::istringstream stream(text);
  YAML::Parser parser(stream);
  any = parser.HandleNextDocument(builder);
  if (!any) return;
  NoMore no_more;
  parser.HandleNextDocument(no_more);
}

}  // namespace

std::optional<std::string> read_text_file(const std::string& path, std::vector<Fault>& faults) {
  const auto refuse = [&](std::string what) {
    faults.push_back({Severity::error, {path, 0, 0}, std::move(what)});
    return std::nullopt;
  };
  std::error_code problem;
  const auto status = std::filesystem::status(path, problem);
  if (status.type() == std::filesystem::file_type::not_found) return refuse("there is no such file");
  if (problem) return refuse(fmt::format("cannot be read: {}", problem.message()));
  if (std::filesystem::is_directory(status)) return refuse("is a directory, not a file");
  if (!std::filesystem::is_regular_file(status)) return refuse("is not a regular file");
  const auto size = std::filesystem::file_size(path, problem);
  if (problem) return refuse(fmt::format("cannot be read: {}", problem.message()));
  if (size > k_largest_file)
    return refuse(fmt::format("is {} MB large; at most {} MB are read", size >> 20, k_largest_file >> 20));
  errno = 0;
  std::ifstream stream(path, std::ios::binary);
  if (!stream) return refuse(fmt::format("cannot be read: {}", reason()));
  std::string text(size, '\0');
  stream.read(text.data(), static_cast<std::streamsize>(size));
  if (stream.bad()) return refuse(fmt::format("cannot be read: {}", reason()));
  text.resize(static_cast<std::size_t>(stream.gcount()));
  return text;
}

std::optional<YamlNode> parse_yaml(const std::string& text, const std::string& name,
                                   std::vector<Fault>& faults) {
  if (text.size() > k_largest_file) {
    faults.push_back(
        {Severity::error, {name, 0, 0}, fmt::format("more than {} MB of text", k_largest_file >> 20)});
    return std::nullopt;
  }
  if (auto fault = unreadable_text(text, name)) {
    faults.push_back(std::move(*fault));
    return std::nullopt;
  }
  TreeBuilder builder(name, faults);
  bool any = false;
  try {
    parse_into(builder, text, any);
  } catch (const Stop& stop) {
    faults.push_back({Severity::error, {name, stop.mark.line + 1, stop.mark.column + 1}, stop.what});
    return std::nullopt;
  } catch (const YAML::ParserException& problem) {
    faults.push_back({Severity::error,
                      {name, problem.mark.line + 1, problem.mark.column + 1},
                      fmt::format("not YAML: {}", problem.msg)});
    return std::nullopt;
  }
  if (!any) {
    faults.push_back({Severity::error, {name, 0, 0}, "the file is empty"});
    return std::nullopt;
  }
  if (builder.refused) return std::nullopt;
  return std::move(builder.root);
}

}  // namespace io
