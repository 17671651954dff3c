#include "io/catalogue_text.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <sstream>
#include <stdexcept>

#include "io/catalogue_file.h"
#include "io/text_layout.h"
#include "netlists/findings.h"

namespace {

using testing::HasSubstr;
using testing::Not;

/// One line again, however it was wrapped.
std::string unwrapped(const std::string& text) {
  std::istringstream words(text);
  std::string line, word;
  while (words >> word) line += (line.empty() ? "" : " ") + word;
  return line;
}

std::string list() { return io::catalogue_list(io::builtin_catalogue(), 100); }
std::string entry(const std::string& name) {
  return unwrapped(io::catalogue_entry(io::builtin_catalogue(), name, 100));
}

int widest_line(const std::string& text) {
  std::istringstream lines(text);
  int widest = 0;
  for (std::string line; std::getline(lines, line);) widest = std::max(widest, io::columns_of(line));
  return widest;
}

std::string refusal(const std::string& name) {
  try {
    entry(name);
  } catch (const std::invalid_argument& refused) {
    return refused.what();
  }
  return "";
}

TEST(CatalogueList, NamesEveryEntryOnce) {
  const std::string names = unwrapped(list());
  const auto& catalogue = io::builtin_catalogue();
  for (const auto& [name, wire] : catalogue.wires)
    if (name == wire.name) {
      EXPECT_THAT(names, HasSubstr(name));
    }
  for (const auto& [name, cable] : catalogue.cables) EXPECT_THAT(names, HasSubstr(name));
  for (const auto& [name, instrument] : catalogue.instruments) EXPECT_THAT(names, HasSubstr(name));
  EXPECT_THAT(names, Not(HasSubstr("THHN/THWN-2")));  // only another name of an entry
}

TEST(CatalogueList, PutsSizesInAscendingOrder) {
  EXPECT_THAT(unwrapped(list()), HasSubstr("THHN 14, THHN 12, THHN 10, THHN 8"));
  EXPECT_THAT(unwrapped(list()), HasSubstr("EMT 1, EMT 1 1/4, EMT 1 1/2, EMT 2, EMT 2 1/2"));
}

TEST(CatalogueList, FitsItsWidthAndBreaksNoName) {
  EXPECT_LE(widest_line(list()), 100);
  const std::string narrow = io::catalogue_list(io::builtin_catalogue(), 40);
  EXPECT_LE(widest_line(narrow), 40);
  EXPECT_THAT(narrow, HasSubstr("control cable 7x1.5"));
}

TEST(CatalogueEntry, ShowsAWireWithUnitsAndSources) {
  const std::string text = entry("THHN 12");
  EXPECT_THAT(text, HasSubstr("THHN 12 (wire)"));
  EXPECT_THAT(text, HasSubstr("conductor 2.337 mm (0.092 in), 7 strands"));
  EXPECT_THAT(text, HasSubstr("resistance 5.315 ohm/km at 20 degC"));
  EXPECT_THAT(text, HasSubstr("insulation PVC, 0.381 mm (0.015 in) insulation nylon, 0.102 mm (0.004 in)"));
  EXPECT_THAT(text, HasSubstr("over all 3.302 mm"));
  EXPECT_THAT(text, HasSubstr("also called THHN/THWN-2 12"));
  EXPECT_THAT(text, HasSubstr("source diameter of the bundle and strands: NEC Chapter 9 Table 8"));
  EXPECT_EQ(entry("THHN/THWN-2 12"), text);
}

TEST(CatalogueEntry, ShowsEveryKind) {
  EXPECT_THAT(entry("MC 12-2"), HasSubstr("armour aluminium, inside 7.620 mm (0.3 in)"));
  EXPECT_THAT(entry("NM-B 14-2"), HasSubstr("core neutral THHN 14 solid, x 2.79 mm, y 0.00 mm"));
  EXPECT_THAT(entry("EMT 3/4"), HasSubstr("inside diameter 20.930 mm (0.824 in)"));
  EXPECT_THAT(entry("wireway 4x4"), HasSubstr("inside 101.600 mm (4 in) wide"));
  EXPECT_THAT(entry("240 delta high leg"), HasSubstr("B to neutral 207.8 V"));
  EXPECT_THAT(entry("analog_5k"), HasSubstr("range 250 V 1.25 Mohm"));
  EXPECT_THAT(entry("neon_tester"), HasSubstr("judged no, it only lights, buzzes or glows"));
  EXPECT_THAT(entry("electronic"), HasSubstr("standby 106 kohm beside 100 nF"));
  EXPECT_THAT(entry("PVC"), HasSubstr("permittivity 4.648 (3.6 to 6)"));
  EXPECT_THAT(entry("copper"), HasSubstr("conductivity 58 MS/m at 20 degC"));
}

TEST(CatalogueEntry, ShowsAKindOneALine) {
  const std::string text = io::catalogue_entry(io::builtin_catalogue(), "cables", 100);
  EXPECT_THAT(text, HasSubstr("  NYM-J 3x1.5          round, 8.6 mm; line, neutral, ground\n"));
  EXPECT_LE(widest_line(text), 100);
}

TEST(CatalogueEntry, GivesTheNearestForAnUnknownName) {
  EXPECT_EQ(refusal("THNN 12"), "'THNN 12' is not in the catalogue; the nearest is 'THHN 12'");
  EXPECT_EQ(refusal("quite unlike anything"),
            "'quite unlike anything' is not in the catalogue; without a name it lists all there is");
}

TEST(CatalogueEntry, LetsNoControlCharacterThrough) {
  netlists::Catalogue catalogue = io::builtin_catalogue();
  catalogue.wires["x"].name = "x";
  catalogue.wires["x"].source = "a\x1b[2Jb";
  EXPECT_THAT(io::catalogue_entry(catalogue, "x", 100), Not(HasSubstr("\x1b")));
}

TEST(CatalogueEntry, CarriesTheCaution) {
  EXPECT_THAT(unwrapped(list()), HasSubstr(unwrapped(netlists::caution())));
  EXPECT_THAT(entry("THHN 12"), HasSubstr(unwrapped(netlists::caution())));
}

}  // namespace
