// A round conductor by itself: resistance, strands, skin effect.
#include <gtest/gtest.h>

#include <Eigen/Core>
#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>
#include <vector>

#include "engine/constants.h"
#include "engine/impedance.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
constexpr double k_pi = std::numbers::pi;
constexpr double k_inch = 25.4e-3;                          // m
constexpr double k_kilofoot = 304.8;                        // m
constexpr Metal k_copper{.conductivity = 1.0 / 1.7241e-8};  // IEC 60028, 100 % IACS at 20 degC

RoundConductor conductor(double diameter, int strands) {
  RoundConductor c;
  c.radius = diameter / 2;
  c.strands = strands;
  c.metal = k_copper;
  return c;
}

// Geometric mean radius over bundle radius, as the line-design handbooks print it (from memory).
TEST(GmrRatio, MatchesTheTableOfConcentricLays) {
  EXPECT_NEAR(gmr_ratio(1), 0.7788, 5e-5);
  EXPECT_NEAR(gmr_ratio(7), 0.7256, 5e-5);
  EXPECT_NEAR(gmr_ratio(19), 0.7577, 6e-5);
  EXPECT_NEAR(gmr_ratio(37), 0.7678, 5e-5);
  EXPECT_NEAR(gmr_ratio(61), 0.7722, 2e-4);
  EXPECT_NEAR(gmr_ratio(91), 0.7743, 5e-5);
  EXPECT_NEAR(gmr_ratio(127), 0.7756, 5e-5);
}

// The definition, strand by strand, against the ring by ring product that the engine takes.
TEST(GmrRatio, IsTheMeanOverAllPairsOfStrands) {
  std::vector<Eigen::Vector2d> centres{{0.0, 0.0}};  // strand radius 1
  for (int ring = 1; ring <= 3; ++ring) {
    for (int i = 0; i < 6 * ring; ++i) {
      const double angle = 2 * k_pi * i / (6 * ring);
      centres.emplace_back(2 * ring * std::cos(angle), 2 * ring * std::sin(angle));
    }
  }
  double sum = 0.0;
  for (std::size_t i = 0; i < centres.size(); ++i) {
    for (std::size_t j = 0; j < centres.size(); ++j) {
      sum += i == j ? -0.25 : std::log((centres[i] - centres[j]).norm());
    }
  }
  EXPECT_NEAR(gmr_ratio(37), std::exp(sum / (37.0 * 37.0)) / 7.0, 1e-13);
}

TEST(GmrRatio, RefusesOtherThanConcentricLays) {
  for (const int strands : {0, -1, 2, 6, 8, 20}) EXPECT_THROW(gmr_ratio(strands), std::invalid_argument);
}

// NEC chapter 9 table 8, uncoated copper at 75 degC. Solid: the gauge's own diameter d = 0.005 in
// 92^((36-n)/39), so only the table's three printed digits and its copper are left.
TEST(DcResistance, MatchesTheNecTableForSolidWires) {
  const struct {
    int gauge;
    double ohm_per_kft;
  } rows[] = {{14, 3.07}, {12, 1.93}, {10, 1.21}, {8, 0.764}};
  for (const auto& row : rows) {
    const double diameter = 0.005 * k_inch * std::pow(92.0, (36 - row.gauge) / 39.0);
    EXPECT_NEAR(dc_resistance(conductor(diameter, 1), 75.0) * k_kilofoot, row.ohm_per_kft,
                0.004 * row.ohm_per_kft);
  }
}

// The same table's stranded rows, from its own bundle diameters. These are printed to 0.001 in, which is up
// to 1.4 % of the area of 14 AWG, and the lay makes the strands 2 % longer than the conductor (ASTM B8, from
// memory): the table must lie 0.5 to 3.5 % above straight strands.
TEST(DcResistance, LiesTheLayBelowTheNecTableForStrandedWires) {
  const struct {
    int strands;
    double inch, ohm_per_kft;
  } rows[] = {{7, 0.073, 3.14},    {7, 0.092, 1.98},    {7, 0.116, 1.24},    {7, 0.146, 0.778},
              {7, 0.184, 0.491},   {7, 0.232, 0.308},   {7, 0.292, 0.194},   {19, 0.332, 0.154},
              {19, 0.372, 0.122},  {19, 0.418, 0.0967}, {19, 0.470, 0.0766}, {19, 0.528, 0.0608},
              {37, 0.575, 0.0515}, {37, 0.681, 0.0367}, {37, 0.813, 0.0258}};
  for (const auto& row : rows) {
    const double straight = dc_resistance(conductor(row.inch * k_inch, row.strands), 75.0) * k_kilofoot;
    EXPECT_GT(row.ohm_per_kft / straight, 1.005) << row.inch;
    EXPECT_LT(row.ohm_per_kft / straight, 1.035) << row.inch;
  }
}

// IEC 60228 class 1 and class 2, the largest resistance allowed at 20 degC, with usual diameters: conductors
// of full measure lie 1 to 8 % below it.
TEST(DcResistance, KeepsIec60228) {
  const struct {
    int strands;
    double millimetres, ohm_per_km;
  } rows[] = {{1, 1.38, 12.1}, {1, 1.78, 7.41}, {1, 2.25, 4.61}, {1, 2.76, 3.08},
              {1, 3.57, 1.83}, {7, 1.59, 12.1}, {7, 2.01, 7.41}, {7, 2.55, 4.61},
              {7, 3.12, 3.08}, {7, 4.05, 1.83}, {7, 5.13, 1.15}, {7, 6.42, 0.727}};
  for (const auto& row : rows) {
    const double r = dc_resistance(conductor(row.millimetres * 1e-3, row.strands), 20.0) * 1e3;
    EXPECT_LT(r, 0.99 * row.ohm_per_km) << row.millimetres;
    EXPECT_GT(r, 0.92 * row.ohm_per_km) << row.millimetres;
  }
}

