#include "netlists/reading.h"

#include <cmath>
#include <numbers>

namespace netlists {
namespace {

double shown(const InstrumentType& instrument, double resistance, const Port& port, double frequency) {
  const std::complex<double> input = input_impedance(instrument, resistance, frequency);
  return std::abs(port.volts * input / (input + port.impedance));
}

}  // namespace

std::complex<double> input_impedance(const InstrumentType& instrument, double resistance, double frequency) {
  const std::complex<double> admittance(1.0 / resistance,
                                        2 * std::numbers::pi * frequency * instrument.capacitance);
  return 1.0 / admittance;
}

Reading read(const InstrumentType& instrument, const Port& port, double frequency) {
  Reading reading;
  reading.instrument = instrument.name;
  reading.indicator = instrument.kind == InstrumentKind::indicator;
  if (instrument.ranges.empty()) {
    reading.volts = shown(instrument, instrument.resistance, port, frequency);
  } else {
    std::size_t range = instrument.ranges.size() - 1;
    reading.volts = shown(instrument, instrument.ranges[range].resistance, port, frequency);
    while (range > 0 && reading.volts <= instrument.ranges[range - 1].full_scale) {
      --range;
      reading.volts = shown(instrument, instrument.ranges[range].resistance, port, frequency);
    }
    reading.range = instrument.ranges[range].full_scale;
  }
  reading.indicates = reading.indicator && reading.volts >= instrument.threshold;
  return reading;
}

double resistance_in_force(const InstrumentType& instrument, const Reading& reading) {
  for (const InstrumentRange& range : instrument.ranges) {
    if (reading.range && range.full_scale == *reading.range) return range.resistance;
  }
  return instrument.resistance;
}

}  // namespace netlists
