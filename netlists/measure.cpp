#include "netlists/measure.h"

#include <cmath>
#include <map>
#include <optional>
#include <utility>

#include "netlists/reading.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_soft = 10e3;  // ohm from earth, from here on a common lead's capacitance may matter

using Ports = std::map<std::pair<int, int>, Port>;

// Every pair of points that is probed, solved together, and the points of those that are not to ground by
// themselves: an instrument's common lead has a capacitance to earth.
Ports solve_ports(const std::vector<ProbedPlace>& probed, const engine::SolvedNetwork& solved) {
  Ports ports;
  std::vector<std::pair<int, int>> apart;
  const auto want = [&](int a, int b) {
    if (ports.try_emplace({a, b}).second && a != b) apart.emplace_back(a, b);
  };
  for (const ProbedPlace& probes : probed) {
    for (const Probe& probe : probes) {
      want(probe.node, probe.reference_node);
      if (probe.reference == probes.front().reference) continue;
      want(probe.node, 0);
      want(probe.reference_node, 0);
    }
  }
  const std::vector<Complex> impedances = solved.source_impedances(apart);
  for (std::size_t i = 0; i < apart.size(); ++i)
    ports[apart[i]] = {solved.volts(apart[i].first, apart[i].second), impedances[i]};
  return ports;
}

// Both points with their impedances from earth, where neither is held by anything firmer than coupling.
std::optional<PointPair> soft_pair(const Probe& probe, const Ports& ports) {
  const Port& a = ports.at({probe.node, 0});
  const Port& b = ports.at({probe.reference_node, 0});
  if (std::abs(a.impedance) < k_soft || std::abs(b.impedance) < k_soft) return std::nullopt;
  const Complex between = ports.at({probe.node, probe.reference_node}).impedance;
  return PointPair{a.volts, b.volts, a.impedance, b.impedance, (a.impedance + b.impedance - between) / 2.0};
}

void add_readings(PlaceFindings& found, const Probe& probe, const Ports& ports,
                  const std::vector<InstrumentType>& instruments, double frequency) {
  const Port& port = ports.at({probe.node, probe.reference_node});
  const bool to_ground = probe.reference == found.reference;
  const std::optional<PointPair> soft = to_ground ? std::nullopt : soft_pair(probe, ports);
  for (const InstrumentType& instrument : instruments) {
    if (instrument.to_ground_only && !to_ground) continue;
    const bool three = soft && instrument.common_to_earth > 0.0;
    Reading reading = three ? read_soft(instrument, *soft, frequency) : read(instrument, port, frequency);
    if (to_ground && !reading.indicator && instrument.common_to_earth > 0.0)
      reading.lead_in_air = read_lead_in_air(instrument, port, frequency);
    reading.reference = probe.reference;
    reading.judged = probe.judged && !reading.indicator;
    found.readings.push_back(std::move(reading));
  }
}

}  // namespace

std::vector<PlaceFindings> measure(const std::vector<InstrumentType>& instruments,
                                   const std::vector<ProbedPlace>& probed,
                                   const engine::SolvedNetwork& solved) {
  const Ports ports = solve_ports(probed, solved);
  std::vector<PlaceFindings> all;
  all.reserve(probed.size());
  for (const ProbedPlace& probes : probed) {
    PlaceFindings& found = all.emplace_back();
    const Port& port = ports.at({probes.front().node, probes.front().reference_node});
    found.reference = probes.front().reference;
    found.open_circuit = port.volts;
    found.source_impedance = port.impedance;
    found.short_circuit = port.impedance == 0.0 ? 0.0 : std::abs(port.volts / port.impedance);
    for (const Probe& probe : probes)
      add_readings(found, probe, ports, instruments, solved.network().frequency);
  }
  return all;
}

}  // namespace netlists
