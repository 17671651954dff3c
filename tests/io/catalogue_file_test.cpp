#include "io/catalogue_file.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <complex>
#include <numbers>

#include "tests/io/readme_example.h"

namespace {

using netlists::CableType;
using netlists::Catalogue;
using netlists::Core;
using netlists::Fault;
using netlists::SystemType;
using testing::ElementsAre;
using testing::HasSubstr;
using testing::IsEmpty;

constexpr double k_inch = 25.4e-3;  // m
constexpr double k_pi = std::numbers::pi;

const Catalogue& builtin() { return io::builtin_catalogue(); }

/// Every entry of every kind, as f(kind, name, source).
template <class F>
void for_each_source(const Catalogue& catalogue, F f) {
  for (const auto& [name, entry] : catalogue.materials) f("material", name, entry.source);
  for (const auto& [name, entry] : catalogue.wires) f("wire", name, entry.source);
  for (const auto& [name, entry] : catalogue.cables) f("cable", name, entry.source);
  for (const auto& [name, entry] : catalogue.raceways) f("raceway", name, entry.source);
  for (const auto& [name, entry] : catalogue.systems) f("system", name, entry.source);
  for (const auto& [name, entry] : catalogue.instruments) f("instrument", name, entry.source);
  for (const auto& [name, entry] : catalogue.loads) f("load", name, entry.source);
}

/// Circular mils of an American size: the AWG formula of ASTM B258, kcmil by definition.
double circular_mils(const std::string& size) {
  if (size.size() == 3 && size[1] != '/') return 1e3 * std::stod(size);
  const int gauge = size.size() == 3 ? 1 - (size[0] - '0') : std::stoi(size);
  return 1e6 * std::pow(0.127e-3 / k_inch * std::pow(92.0, (36 - gauge) / 39.0), 2);
}

double area_of(const std::string& size) {
  return circular_mils(size) * k_pi / 4 * k_inch * k_inch * 1e-6;
}  // m2

TEST(BuiltinCatalogue, GivesEveryEntryASource) {
  for_each_source(builtin(), [](const char* kind, const std::string& name, const std::string& source) {
    SCOPED_TRACE(std::string(kind) + " " + name);
    EXPECT_GE(source.size(), 10u) << source;
    EXPECT_NE(source, "not given");
  });
}

TEST(BuiltinCatalogue, RefersOnlyToMaterialsItHolds) {
  const auto& materials = builtin().materials;
  for (const auto& [name, wire] : builtin().wires) {
    SCOPED_TRACE(name);
    ASSERT_TRUE(materials.contains(wire.metal));
    EXPECT_GT(materials.at(wire.metal).conductivity, 0.0);
    for (const auto& layer : wire.layers) ASSERT_TRUE(materials.contains(layer.material));
  }
  for (const auto& [name, cable] : builtin().cables) {
    SCOPED_TRACE(name);
    ASSERT_TRUE(materials.contains(cable.filler));
    EXPECT_EQ(materials.at(cable.filler).conductivity, 0.0);
    if (cable.armour) {
      EXPECT_GT(materials.at(cable.armour->material).conductivity, 0.0);
    }
    if (!cable.armour) {
      EXPECT_TRUE(materials.contains(cable.jacket));
    }
  }
  for (const auto& [name, raceway] : builtin().raceways) {
    SCOPED_TRACE(name);
    EXPECT_EQ(materials.at(raceway.material).conductivity > 0, raceway.metal());
  }
}

TEST(BuiltinCatalogue, HoldsWhatTheTradeAsksFor) {
  for (const char* name :
       {"H07V-U 1.5", "H07V-U 10", "H07V-R 1.5", "H07V-R 25", "THHN/THWN-2 12", "bare copper 12"})
    EXPECT_TRUE(builtin().wires.contains(name)) << name;
  for (const char* name : {"wireway 4x4", "ladder tray 12"})
    EXPECT_TRUE(builtin().raceways.contains(name)) << name;
  for (const char* name :
       {"dmm", "dmm_1M", "low_impedance", "low_impedance_weak", "analog_5k", "analog_1k", "solenoid_tester",
        "neon_tester", "neon_screwdriver", "test_lamp", "two_pole_detector"})
    EXPECT_TRUE(builtin().instruments.contains(name)) << name;
  for (const char* name : {"resistive", "lamp", "led_lamp", "fluorescent", "motor", "electronic", "drive",
                           "relay_coil", "contactor_coil", "plc_input", "smart_switch", "illuminated_switch"})
    EXPECT_TRUE(builtin().loads.contains(name)) << name;
}

// Solid wire against the AWG formula d = 0.127 mm * 92^((36 - n) / 39) of ASTM B258; its table has four
// decimals.
TEST(BuiltinCatalogue, SolidWireFollowsTheAwgFormula) {
  for (const int gauge : {14, 12, 10}) {
    const double formula = 0.127e-3 * std::pow(92.0, (36 - gauge) / 39.0);
    const std::string size = std::to_string(gauge);
    EXPECT_NEAR(builtin().wires.at("THHN " + size + " solid").conductor_diameter, formula, 5e-5 * k_inch);
    EXPECT_NEAR(builtin().wires.at("bare copper " + size).conductor_diameter, formula, 5e-5 * k_inch);
  }
}

struct AmericanSize {
  const char* size;
  double thhn;  // in, outer diameter
  double xhhw;  // in, outer diameter; 0: not remembered
  int strands;
  double resistance;  // ohm/kft at 75 degC
};

// NEC Chapter 9: Table 5 outer diameters and Table 8 resistances of uncoated copper at 75 degC, public
// transcriptions (XHHW from memory).
constexpr AmericanSize k_nec[] = {
    {"14", 0.111, 0.133, 7, 3.14},     {"12", 0.130, 0.152, 7, 1.98}, {"10", 0.164, 0.176, 7, 1.24},
    {"8", 0.216, 0.236, 7, 0.778},     {"6", 0.254, 0.274, 7, 0.491}, {"4", 0.324, 0.322, 7, 0.308},
    {"3", 0.352, 0, 7, 0.245},         {"2", 0.384, 0.382, 7, 0.194}, {"1", 0.446, 0, 19, 0.154},
    {"1/0", 0.486, 0.482, 19, 0.122},  {"2/0", 0.532, 0, 19, 0.0967}, {"3/0", 0.584, 0, 19, 0.0766},
    {"4/0", 0.642, 0.638, 19, 0.0608}, {"250", 0.711, 0, 37, 0.0515}, {"300", 0.766, 0, 37, 0.0429},
    {"350", 0.817, 0, 37, 0.0367},     {"400", 0.864, 0, 37, 0.0321}, {"500", 0.949, 0.943, 37, 0.0258}};

TEST(BuiltinCatalogue, OuterDiametersAreThoseOfNecTable5) {
  for (const AmericanSize& row : k_nec) {
    SCOPED_TRACE(row.size);
    const auto& thhn = builtin().wires.at(std::string("THHN ") + row.size);
    EXPECT_NEAR(thhn.outer_diameter() / k_inch, row.thhn, 1e-9);  // follows exactly from the walls of UL 83
    EXPECT_EQ(thhn.strands, row.strands);
    const auto& xhhw = builtin().wires.at(std::string("XHHW-2 ") + row.size);
    if (row.xhhw > 0) {
      EXPECT_NEAR(xhhw.outer_diameter() / k_inch, row.xhhw, 1e-9);
    }
  }
}

// The entries stand at 20 degC, computed from the area; Table 8 is another source, rounded to three digits.
TEST(BuiltinCatalogue, ResistancesAreThoseOfNecTable8) {
  const auto& copper = builtin().materials.at("copper");
  const double warm = 1 + copper.temperature_coefficient * (75 - 20);
  const auto expect = [&](const std::string& wire, double per_kft) {
    const double table = per_kft / (1000 * 12 * k_inch);  // ohm/m
    EXPECT_NEAR(builtin().wires.at(wire).resistance * warm, table, 0.01 * table) << wire;
  };
  for (const AmericanSize& row : k_nec) expect(std::string("THHN ") + row.size, row.resistance);
  for (const AmericanSize& row : k_nec) expect(std::string("XHHW-2 ") + row.size, row.resistance);
  expect("THHN 14 solid", 3.07);
  expect("THHN 12 solid", 1.93);
  expect("THHN 10 solid", 1.21);
  expect("bare copper 8", 0.764);
}

// A bundle of n strands in k rings is 2k+1 strands across; their copper must come to the size's area. Table 8
// rounds to 0.001 in, which is 1.4 % of the area of 14 AWG.
TEST(BuiltinCatalogue, StrandsAddUpToTheSize) {
  for (const AmericanSize& row : k_nec) {
    const auto& wire = builtin().wires.at(std::string("THHN ") + row.size);
    const double strand = wire.conductor_diameter / (row.strands == 7 ? 3 : row.strands == 19 ? 5 : 7);
    EXPECT_NEAR(wire.strands * k_pi / 4 * strand * strand, area_of(row.size), 0.02 * area_of(row.size))
        << row.size;
  }
}

// IEC 60228, plain copper, class 1 and 2 alike, ohm/km at 20 degC (several public tables agree). Annealed
// copper of the entry's own diameter must stay under that greatest value, and not by more than a tenth.
TEST(BuiltinCatalogue, MetricWiresAreThoseOfIec60228) {
  const std::vector<std::pair<const char*, double>> table{
      {"1.5", 12.1}, {"2.5", 7.41}, {"4", 4.61}, {"6", 3.08}, {"10", 1.83}, {"16", 1.15}, {"25", 0.727}};
  for (const auto& [size, ohms] : table) {
    for (const char* family : {"H07V-U ", "H07V-R "}) {
      const auto found = builtin().wires.find(std::string(family) + size);
      if (found == builtin().wires.end()) {
        EXPECT_STREQ(family, "H07V-U ") << size;  // class 1 ends at 10 mm2
        continue;
      }
      SCOPED_TRACE(found->first);
      const auto& wire = found->second;
      EXPECT_NEAR(wire.resistance, ohms * 1e-3, 1e-9);
      const double strand = wire.conductor_diameter / (wire.strands == 7 ? 3 : 1);
      const double least = 1.7241e-8 / (wire.strands * k_pi / 4 * strand * strand);
      EXPECT_LT(least, wire.resistance);
      EXPECT_GT(least, 0.9 * wire.resistance);
    }
  }
}

// NEC Chapter 9 Table 4, total area of 100 % in square inches (from memory): another column than the inside
// diameters the entries hold. Walls of EMT after UL 797 (from memory).
TEST(BuiltinCatalogue, RacewaysAreThoseOfNecTable4) {
  struct Row {
    const char* size;
    double emt, rmc, imc, pvc, emt_wall;
  };
  constexpr Row k_table[] = {
      {"1/2", 0.304, 0.314, 0.342, 0.285, 0.042},      {"3/4", 0.533, 0.549, 0.586, 0.508, 0.049},
      {"1", 0.864, 0.887, 0.959, 0.832, 0.057},        {"1 1/4", 1.496, 1.526, 1.647, 1.453, 0.065},
      {"1 1/2", 2.036, 2.071, 2.225, 1.986, 0.065},    {"2", 3.356, 3.408, 3.630, 3.291, 0.065},
      {"2 1/2", 5.858, 4.866, 5.135, 4.695, 0.072},    {"3", 8.846, 7.499, 7.922, 7.268, 0.072},
      {"3 1/2", 11.545, 10.010, 10.584, 9.737, 0.083}, {"4", 14.753, 12.882, 13.631, 12.554, 0.083}};
  const auto area = [](const std::string& name) {
    const double d = builtin().raceways.at(name).inner_diameter / k_inch;
    return k_pi / 4 * d * d;
  };
  for (const Row& row : k_table) {
    const std::string size = row.size;
    SCOPED_TRACE(size);
    EXPECT_NEAR(area("EMT " + size), row.emt, 1e-3);
    EXPECT_NEAR(area("RMC " + size), row.rmc, 1e-3);
    EXPECT_NEAR(area("IMC " + size), row.imc, 1e-3);
    EXPECT_NEAR(area("PVC 40 " + size), row.pvc, 1e-3);
    const auto& emt = builtin().raceways.at("EMT " + size);
    EXPECT_NEAR((emt.outer_diameter - emt.inner_diameter) / 2 / k_inch, row.emt_wall, 1e-9);
    EXPECT_EQ(builtin().raceways.at("RMC " + size).outer_diameter,
              builtin().raceways.at("PVC 40 " + size).outer_diameter);
  }
}

std::complex<double> potential(const SystemType& system, const std::string& pole) {
  for (const auto& line : system.lines)
    if (line.name == pole) return std::polar(line.volts, line.angle);
  EXPECT_EQ(pole, "neutral");
  EXPECT_TRUE(system.neutral);
  return system.neutral_volts;
}

double between(const std::string& system, const std::string& a, const std::string& b) {
  const SystemType& type = builtin().systems.at(system);
  return std::abs(potential(type, a) - potential(type, b));
}

// Nominal voltages of ANSI C84.1 and IEC 60038 (from memory). Names are rounded: 120 sqrt(3) = 207.8, 277
// sqrt(3) = 479.8, 230 sqrt(3) = 398.4, hence 0.5 %.
TEST(BuiltinCatalogue, SystemsHaveTheirNominalVoltages) {
  struct Row {
    const char* system;
    const char* a;
    const char* b;
    double volts;
  };
  constexpr Row k_rows[] = {{"120/240", "A", "neutral", 120},
                            {"120/240", "A", "B", 240},
                            {"208Y/120", "A", "neutral", 120},
                            {"208Y/120", "A", "B", 208},
                            {"208Y/120", "B", "C", 208},
                            {"208Y/120", "C", "A", 208},
                            {"120/208 single-phase", "A", "B", 208},
                            {"480Y/277", "C", "neutral", 277},
                            {"480Y/277", "B", "C", 480},
                            {"600Y/347", "A", "neutral", 347},
                            {"600Y/347", "A", "C", 600},
                            {"400Y/230", "B", "neutral", 230},
                            {"400Y/230", "A", "B", 400},
                            {"240 delta high leg", "A", "neutral", 120},
                            {"240 delta high leg", "C", "neutral", 120},
                            {"240 delta high leg", "B", "neutral", 208},
                            {"240 delta high leg", "A", "B", 240},
                            {"240 delta high leg", "B", "C", 240},
                            {"240 delta high leg", "C", "A", 240},
                            {"240 delta corner-grounded", "A", "B", 240},
                            {"240 delta corner-grounded", "C", "B", 240},
                            {"480 delta ungrounded", "A", "B", 480},
                            {"480 delta ungrounded", "B", "C", 480},
                            {"230 IT", "A", "B", 230},
                            {"230 IT", "C", "A", 230},
                            {"120 two-wire", "A", "B", 120},
                            {"230 two-wire", "A", "B", 230},
                            {"24 two-wire", "A", "B", 24},
                            {"120 two-wire with neutral", "A", "neutral", 120},
                            {"110 centre-tapped", "A", "B", 110},
                            {"110 centre-tapped", "A", "neutral", 55},
                            {"230 single-phase", "A", "neutral", 230},
                            {"100/200", "A", "B", 200}};
  for (const Row& row : k_rows)
    EXPECT_NEAR(between(row.system, row.a, row.b), row.volts, 0.005 * row.volts)
        << row.system << " " << row.a << row.b;
}

// Lines of three-phase systems follow each other A, B, C: V_AB leads V_BC leads V_CA by a third of a turn.
TEST(BuiltinCatalogue, ThreePhaseSystemsTurnAToBToC) {
  for (const auto& [name, system] : builtin().systems) {
    if (system.lines.size() != 3) continue;
    SCOPED_TRACE(name);
    const auto ab = potential(system, "A") - potential(system, "B");
    const auto bc = potential(system, "B") - potential(system, "C");
    EXPECT_NEAR(std::arg(ab / bc), 2 * k_pi / 3, 1e-5);
  }
}

TEST(BuiltinCatalogue, GroundsThePoleTheTradeGrounds) {
  const auto& systems = builtin().systems;
  for (const char* name : {"120/240", "208Y/120", "480Y/277", "400Y/230", "240 delta high leg"}) {
    EXPECT_EQ(systems.at(name).grounded_pole, "neutral") << name;
    EXPECT_EQ(systems.at(name).default_grounding, "solid") << name;
  }
  EXPECT_EQ(systems.at("240 delta corner-grounded").grounded_pole, "B");
  EXPECT_EQ(systems.at("240 delta corner-grounded").default_grounding, "corner");
  EXPECT_EQ(systems.at("480 delta ungrounded").default_grounding, "none");
  EXPECT_EQ(systems.at("230 IT").default_grounding, "none");
  EXPECT_EQ(systems.at("120 two-wire").default_grounding, "isolated");
}

// The basis the entries state: prospective fault currents of a line, and 3 % of 5 kVA at 120 V.
TEST(BuiltinCatalogue, SourceImpedancesFollowFromTheirStatedBasis) {
  const auto ohms = [](const char* name) {
    const SystemType& system = builtin().systems.at(name);
    return std::hypot(system.impedance_resistance, system.impedance_reactance);
  };
  EXPECT_NEAR(120 / ohms("208Y/120"), 10e3, 10);
  EXPECT_NEAR(277 / ohms("480Y/277"), 14e3, 14);
  EXPECT_NEAR(230 / ohms("400Y/230"), 6e3, 6);
  EXPECT_NEAR(240 / std::sqrt(3.0) / ohms("240 delta corner-grounded"), 10e3, 10);
  EXPECT_NEAR(2 * ohms("120 two-wire"), 0.03 * 120 * 120 / 5e3, 1e-4);
}

// 5 kohm per volt of the range in force (common practice).
TEST(BuiltinCatalogue, NeedleInstrumentsLoadByTheirRange) {
  const auto& ranges = builtin().instruments.at("analog_5k").ranges;
  const std::vector<std::pair<double, double>> expected{
      {2.5, 12.5e3}, {10, 50e3}, {50, 250e3}, {250, 1.25e6}, {500, 2.5e6}};
  ASSERT_EQ(ranges.size(), expected.size());
  for (std::size_t i = 0; i < ranges.size(); ++i) {
    EXPECT_NEAR(ranges[i].full_scale, expected[i].first, 1e-9);
    EXPECT_NEAR(ranges[i].resistance, expected[i].second, 1e-6);
  }
  EXPECT_DOUBLE_EQ(builtin().instruments.at("dmm").resistance, 10e6);
  EXPECT_DOUBLE_EQ(builtin().instruments.at("dmm").capacitance, 100e-12);
  EXPECT_DOUBLE_EQ(builtin().instruments.at("low_impedance").resistance, 3e3);
  EXPECT_DOUBLE_EQ(builtin().instruments.at("low_impedance").capacitance, 500e-12);
}

// Copper of 100 % IACS has 58.00 MS/m by definition (IEC 60028). PVC of 70 degC lies at 3.6 to 6 in makers'
// tables.
TEST(BuiltinCatalogue, MaterialsAreWhatTheirTablesSay) {
  const auto& materials = builtin().materials;
  EXPECT_NEAR(materials.at("copper").conductivity, 58.00e6, 0.005e6);
  EXPECT_DOUBLE_EQ(materials.at("PVC").permittivity_low, 3.6);
  EXPECT_DOUBLE_EQ(materials.at("PVC").permittivity_high, 6.0);
  EXPECT_DOUBLE_EQ(materials.at("PVC").permittivity, std::sqrt(3.6 * 6.0));
  EXPECT_GT(materials.at("steel").conductivity, 5e6);
  EXPECT_LT(materials.at("steel").conductivity, 7e6);
  EXPECT_GE(materials.at("steel").relative_permeability, 100);
  EXPECT_LE(materials.at("steel").relative_permeability, 300);
}

/// How far a core stays inside jacket or armour: sampled around its outline, against the stadium of the
/// inside.
double clearance_inside(const CableType& cable, const Core& core) {
  const double height =
      cable.armour ? cable.armour->inner_diameter : cable.height - 2 * cable.jacket_thickness;
  const double width = cable.armour ? cable.armour->inner_diameter : cable.width - 2 * cable.jacket_thickness;
  double least = 1.0;
  for (int i = 0; i < 720; ++i) {
    const double x = core.x + core.wire.outer_diameter() / 2 * std::cos(i * k_pi / 360);
    const double y = core.y + core.wire.outer_diameter() / 2 * std::sin(i * k_pi / 360);
    const double flat = (width - height) / 2;
    least = std::min(least, height / 2 - std::hypot(std::abs(x) > flat ? std::abs(x) - flat : 0.0, y));
  }
  return least;
}

TEST(BuiltinCatalogue, CoresFitTheirCables) {
  for (const auto& [name, cable] : builtin().cables) {
    for (const Core& core : cable.cores) {
      SCOPED_TRACE(name + " " + core.role);
      EXPECT_GE(clearance_inside(cable, core), 0.0);
      for (const Core& other : cable.cores) {
        if (other.role == core.role) continue;
        const double apart = std::hypot(core.x - other.x, core.y - other.y);
        EXPECT_GE(apart, (core.wire.outer_diameter() + other.wire.outer_diameter()) / 2) << other.role;
      }
    }
  }
}

std::vector<std::string> roles(const std::string& cable) {
  std::vector<std::string> names;
  for (const Core& core : builtin().cables.at(cable).cores) names.push_back(core.role);
  return names;
}

TEST(BuiltinCatalogue, CoresHaveTheirRoles) {
  for (const char* name : {"NM-B 14-2", "NM-B 12-2", "NM-B 10-2", "MC 12-2"})
    EXPECT_THAT(roles(name), ElementsAre("hot", "neutral", "ground")) << name;
  for (const char* name : {"NM-B 14-3", "NM-B 12-3", "MC 12-3"})
    EXPECT_THAT(roles(name), ElementsAre("hot", "second", "neutral", "ground")) << name;
  for (const char* name : {"twin and earth 1.5", "twin and earth 2.5"})
    EXPECT_THAT(roles(name), ElementsAre("line", "neutral", "cpc")) << name;
  for (const char* name : {"NYM-J 3x1.5", "NYM-J 3x2.5"})
    EXPECT_THAT(roles(name), ElementsAre("line", "neutral", "ground")) << name;
  EXPECT_THAT(roles("NYM-J 5x1.5"), ElementsAre("line1", "line2", "line3", "neutral", "ground"));
  EXPECT_THAT(roles("control cable 7x1.5"), ElementsAre("1", "2", "3", "4", "5", "6", "7"));
  EXPECT_TRUE(builtin().cables.at("MC 12-2").armour.has_value());
}

// Outline and insulation of a maker's table put the cores of NM-B 14-2 0.220 in apart, the bare ground
// midway: 0.372 - 2 * 0.025 - 0.102 = 0.220.
TEST(BuiltinCatalogue, NmbCoresAreAsFarApartAsTheOutlineSays) {
  const CableType& cable = builtin().cables.at("NM-B 14-2");
  EXPECT_NEAR(cable.cores[1].x - cable.cores[0].x, 0.220 * k_inch, 0.0005 * k_inch);
  EXPECT_EQ(cable.cores[2].x, 0.0);
  EXPECT_TRUE(cable.cores[2].wire.layers.empty());
  EXPECT_TRUE(cable.flat());
  EXPECT_FALSE(builtin().cables.at("NYM-J 3x1.5").flat());
}

struct Read {
  Catalogue catalogue = builtin();
  std::vector<std::string> messages;
};

/// Reads entries on top of the built-in ones, after the line that names the format.
Read read(const std::string& entries) {
  Read result;
  std::vector<Fault> faults;
  io::add_catalogue_text("format: idlewire-catalogue/1\n" + entries, "mine.yaml", result.catalogue, faults);
  for (const Fault& fault : faults) result.messages.push_back(to_string(fault));
  return result;
}

TEST(CatalogueText, AddsEntriesThatReferToEachOtherInAnyOrder) {
  const Read result = read(R"(
sources: {measured: measured on site with a bridge at 1 kHz}
cables:
  bell 2x1:
    {diameter: 6 mm, jacket: {material: PVC, thickness: 0.8 mm}, filler: air, source: [measured, a sketch],
     cores: [{role: a, wire: bell core, x: -1.1 mm}, {role: b, wire: bell core, x: 1.1 mm}]}
wires:
  bell core:
    {also: [old bell core], diameter: 1 mm, resistance: 22 ohm/km, source: measured,
     insulation: [{material: gum, thickness: 0.5 mm}]}
materials:
  gum: {permittivity: [2, 8], loss_tangent: 0.02, source: a guess}
)");
  EXPECT_THAT(result.messages, IsEmpty());
  const CableType& cable = result.catalogue.cables.at("bell 2x1");
  EXPECT_EQ(cable.source, "measured on site with a bridge at 1 kHz; a sketch");
  EXPECT_NEAR(cable.cores[1].wire.outer_diameter(), 2e-3, 1e-12);
  EXPECT_NEAR(cable.cores[1].wire.resistance, 22e-3, 1e-12);
  EXPECT_EQ(cable.cores[1].wire.name, "bell core");
  EXPECT_EQ(result.catalogue.wires.at("old bell core").name, "bell core");
  EXPECT_DOUBLE_EQ(result.catalogue.materials.at("gum").permittivity, 4.0);
}

TEST(CatalogueText, ReplacesAnEntryUnderAllItsNames) {
  const Read result =
      read("wires: {THHN 12: {diameter: 2.05 mm, resistance: 1.62 ohm/1000 ft, source: drum label}}\n");
  EXPECT_THAT(result.messages, IsEmpty());
  EXPECT_NEAR(result.catalogue.wires.at("THHN/THWN-2 12").conductor_diameter, 2.05e-3, 1e-12);
  EXPECT_NEAR(result.catalogue.wires.at("THHN 12").resistance, 1.62 / 304.8, 1e-12);
}

TEST(CatalogueText, ReportsEveryFaultWithItsPlace) {
  const Read result = read(R"(wires:
  one: {diameter: 2, resistance: 5 ohm, insulation: [{material: PVX, thickness: 1 mm}], source: x}
  two: {diametre: 2 mm, strands: 8, source: x}
instruments:
  mine: {resistance: 10 mohm, source: x}
systems:
  odd: {lines: {A: {volts: 120 V}}, grounded_pole: B, default_grounding: solid, source: x,
        impedance: {resistance: 1 mohm, reactance: 1 mohm}}
)");
  EXPECT_THAT(
      result.messages,
      testing::UnorderedElementsAre(
          HasSubstr("mine.yaml:3:19: error: wire 'one': diameter 2 has no unit"),
          HasSubstr("mine.yaml:3:34: error: wire 'one': resistance '5 ohm' is not per length"),
          HasSubstr("mine.yaml:3:65: error: wire 'one': material 'PVX' is not in the catalogue; the nearest "
                    "is 'PVC'"),
          HasSubstr("mine.yaml:4:9: error: wire 'two': unknown key 'diametre'; the nearest is 'diameter'"),
          HasSubstr("mine.yaml:4:3: error: wire 'two': diameter is missing"),
          HasSubstr("mine.yaml:4:34: error: wire 'two': 8 strands do not lie in rings"),
          HasSubstr("mine.yaml:6:22: warning: instrument 'mine': resistance 0.01 ohm is low"),
          HasSubstr("mine.yaml:8:52: error: system 'odd': grounded_pole 'B' is no pole of it")));
}

TEST(CatalogueText, RefusesCoresThatDoNotFit) {
  const Read result = read(R"(cables:
  tight:
    {diameter: 6 mm, jacket: {material: PVC, thickness: 0.8 mm}, filler: air, source: x,
     cores: [{role: a, wire: THHN 12, x: -1 mm}, {role: b, wire: THHN 12, x: 1 mm}]}
)");
  EXPECT_THAT(
      result.messages,
      ElementsAre(
          HasSubstr("core 'a' reaches 0.451 mm out of the space inside"),
          HasSubstr("core 'b' reaches 0.451 mm out of the space inside"),
          HasSubstr("mine.yaml:3:3: error: cable 'tight': cores 'a' and 'b' overlap: centres 2.000 mm "
                    "apart, radii sum to 3.302 mm")));
}

// A jacket may lie over an armour; together they must not outgrow the outline.
TEST(CatalogueText, ReadsAJacketOverAnArmour) {
  const std::string start = "cables: {armoured: {filler: air, source: x, diameter: ";
  const std::string rest = R"(, jacket: {material: PVC, thickness: 1 mm},
    armour: {material: steel, inner_diameter: 8 mm, outer_diameter: 10 mm}, cores: [{role: a, wire: THHN 12, x: 0 mm}]}})";
  const Read result = read(start + "12 mm" + rest);
  EXPECT_THAT(result.messages, IsEmpty());
  EXPECT_DOUBLE_EQ(result.catalogue.cables.at("armoured").jacket_thickness, 1e-3);
  EXPECT_THAT(read(start + "11 mm" + rest).messages,
              ElementsAre(HasSubstr("armour and jacket come to 12.000 mm, the outline is 11.000 mm")));
  EXPECT_THAT(read("cables: {bare: {filler: air, source: x, diameter: 5 mm, cores: [{role: a, wire: THHN 12, "
                   "x: 0 mm}]}}")
                  .messages,
              ElementsAre(HasSubstr("cable 'bare': has neither a jacket nor an armour")));
}

