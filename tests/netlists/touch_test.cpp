#include "netlists/touch.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>

namespace netlists {
namespace {

using Complex = std::complex<double>;

// IEC 60990, figure 3: 1990 ohm at 50 Hz and 1986 ohm at 60 Hz, recomputed from its parts by hand.
TEST(Body, HasTheImpedanceOfTheTouchCurrentNetwork) {
  EXPECT_NEAR(std::abs(body_impedance(50.0)), 1990.0, 1.0);
  EXPECT_NEAR(std::abs(body_impedance(60.0)), 1986.0, 1.0);
  EXPECT_NEAR(std::arg(body_impedance(50.0)) * 180 / M_PI, -4.4, 0.1);
  EXPECT_NEAR(std::arg(body_impedance(60.0)) * 180 / M_PI, -5.3, 0.1);
}

// The zones of IEC 60479-1 for lasting currents (from memory): 0.5 mA, 5 mA, 35 mA.
TEST(Body, ZonesBeginWhereTheStandardHasThem) {
  EXPECT_THAT(body_zone(0.49e-3), ::testing::HasSubstr("AC-1"));
  EXPECT_THAT(body_zone(0.51e-3), ::testing::HasSubstr("AC-2"));
  EXPECT_THAT(body_zone(5.1e-3), ::testing::HasSubstr("AC-3"));
  EXPECT_THAT(body_zone(36e-3), ::testing::HasSubstr("AC-4"));
}

TouchPorts alike(int n, Complex volts, Complex impedance) {
  return {Eigen::VectorXcd::Constant(n, volts),
          Eigen::MatrixXcd(impedance * Eigen::MatrixXcd::Identity(n, n))};
}

// n equal sources that know nothing of each other drive n times the current; opposite ones drive none
// together, and twice the current hand to hand behind twice the impedance.
TEST(Touch, AddsWhatIsAloneAndCancelsWhatIsOpposite) {
  const Complex z(0.0, -1e6);
  EXPECT_NEAR(single_touch(alike(3, 60.0, z), 2000.0).current, 60e-6, 1e-9);
  EXPECT_NEAR(joint_touch(alike(3, 60.0, z), 2000.0).current, 180e-6, 1e-8);
  TouchPorts opposite = alike(2, 60.0, z);
  opposite.volts(1) = -60.0;
  EXPECT_NEAR(joint_touch(opposite, 2000.0).current, 0.0, 1e-12);
  EXPECT_NEAR(pair_touch(opposite, 2000.0).current, 60e-6, 1e-9);
}

// Two names for one point: together they drive what one does.
TEST(Touch, OnePointTwiceIsOnePoint) {
  TouchPorts ports = alike(2, 60.0, Complex(0.0, -1e6));
  ports.impedance.setConstant(Complex(0.0, -1e6));
  EXPECT_NEAR(joint_touch(ports, 2000.0).current, 60e-6, 1e-9);
  EXPECT_EQ(pair_touch(ports, 2000.0).current, 0.0);
}

}  // namespace
}  // namespace netlists
