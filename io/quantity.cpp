#include "io/quantity.h"

#include <fmt/format.h>

#include <array>
#include <charconv>
#include <cmath>
#include <numbers>
#include <optional>
#include <span>
#include <string_view>
#include <vector>

#include "netlists/fault.h"

namespace io {
namespace {

struct Unit {
  std::string_view name;
  Dimension dimension;
  double factor;        // SI per unit
  double offset = 0.0;  // SI value of zero, for temperatures
};

constexpr double k_inch = 25.4e-3;  // m, exact since 1959
constexpr double k_pi = std::numbers::pi;

constexpr auto k_units = std::to_array<Unit>({
    {"m", Dimension::length, 1.0},
    {"um", Dimension::length, 1e-6},
    {"mm", Dimension::length, 1e-3},
    {"cm", Dimension::length, 1e-2},
    {"km", Dimension::length, 1e3},
    {"ft", Dimension::length, 12 * k_inch},
    {"in", Dimension::length, k_inch},
    {"mil", Dimension::length, 1e-3 * k_inch},
    {"mm2", Dimension::area, 1e-6},
    {"AWG", Dimension::area, 1.0},
    {"kcmil", Dimension::area, k_pi / 4 * k_inch* k_inch * 1e-3},
    {"ohm", Dimension::resistance, 1.0},
    {"mohm", Dimension::resistance, 1e-3},
    {"kohm", Dimension::resistance, 1e3},
    {"Mohm", Dimension::resistance, 1e6},
    {"Gohm", Dimension::resistance, 1e9},
    {"nF", Dimension::capacitance, 1e-9},
    {"pF", Dimension::capacitance, 1e-12},
    {"uF", Dimension::capacitance, 1e-6},
    {"mH", Dimension::inductance, 1e-3},
    {"uH", Dimension::inductance, 1e-6},
    {"H", Dimension::inductance, 1.0},
    {"V", Dimension::voltage, 1.0},
    {"mV", Dimension::voltage, 1e-3},
    {"kV", Dimension::voltage, 1e3},
    {"A", Dimension::current, 1.0},
    {"mA", Dimension::current, 1e-3},
    {"uA", Dimension::current, 1e-6},
    {"W", Dimension::power, 1.0},
    {"mW", Dimension::power, 1e-3},
    {"kW", Dimension::power, 1e3},
    {"VA", Dimension::apparent, 1.0},
    {"kVA", Dimension::apparent, 1e3},
    {"MVA", Dimension::apparent, 1e6},
    {"Hz", Dimension::frequency, 1.0},
    {"kHz", Dimension::frequency, 1e3},
    {"deg", Dimension::angle, k_pi / 180},
    {"rad", Dimension::angle, 1.0},
    {"%", Dimension::ratio, 1e-2},
    {"degC", Dimension::temperature, 1.0},
    {"degF", Dimension::temperature, 5.0 / 9.0, -160.0 / 9.0},
    {"ohm m", Dimension::resistivity, 1.0},
    {"S/m", Dimension::conductivity, 1.0},
    {"MS/m", Dimension::conductivity, 1e6},
});

/// What a dimension is called in messages; the first unit of the table is the one suggested.
std::string_view noun(Dimension dimension) {
  switch (dimension) {
    case Dimension::length:
      return "length";
    case Dimension::area:
      return "wire size";
    case Dimension::resistance:
      return "resistance";
    case Dimension::capacitance:
      return "capacitance";
    case Dimension::inductance:
      return "inductance";
    case Dimension::voltage:
      return "voltage";
    case Dimension::current:
      return "current";
    case Dimension::power:
      return "power";
    case Dimension::apparent:
      return "apparent power";
    case Dimension::frequency:
      return "frequency";
    case Dimension::angle:
      return "angle";
    case Dimension::ratio:
      return "ratio";
    case Dimension::temperature:
      return "temperature";
    case Dimension::resistivity:
      return "resistivity";
    case Dimension::conductivity:
      return "conductivity";
  }
  return "quantity";
}

std::string with_article(std::string_view word) {
  return fmt::format("{} {}", std::string_view("aeiou").find(word[0]) == std::string_view::npos ? "a" : "an",
                     word);
}

std::string_view first_unit(Dimension dimension) {
  for (const Unit& unit : k_units)
    if (unit.dimension == dimension) return unit.name;
  return "";
}

std::string units_of(Dimension dimension) {
  std::vector<std::string_view> names;
  for (const Unit& unit : k_units)
    if (unit.dimension == dimension) names.push_back(unit.name);
  std::string list;
  for (std::size_t i = 0; i < names.size(); ++i)
    list += fmt::format("{}{}", i == 0 ? "" : i + 1 == names.size() ? " or " : ", ", names[i]);
  return list;
}

std::string_view trimmed(std::string_view text) {
  const auto begin = text.find_first_not_of(" \t");
  if (begin == std::string_view::npos) return {};
  return text.substr(begin, text.find_last_not_of(" \t") - begin + 1);
}

/// Signs that mean the same as the plain letters: the Greek omega and mu in both of their code
/// points, the superscript two, the degree sign.
std::string plain_letters(std::string text) {
  constexpr std::array<std::pair<std::string_view, std::string_view>, 7> signs{{{"\u03a9", "ohm"},
                                                                                {"\u2126", "ohm"},
                                                                                {"\u00b5", "u"},
                                                                                {"\u03bc", "u"},
                                                                                {"\u00b2", "2"},
                                                                                {"\u00b0C", "degC"},
                                                                                {"\u00b0F", "degF"}}};
  for (const auto& [sign, letters] : signs)
    for (auto at = text.find(sign); at != std::string::npos; at = text.find(sign))
      text.replace(at, sign.size(), letters);
  return text;
}

/// A decimal number at the front of `text`, which is shortened by it. "nan", "inf" and hexadecimal
/// are no numbers here.
std::optional<double> take_number(std::string_view& text) {
  std::string_view rest = text;
  bool negative = false;
  if (!rest.empty() && (rest[0] == '+' || rest[0] == '-')) {
    negative = rest[0] == '-';
    rest.remove_prefix(1);
  }
  if (rest.empty() || (rest[0] != '.' && (rest[0] < '0' || rest[0] > '9'))) return std::nullopt;
  double value = 0.0;
  const auto [end, problem] = std::from_chars(rest.data(), rest.data() + rest.size(), value);
  if (problem == std::errc::result_out_of_range) value = HUGE_VAL;
  if (problem == std::errc::invalid_argument) return std::nullopt;
  text = rest.substr(static_cast<std::size_t>(end - rest.data()));
  return negative ? -value : value;
}

std::optional<double> take_digits(std::string_view& text) {
  double value = 0.0;
  std::size_t n = 0;
  for (; n < text.size() && n < 6 && text[n] >= '0' && text[n] <= '9'; ++n)
    value = 10 * value + (text[n] - '0');
  if (n == 0) return std::nullopt;
  text.remove_prefix(n);
  return value;
}

/// "3/4" or "1 1/4" or "1-1/4" at the front of `text`, which is shortened by it.
std::optional<double> take_fraction(std::string_view& text) {
  std::string_view rest = text;
  auto whole = std::optional<double>(0.0);
  auto numerator = take_digits(rest);
  if (!numerator) return std::nullopt;
  if (!rest.empty() && (rest[0] == ' ' || rest[0] == '-')) {
    whole = numerator;
    rest.remove_prefix(1);
    rest = trimmed(rest);
    numerator = take_digits(rest);
    if (!numerator) return std::nullopt;
  }
  if (rest.empty() || rest[0] != '/') return std::nullopt;
  rest.remove_prefix(1);
  const auto denominator = take_digits(rest);
  if (!denominator || *denominator == 0.0) return std::nullopt;
  text = rest;
  return *whole + *numerator / *denominator;
}

const Unit* find_unit(std::string_view name) {
  for (const Unit& unit : k_units)
    if (unit.name == name) return &unit;
  return nullptr;
}

/// Area of a wire of an AWG size from its diameter, 0.005 in * 92^((36 - n) / 39) (ASTM B258).
/// "4/0" stands for n = -3.
std::optional<double> gauge_area(std::string_view size) {
  std::string_view rest = size;
  const auto number = take_digits(rest);
  if (!number) return std::nullopt;
  double n = *number;
  if (rest == "/0" && n >= 1 && n <= 4)
    n = 1 - n;
  else if (!rest.empty() || n > 40)
    return std::nullopt;
  const double diameter = 0.005 * k_inch * std::pow(92.0, (36 - n) / 39);
  return k_pi / 4 * diameter * diameter;
}

/// "10 ft 6 in": what follows the feet, in m; nothing else may follow a unit.
std::optional<double> inches_after_feet(std::string_view text) {
  const auto ft = text.find("ft");
  if (ft == std::string_view::npos) return std::nullopt;
  std::string_view feet = trimmed(text.substr(0, ft));
  std::string_view inches = trimmed(text.substr(ft + 2));
  if (inches.empty() || !inches.ends_with("in")) return std::nullopt;
  inches = trimmed(inches.substr(0, inches.size() - 2));
  const auto whole = take_digits(feet);
  if (!whole || !feet.empty()) return std::nullopt;
  auto part = take_fraction(inches);
  if (!part) part = take_number(inches);
  if (!part || !inches.empty() || *part < 0 || *part >= 12) return std::nullopt;
  return (12 * *whole + *part) * k_inch;
}

std::string no_number(std::string_view text, Dimension dimension, const std::string& what) {
  return fmt::format(
      "{} '{}' is no {}; write a number with its unit, as in '{}'", what, text, noun(dimension),
      dimension == Dimension::area ? "12 AWG" : fmt::format("{} {}", 10, first_unit(dimension)));
}

std::string no_unit(std::string_view text, Dimension dimension, const std::string& what) {
  return fmt::format("{} {} has no unit; write '{} {}'", what, text, text, first_unit(dimension));
}

std::string wrong_unit(std::string_view name, Dimension dimension, const std::string& what) {
  std::string_view rest = name;
  if (rest[0] == ',') return fmt::format("{}: a comma is no decimal point here; write 1.5, not 1,5", what);
  if (const Unit* other = find_unit(name))
    return fmt::format("{}: '{}' is a unit of {}; {} takes {}", what, name, noun(other->dimension),
                       with_article(noun(dimension)), units_of(dimension));
  std::vector<std::string> names;
  for (const Unit& unit : k_units)
    if (unit.dimension == dimension) names.emplace_back(unit.name);
  return fmt::format("{}: unknown unit '{}'{}; {} takes {}", what, name,
                     netlists::nearest_hint(std::string(name), names), with_article(noun(dimension)),
                     units_of(dimension));
}

}  // namespace

std::variant<double, std::string> parse_quantity(const std::string& text, Dimension dimension,
                                                 const std::string& what) {
  const std::string letters = plain_letters(text.substr(0, 200));
  const std::string_view whole = trimmed(letters);
  if (whole.empty()) return no_number(whole, dimension, what);
  if (dimension == Dimension::area && whole.ends_with("AWG")) {
    const auto size = trimmed(whole.substr(0, whole.size() - 3));
    if (const auto area = gauge_area(size)) return *area;
    return fmt::format("{} '{}' is no AWG size; write 40 to 0, or 1/0 to 4/0, as in '12 AWG'", what, whole);
  }
  if (dimension == Dimension::length)
    if (const auto length = inches_after_feet(whole)) return *length;

  std::string_view rest = whole;
  auto value = take_fraction(rest);
  if (!value) value = take_number(rest);
  if (!value) return no_number(whole, dimension, what);
  if (!std::isfinite(*value)) return fmt::format("{} '{}' is too large a number", what, whole);
  rest = trimmed(rest);
  if (rest.empty()) {
    if (dimension == Dimension::ratio) return *value;
    return no_unit(whole, dimension, what);
  }
  const Unit* unit = find_unit(rest);
  if (unit == nullptr || unit->dimension != dimension) return wrong_unit(rest, dimension, what);
  const double si = *value * unit->factor + unit->offset;
  if (!std::isfinite(si)) return fmt::format("{} '{}' is too large a number", what, whole);
  return si;
}

}  // namespace io