TEST(CatalogueText, RefusesWhatIsNeitherMetalNorInsulatorOrBoth) {
  const Read result = read(R"(materials:
  odd: {permittivity: 3, resistivity: 1e-7 ohm m, source: x}
  none: {loss_tangent: 0.1, source: x}
raceways:
  pipe: {kind: metal_tube, inner_diameter: 20 mm, outer_diameter: 22 mm, material: PVC, source: x}
)");
  EXPECT_THAT(result.messages, ElementsAre(HasSubstr("material 'odd': takes one of"),
                                           HasSubstr("material 'none': takes one of"),
                                           HasSubstr("raceway 'pipe': material 'PVC' is no metal")));
}

TEST(CatalogueText, WarnsOfAnEntryWithoutASource) {
  const Read result = read("loads: {kettle: {default_power: 2 kW}}\n");
  EXPECT_THAT(result.messages, ElementsAre(HasSubstr("warning: load 'kettle': no source")));
  EXPECT_DOUBLE_EQ(result.catalogue.loads.at("kettle").default_power, 2000);
}

// What the README shows is read as it stands.
TEST(CatalogueText, ReadsTheExampleOfTheReadme) {
  Catalogue catalogue = builtin();
  std::vector<Fault> faults;
  io::add_catalogue_text(io::readme_example("The catalogue"), "mine.yaml", catalogue, faults);
  for (const Fault& fault : faults) ADD_FAILURE() << to_string(fault);
  EXPECT_EQ(catalogue.cables.at("bell 2x1").source,
            "data sheet of the cable on the drum, 2019; the positions measured on a cut end");
  EXPECT_EQ(catalogue.systems.at("415Y/240").lines.size(), 3u);
  EXPECT_EQ(catalogue.instruments.at("old needle").ranges.size(), 2u);
}

TEST(CatalogueText, NamesItsFormat) {
  Catalogue catalogue = builtin();
  std::vector<Fault> faults;
  io::add_catalogue_text("wires: {}\n", "mine.yaml", catalogue, faults);
  ASSERT_EQ(faults.size(), 1u);
  EXPECT_THAT(to_string(faults[0]), HasSubstr("format is missing"));
  faults.clear();
  io::add_catalogue_text("format: idlewire/1\n", "mine.yaml", catalogue, faults);
  ASSERT_EQ(faults.size(), 1u);
  EXPECT_THAT(to_string(faults[0]), HasSubstr("format 'idlewire/1' is not one of idlewire-catalogue/1"));
}

}  // namespace
