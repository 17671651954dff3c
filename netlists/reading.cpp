#include "netlists/reading.h"

#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <functional>
#include <numbers>

namespace netlists {
namespace {

constexpr double k_leads_matter = 0.05;  // of the larger reading

double shown(const InstrumentType& instrument, double resistance, const Port& port, double frequency) {
  const std::complex<double> input = input_impedance(instrument, resistance, frequency);
  return std::abs(port.volts * input / (input + port.impedance));
}

// The range a person settles on: from the highest down, as long as the next lower one holds what shows.
Reading settled(const InstrumentType& instrument, const std::function<double(double)>& volts_behind) {
  Reading reading;
  reading.instrument = instrument.name;
  reading.indicator = instrument.kind == InstrumentKind::indicator;
  if (instrument.ranges.empty()) reading.volts = volts_behind(instrument.resistance);
  for (const InstrumentRange& range : instrument.ranges)
    reading.on_ranges.push_back({range.full_scale, volts_behind(range.resistance)});
  if (!reading.on_ranges.empty()) {
    std::size_t range = reading.on_ranges.size() - 1;
    while (range > 0 && reading.on_ranges[range].volts <= reading.on_ranges[range - 1].full_scale) --range;
    reading.volts = reading.on_ranges[range].volts;
    reading.range = reading.on_ranges[range].full_scale;
  }
  reading.indicates = reading.indicator && reading.volts >= instrument.threshold;
  return reading;
}

}  // namespace

std::complex<double> input_impedance(const InstrumentType& instrument, double resistance, double frequency) {
  const std::complex<double> admittance(1.0 / resistance,
                                        2 * std::numbers::pi * frequency * instrument.capacitance);
  return 1.0 / admittance;
}

double shown_between(const InstrumentType& instrument, double resistance, const PointPair& points,
                     double frequency) {
  Eigen::Matrix2cd impedance;
  impedance << points.impedance_a, points.mutual, points.mutual, points.impedance_b;
  const std::complex<double> leads = 1.0 / input_impedance(instrument, resistance, frequency);
  const std::complex<double> common(0.0, 2 * std::numbers::pi * frequency * instrument.common_to_earth);
  Eigen::Matrix2cd load;
  load << leads, -leads, -leads, leads + common;
  const Eigen::Vector2cd open(points.volts_a, points.volts_b);
  const Eigen::Vector2cd volts = (Eigen::Matrix2cd::Identity() + impedance * load).inverse() * open;
  return std::abs(volts(0) - volts(1));
}

Reading read_soft(const InstrumentType& instrument, const PointPair& points, double frequency) {
  const PointPair other{points.volts_b, points.volts_a, points.impedance_b, points.impedance_a,
                        points.mutual};
  const auto with = [&](const PointPair& pair) {
    return settled(instrument,
                   [&](double resistance) { return shown_between(instrument, resistance, pair, frequency); });
  };
  Reading reading = with(points);
  const double swapped = with(other).volts;
  if (std::abs(swapped - reading.volts) > k_leads_matter * std::max(swapped, reading.volts))
    reading.swapped = swapped;
  return reading;
}

double read_lead_in_air(const InstrumentType& instrument, const Port& port, double frequency) {
  const std::complex<double> common(0.0, 2 * std::numbers::pi * frequency * instrument.common_to_earth);
  return settled(instrument,
                 [&](double resistance) {
                   const std::complex<double> input = input_impedance(instrument, resistance, frequency);
                   return std::abs(port.volts * input / (input + 1.0 / common + port.impedance));
                 })
      .volts;
}

Reading read(const InstrumentType& instrument, const Port& port, double frequency) {
  return settled(instrument,
                 [&](double resistance) { return shown(instrument, resistance, port, frequency); });
}

double resistance_in_force(const InstrumentType& instrument, const Reading& reading) {
  for (const InstrumentRange& range : instrument.ranges) {
    if (reading.range && range.full_scale == *reading.range) return range.resistance;
  }
  return instrument.resistance;
}

}  // namespace netlists
