#include "io/text_layout.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

namespace {
using namespace io;

TEST(Units, AreThoseOfTheTradeWithSaneDigits) {
  EXPECT_EQ(volts_text(61.23), "61 V");
  EXPECT_EQ(volts_text(119.6), "120 V");
  EXPECT_EQ(volts_text(0.1834), "0.18 V");
  EXPECT_EQ(volts_text(0.01), "0.010 V");
  EXPECT_EQ(volts_text(0.0034), "3.4 mV");
  EXPECT_EQ(volts_text(12500.0), "12 kV");
  EXPECT_EQ(volts_text(0.0), "0 V");
  EXPECT_EQ(ohms_text(530e3), "530 kohm");
  EXPECT_EQ(ohms_text(2.24e6), "2.2 Mohm");
  EXPECT_EQ(ohms_text(0.05), "50 mohm");
  EXPECT_EQ(amperes_text(1.2e-4), "0.12 mA");
  EXPECT_EQ(amperes_text(5.94e-5, 3), "0.0594 mA");
  EXPECT_EQ(amperes_text(2.5e-6), "2.5 uA");
  EXPECT_EQ(amperes_text(537.0), "537 A");
  EXPECT_EQ(phasor_text({0.0, 41.0}), "41.0 V at 90.0 deg");
}

TEST(Units, SayUnknownWhereThereIsNoNumber) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  for (const std::string& text : {volts_text(nan), ohms_text(HUGE_VAL), amperes_text(nan), limit_text(nan),
                                  phasor_text({nan, 0.0}), degrees_text({0.0, nan})})
    EXPECT_EQ(text, "unknown");
}

// A limit from which a conductor counts as live must never be printed above its value.
TEST(Limit, IsNeverOverstated) {
  EXPECT_EQ(limit_text(1.4829), "1.48 V");
  EXPECT_EQ(limit_text(1.4899), "1.48 V");
  EXPECT_EQ(limit_text(9.999), "9.99 V");
  EXPECT_EQ(limit_text(2.83), "2.83 V");
  EXPECT_EQ(limit_text(120.0), "120 V");
  for (double volts = 0.011; volts < 200; volts *= 1.0137)
    EXPECT_LE(std::stod(limit_text(volts)), volts) << limit_text(volts);
}

TEST(Wrap, KeepsEveryWordWithinTheWidth) {
  const std::string text = "a few words and one_very_long_name_that_has_no_blank_in_it to the end";
  std::string joined;
  for (const std::string& line : wrap(text, 12)) {
    EXPECT_LE(columns_of(line), 12) << line;
    joined += line;
  }
  const auto without_blanks = [](std::string s) {
    std::erase(s, ' ');
    return s;
  };
  EXPECT_EQ(without_blanks(joined), without_blanks(text));
}

TEST(Wrap, CountsLettersAndNotBytes) {
  EXPECT_EQ(columns_of("Schaltraum S\xC3\xBC"
                       "d"),
            14);
  EXPECT_EQ(columns_of("u\xCC\x88"), 1);  // u with a combining diaeresis
  for (const std::string& line : wrap("\xC3\xBC\xC3\xBC\xC3\xBC\xC3\xBC\xC3\xBC", 2))
    EXPECT_EQ(line.size() % 2, 0u) << "a letter was torn apart";
}

TEST(Paragraph, HangsItsOtherLinesWhereAsked) {
  EXPECT_EQ(paragraph("  title: ", "one two three four five", 20, 4),
            "  title: one two\n    three four five\n");
  EXPECT_EQ(paragraph("title: ", "one two three", 15), "title: one two\n       three\n");
  EXPECT_EQ(paragraph("", "", 20), "\n");
}

// A name from a model file must not steer the reader's terminal.
TEST(Printable, HoldsNoControlCharacter) {
  EXPECT_EQ(printable("a\x1b[2Jb\x7f\n"), "a?[2Jb??");
  EXPECT_EQ(printable("x\xC2\x9By"), "x?y");  // U+009B, a control sequence introducer
  EXPECT_EQ(printable("S\xC3\xBC"
                      "d"),
            "S\xC3\xBC"
            "d");
}

TEST(TextTable, WrapsLongCellsInsideTheirColumn) {
  TextTable table({{"name", 8}, {"volts", 10, true}});
  table.add({"a-rather-long-name", "61 V"});
  table.add({"b", "7 V"});
  EXPECT_EQ(table.indented(1),
            " name     volts\n"
            " a-        61 V\n"
            " rather-\n"
            " long-\n"
            " name\n"
            " b          7 V\n");
}

}  // namespace
