#include "benchmarks/sample_building.h"

#include <cmath>
#include <map>
#include <memory>
#include <numbers>
#include <random>

namespace benchmarks {
namespace {

using engine::Complex;
using engine::Line;
using engine::LineMatrices;

constexpr double k_omega = 2 * std::numbers::pi * 60.0;  // rad/s
constexpr int k_most_in_tray = 40;                       // conductors

/// n wires in rows, 4 mm apart: inductance from distances with the return 600 m below, capacitance falling
/// off with distance, both as ordinary building wire has them.
std::shared_ptr<const LineMatrices> matrices_of(int n) {
  LineMatrices m{Eigen::MatrixXcd(n, n), Eigen::MatrixXd::Zero(n, n), Eigen::MatrixXd::Zero(n, n)};
  const int across = static_cast<int>(std::ceil(std::sqrt(n)));
  for (int i = 0; i < n; ++i)
    for (int j = 0; j <= i; ++j) {
      const double steps = std::hypot(i / across - j / across, i % across - j % across);
      const double distance = i == j ? 0.8e-3 : 4e-3 * steps;  // m
      m.impedance(i, j) = m.impedance(j, i) =
          Complex(5.9e-5 + (i == j ? 5.2e-3 : 0.0), k_omega * 2e-7 * std::log(600 / distance));
      const double c = i == j ? 10e-12 : 40e-12 / std::pow(steps, 3);  // F/m
      m.capacitance(i, i) += c;
      if (i == j) continue;
      m.capacitance(j, j) += c;
      m.capacitance(i, j) = m.capacitance(j, i) = -c;
    }
  m.conductance = 0.03 * k_omega * m.capacitance;
  return std::make_shared<LineMatrices>(std::move(m));
}

class Builder {
 public:
  explicit Builder(const BuildingSize& size) : size_(size), random_(size.seed) {
    ground_ = node();
    neutral_ = node();
    engine::Network& network = made_.network;
    network.elements.push_back({ground_, 0, 0.2});
    network.elements.push_back({neutral_, ground_, 1e4});
    for (int phase = 0; phase < 3; ++phase) {
      phases_[phase] = node();
      network.sources.push_back(
          {phases_[phase], neutral_, std::polar(120.0, -2 * std::numbers::pi / 3 * phase), {0.01, 0.02}});
    }
  }

  SampleBuilding branching() {
    while (made_.segments < size_.segments) home_run();
    return std::move(made_);
  }

  SampleBuilding mesh() {
    const int side = std::max(2, static_cast<int>(std::sqrt(size_.segments / (2.0 * k_most_in_tray))));
    std::vector<int> grounds{ground_};
    while (static_cast<int>(grounds.size()) < side * side) grounds.push_back(node());
    std::map<std::pair<int, int>, Wires> trays;
    int refused = 0;
    for (int laid = 0; laid < size_.segments && refused < 20 * side;)
      (lay_through(side, trays, laid) ? refused = 0 : ++refused);
    for (const auto& [ends, wires] : trays) add_line(wires, grounds[ends.first], grounds[ends.second]);
    return std::move(made_);
  }

 private:
  struct Wires {
    std::vector<int> from, to;
    std::vector<bool> floats;
  };

  int node() { return made_.network.node_count++; }
  int pick(int count) { return std::uniform_int_distribution(0, count - 1)(random_); }
  double draw(double low, double high) { return std::uniform_real_distribution(low, high)(random_); }

  void add_line(Wires wires, int ground_from, int ground_to) {
    for (int i = 0; i < 2; ++i) {  // the ground wire and the raceway
      wires.from.push_back(ground_from);
      wires.to.push_back(ground_to);
    }
    const int n = static_cast<int>(wires.from.size());
    auto& matrices = known_[n];
    if (!matrices) matrices = matrices_of(n);
    int last = -1;
    for (std::size_t i = 0; i < wires.floats.size(); ++i) {
      if (!wires.floats[i]) continue;
      made_.floating.push_back(wires.to[i]);
      if (last >= 0) made_.neighbours.emplace_back(last, wires.to[i]);
      last = wires.to[i];
    }
    made_.segments += n;
    made_.network.lines.push_back({matrices, draw(2, 30), 1, std::move(wires.from), std::move(wires.to)});
  }

  void load(int hot, int neutral) {
    made_.network.elements.push_back({hot, neutral, 1.0 / Complex(draw(10, 200), draw(0, 5))});
  }

  void home_run() {
    struct Circuit {
      int hot, neutral, runs;
      bool floats;
    };
    std::vector<Circuit> circuits;
    const int count = 1 + pick(size_.most_circuits);
    for (int i = 0; i < count; ++i) {
      const bool floats = draw(0, 1) < size_.floating_share;
      circuits.push_back({floats ? node() : phases_[pick(3)], floats ? node() : neutral_,
                          i == 0 ? size_.runs : 1 + pick(size_.runs), floats});
    }
    int ground = ground_;
    for (int run = 0; run < size_.runs; ++run) {
      Wires wires;
      for (Circuit& circuit : circuits) {
        if (run >= circuit.runs) continue;
        for (int* wire : {&circuit.hot, &circuit.neutral}) {
          wires.from.push_back(*wire);
          wires.to.push_back(*wire = node());
          wires.floats.push_back(circuit.floats);
        }
        if (run + 1 == circuit.runs && !circuit.floats) load(circuit.hot, circuit.neutral);
      }
      const int next = node();
      add_line(std::move(wires), ground, next);
      ground = next;
    }
  }

  /// One circuit from corner to somewhere, to the right or up at each step. False if a tray on its way is
  /// full.
  bool lay_through(int side, std::map<std::pair<int, int>, Wires>& trays, int& laid) {
    std::vector<int> way{pick(side * side)};
    for (int step = 0; step < side; ++step) {
      const int x = way.back() % side, y = way.back() / side;
      const bool right = y + 1 == side || (x + 1 < side && pick(2) == 0);
      if (right && x + 1 == side) break;
      way.push_back(way.back() + (right ? 1 : side));
    }
    if (way.size() < 2) return false;
    for (std::size_t i = 0; i + 1 < way.size(); ++i)
      if (trays[{way[i], way[i + 1]}].from.size() + 4 > k_most_in_tray) return false;
    const bool floats = draw(0, 1) < size_.floating_share;
    int hot = floats ? node() : phases_[pick(3)], neutral = floats ? node() : neutral_;
    for (std::size_t i = 0; i + 1 < way.size(); ++i) {
      Wires& wires = trays[{way[i], way[i + 1]}];
      for (int* wire : {&hot, &neutral}) {
        wires.from.push_back(*wire);
        wires.to.push_back(*wire = node());
        wires.floats.push_back(floats);
        ++laid;
      }
    }
    if (!floats) load(hot, neutral);
    return true;
  }

  BuildingSize size_;
  std::mt19937 random_;
  SampleBuilding made_;
  std::map<int, std::shared_ptr<const LineMatrices>> known_;
  int ground_ = 0, neutral_ = 0, phases_[3] = {};
};

}  // namespace

SampleBuilding branching_building(const BuildingSize& size) { return Builder(size).branching(); }
SampleBuilding mesh_of_trays(const BuildingSize& size) { return Builder(size).mesh(); }

}  // namespace benchmarks
