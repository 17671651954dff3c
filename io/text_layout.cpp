#include "io/text_layout.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <sstream>

namespace io {
namespace {

std::string rounded(double value, int digits) {
  if (value == 0.0) return "0";
  const int before = static_cast<int>(std::floor(std::log10(std::abs(value)))) + 1;
  return fmt::format("{:.{}f}", value, std::max(0, digits - before));
}

constexpr char k_stand_in = '\x01';  // in no text that has been made printable

struct Unit {
  double size;
  const char* name;
};

/// In the first unit, largest first, that the value fills; in the last if it fills none.
template <std::size_t n>
std::string in_units(double value, const std::array<Unit, n>& units, int digits) {
  if (!std::isfinite(value)) return "unknown";
  const auto fits = [value](const Unit& unit) { return std::abs(value) >= 0.9995 * unit.size; };
  const auto found = std::find_if(units.begin(), units.end(), fits);
  const Unit& unit = found == units.end() ? units.back() : *found;
  return rounded(value / unit.size, digits) + " " + unit.name;
}

bool continues(char c) { return (static_cast<unsigned char>(c) & 0xC0u) == 0x80u; }

/// U+0300 to U+036F, the combining marks of Latin: encoded as CC 80 to CD AF.
bool combines(const std::string& text, std::size_t i) {
  const auto lead = static_cast<unsigned char>(text[i]);
  if (i + 1 >= text.size()) return false;
  const auto next = static_cast<unsigned char>(text[i + 1]);
  return lead == 0xCCu || (lead == 0xCDu && next <= 0xAFu);
}

/// Bytes of the longest head of `word` that takes at most `width` columns, at least one character;
/// after the last punctuation in it where there is some.
std::size_t head_of(const std::string& word, int width) {
  std::size_t end = 0, last = 0;
  int used = 0;
  for (std::size_t i = 0; i < word.size(); ++i) {
    if (continues(word[i])) continue;
    if (!combines(word, i) && ++used > std::max(1, width)) break;
    end = i + 1;
    while (end < word.size() && continues(word[end])) ++end;
    if (std::string("_.-@/,+").find(word[i]) != std::string::npos) last = end;
  }
  return last > 0 && end < word.size() ? last : end;
}

std::string padded(const std::string& text, int width, bool right) {
  const std::string blanks(static_cast<std::size_t>(std::max(0, width - columns_of(text))), ' ');
  return right ? blanks + text : text + blanks;
}

std::string without_trailing_blanks(std::string line) {
  line.erase(line.find_last_not_of(' ') + 1);
  return line;
}

}  // namespace

std::string volts_text(double volts, int digits) {
  static constexpr std::array<Unit, 4> units{{{1e4, "kV"}, {0.01, "V"}, {1e-3, "mV"}, {1e-6, "uV"}}};
  if (std::abs(volts) >= 0.9995e4) return in_units(volts / 1e3, std::array<Unit, 1>{{{1.0, "kV"}}}, digits);
  if (std::abs(volts) >= 0.00995) return in_units(volts, std::array<Unit, 1>{{{1.0, "V"}}}, digits);
  return std::abs(volts) < 1e-9 ? "0 V" : in_units(volts, units, digits);
}

std::string ohms_text(double ohms, int digits) {
  static constexpr std::array<Unit, 5> units{
      {{1e9, "Gohm"}, {1e6, "Mohm"}, {1e3, "kohm"}, {1.0, "ohm"}, {1e-3, "mohm"}}};
  return ohms == 0.0 ? "0 ohm" : in_units(ohms, units, digits);
}

std::string amperes_text(double amperes, int digits) {
  static constexpr std::array<Unit, 2> large{{{1e3, "kA"}, {1.0, "A"}}};
  static constexpr std::array<Unit, 2> small{{{1e-6, "uA"}, {1e-9, "nA"}}};
  if (std::abs(amperes) >= 0.9995) return in_units(amperes, large, digits);
  if (std::abs(amperes) >= 0.00995e-3) return in_units(amperes, std::array<Unit, 1>{{{1e-3, "mA"}}}, digits);
  return std::abs(amperes) < 1e-12 ? "0 mA" : in_units(amperes, small, digits);
}

std::string degrees_text(std::complex<double> v) {
  if (!std::isfinite(std::abs(v))) return "unknown";
  return fmt::format("{:.1f} deg", v == 0.0 ? 0.0 : std::arg(v) * 180.0 / std::numbers::pi);
}

std::string phasor_text(std::complex<double> volts, int digits) {
  if (!std::isfinite(std::abs(volts))) return "unknown";
  return volts_text(std::abs(volts), digits) + " at " + degrees_text(volts);
}

std::string limit_text(double volts) {
  if (!std::isfinite(volts)) return "unknown";
  if (volts <= 0.0) return "0 V";
  const double step = std::pow(10.0, std::floor(std::log10(volts)) - 2);
  // A limit that is a round figure must not lose a digit to binary fractions.
  const double down = std::floor(volts / step * (1 + 1e-12)) * step;
  const int decimals = std::max(0, 2 - static_cast<int>(std::floor(std::log10(volts))));
  return fmt::format("{:.{}f} V", down, decimals);
}

std::string printable(const std::string& text) {
  std::string out = text;
  for (std::size_t i = 0; i < out.size(); ++i) {
    const auto c = static_cast<unsigned char>(out[i]);
    const bool c1 = c == 0xC2u && i + 1 < out.size() && static_cast<unsigned char>(out[i + 1]) < 0xA0u;
    if (c1) out.erase(i + 1, 1);  // U+0080 to U+009F are controls too
    if (c < 0x20u || c == 0x7Fu || c1) out[i] = '?';
  }
  return out;
}

int columns_of(const std::string& text) {
  int columns = 0;
  for (std::size_t i = 0; i < text.size(); ++i)
    if (!continues(text[i]) && !combines(text, i)) ++columns;
  return columns;
}

std::vector<std::string> wrap(const std::string& text, int width) {
  std::vector<std::string> lines(1);
  std::istringstream words(text);
  for (std::string word; words >> word;) {
    if (!lines.back().empty() && columns_of(lines.back()) + 1 + columns_of(word) > width)
      lines.emplace_back();
    while (lines.back().empty() && columns_of(word) > width) {
      const std::size_t head = head_of(word, width);
      if (head >= word.size()) break;
      lines.back() = word.substr(0, head);
      word.erase(0, head);
      lines.emplace_back();
    }
    lines.back() += (lines.back().empty() ? "" : " ") + word;
  }
  return lines;
}

std::string paragraph(const std::string& first, const std::string& text, int width, int indent) {
  const int lead = columns_of(first);
  const int room = std::max(10, width - std::max(0, indent));
  // The first line has less room by what its lead takes beyond the indent: blanks that cannot break
  // stand for it while the words are laid out.
  const int more = std::max(0, lead - indent);
  const std::string stand_in(static_cast<std::size_t>(more), k_stand_in);
  std::string out, start = first;
  for (std::string line : wrap(stand_in + text, room)) {
    if (out.empty()) line.erase(0, static_cast<std::size_t>(more));
    out += without_trailing_blanks(start + line) + "\n";
    start = std::string(static_cast<std::size_t>(indent), ' ');
  }
  return out;
}

std::string paragraph(const std::string& first, const std::string& text, int width) {
  return paragraph(first, text, width, columns_of(first));
}

std::vector<int> TextTable::widths() const {
  std::vector<int> out;
  for (std::size_t c = 0; c < columns_.size(); ++c) {
    int width = 0;
    const auto grow = [&](const std::string& cell) {
      for (const std::string& line : wrap(cell, columns_[c].most)) width = std::max(width, columns_of(line));
    };
    grow(columns_[c].header);
    for (const auto& row : rows_) grow(row[c]);
    out.push_back(width);
  }
  return out;
}

int TextTable::width() const {
  int sum = 0;
  for (const int w : widths()) sum += w + 2;
  return std::max(0, sum - 2);
}

std::string TextTable::render(const std::vector<std::string>& cells, const std::vector<int>& width) const {
  std::vector<std::vector<std::string>> lines;
  std::size_t height = 1;
  for (std::size_t c = 0; c < cells.size(); ++c) {
    lines.push_back(wrap(cells[c], columns_[c].most));
    height = std::max(height, lines.back().size());
  }
  std::string out;
  for (std::size_t k = 0; k < height; ++k) {
    std::string line;
    for (std::size_t c = 0; c < cells.size(); ++c)
      line +=
          (c == 0 ? "" : "  ") + padded(k < lines[c].size() ? lines[c][k] : "", width[c], columns_[c].right);
    out += without_trailing_blanks(line) + "\n";
  }
  return out;
}

std::vector<std::string> TextTable::blocks() const {
  const std::vector<int> width = widths();
  std::vector<std::string> cells, out;
  for (const Column& column : columns_) cells.push_back(column.header);
  out.push_back(render(cells, width));
  for (const auto& row : rows_) out.push_back(render(row, width));
  return out;
}

std::string TextTable::indented(int indent) const {
  std::string out;
  for (const std::string& block : blocks()) {
    std::istringstream lines(block);
    for (std::string line; std::getline(lines, line);)
      out += std::string(static_cast<std::size_t>(indent), ' ') + line + "\n";
  }
  return out;
}

}  // namespace io
