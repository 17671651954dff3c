#include "io/quantity.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

namespace io {
namespace {

using testing::HasSubstr;

double value(const std::string& text, Dimension dimension) {
  const auto parsed = parse_quantity(text, dimension, "it");
  if (const auto* problem = std::get_if<std::string>(&parsed)) {
    ADD_FAILURE() << text << ": " << *problem;
    return std::nan("");
  }
  return std::get<double>(parsed);
}

std::string problem(const std::string& text, Dimension dimension, const std::string& what) {
  const auto parsed = parse_quantity(text, dimension, what);
  if (const auto* words = std::get_if<std::string>(&parsed)) return *words;
  ADD_FAILURE() << text << " was taken as " << std::get<double>(parsed);
  return "";
}

// The inch is 25.4 mm and the foot 0.3048 m exactly (international yard and pound agreement of 1959).
TEST(ParseQuantity, TakesLengths) {
  EXPECT_DOUBLE_EQ(value("42 m", Dimension::length), 42.0);
  EXPECT_DOUBLE_EQ(value("42m", Dimension::length), 42.0);
  EXPECT_DOUBLE_EQ(value("  4.2e1 m ", Dimension::length), 42.0);
  EXPECT_DOUBLE_EQ(value("80 mm", Dimension::length), 0.08);
  EXPECT_DOUBLE_EQ(value("3 cm", Dimension::length), 0.03);
  EXPECT_DOUBLE_EQ(value("1.2 km", Dimension::length), 1200.0);
  EXPECT_DOUBLE_EQ(value("138 ft", Dimension::length), 42.0624);
  EXPECT_DOUBLE_EQ(value("1 in", Dimension::length), 0.0254);
  EXPECT_DOUBLE_EQ(value("-7.9 mm", Dimension::length), -7.9e-3);
  EXPECT_DOUBLE_EQ(value("15 mil", Dimension::length), 0.381e-3);
}

TEST(ParseQuantity, TakesFractions) {
  EXPECT_DOUBLE_EQ(value("3/4 in", Dimension::length), 0.75 * 0.0254);
  EXPECT_DOUBLE_EQ(value("1 1/4 in", Dimension::length), 1.25 * 0.0254);
  EXPECT_DOUBLE_EQ(value("1-1/4 in", Dimension::length), 1.25 * 0.0254);
  EXPECT_DOUBLE_EQ(value("3/4in", Dimension::length), 0.75 * 0.0254);
  EXPECT_DOUBLE_EQ(value("10 ft 6 in", Dimension::length), 10.5 * 0.3048);
  EXPECT_DOUBLE_EQ(value("10 ft 3 1/2 in", Dimension::length), (123.5) * 0.0254);
}

// Diameters from the wire table of ASTM B258 in mils, from memory: 12 AWG 80.81, 4/0 460.0, 36 AWG 5.000.
TEST(ParseQuantity, TakesWireSizes) {
  const auto diameter_mil = [](const std::string& size) {
    return std::sqrt(4 * value(size, Dimension::area) / std::numbers::pi) / 25.4e-6;
  };
  EXPECT_NEAR(diameter_mil("12 AWG"), 80.81, 0.005);  // the table's last digit
  EXPECT_NEAR(diameter_mil("14 AWG"), 64.08, 0.005);
  EXPECT_NEAR(diameter_mil("4/0 AWG"), 460.0, 0.05);
  EXPECT_NEAR(diameter_mil("1/0 AWG"), 324.9, 0.05);
  EXPECT_NEAR(diameter_mil("0 AWG"), 324.9, 0.05);
  EXPECT_NEAR(diameter_mil("36 AWG"), 5.0, 1e-9);
  EXPECT_DOUBLE_EQ(value("2.5 mm2", Dimension::area), 2.5e-6);
  EXPECT_DOUBLE_EQ(value("2.5 mm\u00b2", Dimension::area), 2.5e-6);
  EXPECT_NEAR(value("500 kcmil", Dimension::area), 253.35e-6, 0.005e-6);  // 253.35 mm2, by definition
}

TEST(ParseQuantity, TakesEveryOtherDimension) {
  EXPECT_DOUBLE_EQ(value("30 mohm", Dimension::resistance), 0.03);
  EXPECT_DOUBLE_EQ(value("30 Mohm", Dimension::resistance), 30e6);
  EXPECT_DOUBLE_EQ(value("300 kohm", Dimension::resistance), 300e3);
  EXPECT_DOUBLE_EQ(value("3 k\u03a9", Dimension::resistance), 3e3);
  EXPECT_DOUBLE_EQ(value("2.2 nF", Dimension::capacitance), 2.2e-9);
  EXPECT_DOUBLE_EQ(value("100 pF", Dimension::capacitance), 100e-12);
  EXPECT_DOUBLE_EQ(value("0.47 \u00b5F", Dimension::capacitance), 0.47e-6);
  EXPECT_DOUBLE_EQ(value("12 uH", Dimension::inductance), 12e-6);
  EXPECT_DOUBLE_EQ(value("0.48 kV", Dimension::voltage), 480.0);
  EXPECT_DOUBLE_EQ(value("0.5 mA", Dimension::current), 0.5e-3);
  EXPECT_DOUBLE_EQ(value("5 uA", Dimension::current), 5e-6);
  EXPECT_DOUBLE_EQ(value("900 W", Dimension::power), 900.0);
  EXPECT_DOUBLE_EQ(value("1.5 kVA", Dimension::apparent), 1500.0);
  EXPECT_DOUBLE_EQ(value("60 Hz", Dimension::frequency), 60.0);
  EXPECT_DOUBLE_EQ(value("-30 deg", Dimension::angle), -std::numbers::pi / 6);
  EXPECT_DOUBLE_EQ(value("5 %", Dimension::ratio), 0.05);
  EXPECT_DOUBLE_EQ(value("0.7", Dimension::ratio), 0.7);
  EXPECT_DOUBLE_EQ(value("20 degC", Dimension::temperature), 20.0);
  EXPECT_NEAR(value("68 degF", Dimension::temperature), 20.0, 1e-12);  // 20 degC by definition
  EXPECT_DOUBLE_EQ(value("100 ohm m", Dimension::resistivity), 100.0);
  EXPECT_DOUBLE_EQ(value("58e6 S/m", Dimension::conductivity), 58e6);
}

TEST(ParseQuantity, SaysWhatToWriteForABareNumber) {
  EXPECT_EQ(problem("18", Dimension::length, "length"), "length 18 has no unit; write '18 m'");
  EXPECT_EQ(problem("12", Dimension::area, "size"), "size 12 has no unit; write '12 mm2'");
  EXPECT_EQ(problem("60", Dimension::frequency, "frequency"), "frequency 60 has no unit; write '60 Hz'");
}

TEST(ParseQuantity, NamesTheUnitThatDoesNotFit) {
  EXPECT_EQ(problem("18 V", Dimension::length, "length"),
            "length: 'V' is a unit of voltage; a length takes m, um, mm, cm, km, ft, in or mil");
  EXPECT_EQ(problem("18 Hx", Dimension::frequency, "frequency"),
            "frequency: unknown unit 'Hx'; the nearest is 'Hz'; a frequency takes Hz or kHz");
  EXPECT_THAT(problem("30 MOHM", Dimension::resistance, "resistance"), HasSubstr("unknown unit 'MOHM'"));
}

// Strange texts, each refused with words; none is taken for a number.
TEST(ParseQuantity, RefusesWhatIsNoQuantity) {
  for (const std::string text :
       {"",       " ",       "m",     "nan m",  "inf m",       "-inf m",   "NaN",
        "0x10 m", "1e999 m", "--3 m", "1/0 in", "3//4 in",     "3/4/5 in", "1 m 2",
        "1,5 m",  "m 3",     "1 2 m", "1e m",   "10 ft 12 in", "\xff m",   "999999999999999999999999/1 in"}) {
    const auto parsed = parse_quantity(text, Dimension::length, "it");
    EXPECT_TRUE(std::holds_alternative<std::string>(parsed)) << text;
  }
  EXPECT_EQ(problem("1e999 m", Dimension::length, "length"), "length '1e999 m' is too large a number");
  EXPECT_EQ(problem("long", Dimension::length, "length"),
            "length 'long' is no length; write a number with its unit, as in '10 m'");
  EXPECT_EQ(problem("1,5 m", Dimension::length, "length"),
            "length: a comma is no decimal point here; write 1.5, not 1,5");
  EXPECT_THAT(problem("5/0 AWG", Dimension::area, "size"), HasSubstr("is no AWG size"));
}

// A megabyte of digits costs no more than any other slip.
TEST(ParseQuantity, CutsEndlessTexts) {
  EXPECT_LT(problem(std::string(1 << 20, '7'), Dimension::length, "length").size(), 600u);
}

}  // namespace
}  // namespace io