// Copper's resistance is zero at -234.5 degC when drawn straight on (IEC 60228 annex; IEEE 80).
TEST(DcResistance, FollowsTheTemperature) {
  RoundConductor wire = conductor(2e-3, 1);
  wire.dc_resistance = 7.41e-3;
  EXPECT_DOUBLE_EQ(dc_resistance(wire, 20.0), 7.41e-3);
  EXPECT_NEAR(dc_resistance(wire, 75.0), 7.41e-3 * (234.5 + 75.0) / 254.5, 1e-4 * 7.41e-3);
  EXPECT_NEAR(dc_resistance(wire, -25.0), 7.41e-3 * (234.5 - 25.0) / 254.5, 1e-4 * 7.41e-3);
  EXPECT_THROW(dc_resistance(wire, -240.0), std::invalid_argument);
}

/// A solid wire's internal impedance over its dc resistance where |m a| = x.
Complex skin_ratio(double x) {
  const RoundConductor wire = conductor(2e-3, 1);
  const double dc = dc_resistance(wire, 20.0);
  const double frequency = x * x * dc / (2.0 * k_mu_0);  // |m a|^2 = w mu_0 / (pi dc)
  return internal_impedance(wire, frequency, 20.0) / dc;
}

// mpmath 1.2.1, mp.dps = 30: z = x*e**(1j*pi/4); z/2*besseli(0,z)/besseli(1,z).
TEST(InternalImpedance, MatchesBesselFunctionsOfManyDigits) {
  const struct {
    double x;
    Complex ratio;
  } rows[] = {{0.001, {1.0000000000000052, 1.2499999999999967e-7}},
              {0.1352, {1.0000017402231154, 0.0022848780118997347}},
              {1, {1.0051867313921382, 0.1246759417614929}},
              {3, {1.3180948182937141, 0.95081234860386955}},
              {10, {3.7985760521822556, 3.5202411752047642}},
              {40, {14.395447296633387, 14.138701161272927}},
              {200, {70.961341009244575, 70.710010496797659}},
              {3000, {1060.9102159739887, 1060.6601275648077}},
              {10000, {3535.7839191909896, 3535.5338926726103}}};
  for (const auto& row : rows) {
    EXPECT_NEAR(skin_ratio(row.x).real(), row.ratio.real(), 1e-13 * row.ratio.real()) << row.x;
    EXPECT_NEAR(skin_ratio(row.x).imag(), row.ratio.imag(), 1e-13 * row.ratio.imag()) << row.x;
  }
}

// R/Rdc = 1 + x^4/192 and L = mu_0/(8 pi) at low frequency; both R/Rdc - 1/4 and X/Rdc go to x/(2 sqrt 2) at
// high.
TEST(InternalImpedance, HasTheTextbookLimits) {
  const double low = 0.3, high = 500.0;
  EXPECT_NEAR(skin_ratio(low).real() - 1.0, std::pow(low, 4) / 192.0, 1e-3 * std::pow(low, 4) / 192.0);
  EXPECT_NEAR(skin_ratio(low).imag(), low * low / 8.0, 1e-3 * low * low / 8.0);
  EXPECT_NEAR(skin_ratio(high).real() - 0.25, high / (2 * std::numbers::sqrt2), 1e-3);
  EXPECT_NEAR(skin_ratio(high).imag(), high / (2 * std::numbers::sqrt2), 1e-3);
}

// NEC chapter 9 table 9 gives the dc resistance of table 8 up to 4 AWG, and 0.062 against 0.0608 ohm/kft for
// 4/0 in PVC: 2 % more, of which skin effect is a part and the neighbours' proximity effect the rest.
TEST(InternalImpedance, LeavesBuildingWireNearlyAsAtDc) {
  const RoundConductor four = conductor(0.232 * k_inch, 7);
  EXPECT_LT(internal_impedance(four, 60.0, 75.0).real() / dc_resistance(four, 75.0), 1.001);
  const RoundConductor four_ought = conductor(0.528 * k_inch, 19);
  const double ratio = internal_impedance(four_ought, 60.0, 75.0).real() / dc_resistance(four_ought, 75.0);
  EXPECT_GT(ratio, 1.001);
  EXPECT_LT(ratio, 0.062 / 0.0608);
}

// With ln(1/radius) outside, the low-frequency inductance is that of ln(1/gmr).
TEST(InternalImpedance, CarriesTheStrandsGeometricMeanRadius) {
  for (const int strands : {1, 7, 19, 37}) {
    const Complex z = internal_impedance(conductor(3e-3, strands), 1.0, 20.0);
    const double inside = -std::log(gmr_ratio(strands)) * k_mu_0 / (2 * k_pi);  // H/m
    EXPECT_NEAR(z.imag() / (2 * k_pi), inside, 1e-8 * inside) << strands;
  }
}

TEST(InternalImpedance, IsTheDcResistanceAtRest) {
  const RoundConductor wire = conductor(3e-3, 7);
  EXPECT_EQ(internal_impedance(wire, 0.0, 40.0), Complex(dc_resistance(wire, 40.0), 0.0));
}

}  // namespace
}  // namespace engine
