#include "tests/engine/sample_networks.h"

#include <Eigen/Core>
#include <cmath>
#include <numbers>

namespace engine::testing {
namespace {

constexpr double k_frequency = 60.0;  // Hz
constexpr Complex k_j{0, 1};

double omega() { return 2 * std::numbers::pi * k_frequency; }
double draw(std::mt19937& random, double low, double high) {
  return std::uniform_real_distribution(low, high)(random);
}
int pick(std::mt19937& random, int count) { return std::uniform_int_distribution(0, count - 1)(random); }

/// Builds the random building place by place.
class Builder {
 public:
  Builder(unsigned seed, int runs) : random_(seed), parent_(runs + 1, 0), ground_(runs + 1, 0) {
    network().frequency = k_frequency;
    for (int place = 0; place <= runs; ++place) ground_[place] = node();
    for (int place = 1; place <= runs; ++place) parent_[place] = pick(random_, place);
    lines_.resize(runs + 1);
  }

  Sample build() {
    supply();
    const int places = static_cast<int>(parent_.size());
    for (int circuit = 0; circuit < places / 2 + 2; ++circuit) add_circuit(1 + pick(random_, places - 1));
    for (int place = 1; place < places; ++place)
      if (pick(random_, 3) != 0) add_spare(place);
    add_bonded_pair(places - 1);
    add_isolated_supply(places - 1);
    for (int place = 1; place < places; ++place) add_run(place);
    return sample_;
  }

 private:
  Network& network() { return sample_.network; }
  int node() { return network().node_count++; }

  void supply() {
    network().elements.push_back({ground_[0], 0, 1.0 / Complex(5.0)});  // a ground rod
    neutral_ = node();
    network().elements.push_back({neutral_, ground_[0], 1e4});
    for (int phase = 0; phase < 3; ++phase) {
      bus_[phase] = node();
      network().sources.push_back(
          {bus_[phase], neutral_, std::polar(120.0, -2 * std::numbers::pi / 3 * phase), {0.01, 0.02}});
    }
  }

  /// A wire from place `top` (an ancestor) to `place`; returns its node at `place`. A negative start
  /// makes it begin open.
  int add_wire(int top, int place, int start, bool floats) {
    std::vector<int> path;
    for (int at = place; at != top; at = parent_[at]) path.insert(path.begin(), at);
    int here = start >= 0 ? start : node();
    sample_.wires.push_back({here});
    if (floats) sample_.floating.push_back(here);
    for (const int run : path) {
      const int there = node();
      lines_[run].from.push_back(here);
      lines_[run].to.push_back(there);
      if (floats) {
        sample_.floating.push_back(there);
        sample_.segments.emplace_back(here, there);
      }
      sample_.wires.back().push_back(there);
      here = there;
    }
    return here;
  }

  void add_circuit(int place) {
    const int hot = add_wire(0, place, bus_[pick(random_, 3)], false);
    const bool open_neutral = pick(random_, 4) == 0;
    const int neutral = add_wire(0, place, open_neutral ? -1 : neutral_, open_neutral);
    network().elements.push_back({hot, neutral, 1.0 / Complex(draw(random_, 10, 40), draw(random_, 0, 5))});
    network().elements.push_back({hot, ground_[place], k_j * omega() * 4.7e-9});  // a filter
  }

  void add_spare(int place) {
    const int end = add_wire(0, place, -1, true);
    switch (pick(random_, 4)) {
      case 0:
        network().elements.push_back({end, ground_[place], 1e-7 + k_j * omega() * 100e-12});
        break;
      case 1:
        network().elements.push_back({end, bus_[pick(random_, 3)], 1.0 / Complex(300e3)});
        break;
      case 2:
        network().elements.push_back({end, sample_.floating[0], 1.0 / Complex(0.05)});
        break;
      default:
        break;
    }
  }

  void add_bonded_pair(int place) {
    const int start = node();
    const int a = add_wire(0, place, start, true), b = add_wire(0, place, start, true);
    network().elements.push_back({a, b, 1.0 / Complex(0.05)});
  }

  void add_isolated_supply(int place) {
    const int top = parent_[place];
    const int first = node(), second = node();
    network().sources.push_back({first, second, {110.0, 20.0}, {0.05, 0.08}});
    network().elements.push_back({first, 0, k_j * omega() * 2.1e-9});
    network().elements.push_back({second, 0, k_j * omega() * 2.3e-9});
    const int a = add_wire(top, place, first, true), b = add_wire(top, place, second, true);
    network().elements.push_back({a, b, 1.0 / Complex(25.0)});
  }

  void add_run(int place) {
    Line& line = lines_[place];
    for (int wire = 0; wire < 2; ++wire) {  // the raceway and the ground wire, bonded at both ends
      line.from.push_back(ground_[parent_[place]]);
      line.to.push_back(ground_[place]);
    }
    line.matrices = random_matrices(random_, static_cast<int>(line.from.size()), k_frequency);
    line.length = draw(random_, 2, 60);
    line.cells = 1 + pick(random_, 2);
    network().lines.push_back(line);
  }

  std::mt19937 random_;
  std::vector<int> parent_;  // place at the other end of the run to each place
  std::vector<int> ground_;  // node of each place
  std::vector<Line> lines_;  // by the place they lead to
  int neutral_ = 0;
  int bus_[3] = {};
  Sample sample_;
};

}  // namespace

std::shared_ptr<const LineMatrices> random_matrices(std::mt19937& random, int n, double frequency,
                                                    double least_capacitance, double most_capacitance) {
  const double radius = 1e-3, depth = 600;  // m: of a wire; equivalent depth of the earth's return
  std::vector<Eigen::Vector2d> centres;
  while (static_cast<int>(centres.size()) < n) {
    const Eigen::Vector2d centre(draw(random, -20e-3, 20e-3), draw(random, -20e-3, 20e-3));
    bool free = true;
    for (const Eigen::Vector2d& other : centres) free = free && (other - centre).norm() > 2.5 * radius;
    if (free) centres.push_back(centre);
  }
  LineMatrices matrices{Eigen::MatrixXcd(n, n), Eigen::MatrixXd::Zero(n, n), Eigen::MatrixXd::Zero(n, n)};
  const double w = 2 * std::numbers::pi * frequency;  // rad/s
  for (int i = 0; i < n; ++i)
    for (int j = 0; j <= i; ++j) {
      const double distance = i == j ? 0.78 * radius : (centres[i] - centres[j]).norm();
      const Complex z(5.9e-5 + (i == j ? draw(random, 2e-3, 8e-3) : 0.0),
                      w * 2e-7 * std::log(depth / distance));
      matrices.impedance(i, j) = matrices.impedance(j, i) = z;
      const double c = std::exp(draw(random, std::log(least_capacitance), std::log(most_capacitance)));
      matrices.capacitance(i, i) += c;  // on the diagonal, i == j: to earth
      matrices.conductance(i, i) += 0.03 * w * c;
      if (i == j) continue;
      matrices.capacitance(j, j) += c;
      matrices.conductance(j, j) += 0.03 * w * c;
      matrices.capacitance(i, j) = matrices.capacitance(j, i) = -c;
      matrices.conductance(i, j) = matrices.conductance(j, i) = -0.03 * w * c;
    }
  return std::make_shared<LineMatrices>(std::move(matrices));
}

Sample random_building(unsigned seed, int runs) { return Builder(seed, runs).build(); }

Sample hard_case() {
  std::mt19937 random(7);
  Sample sample;
  Network& network = sample.network;
  network.frequency = k_frequency;
  // Wires: feeder, return, two of a loop, one alone, one tied by picofarads only.
  const int wires = 6, steps = 8;
  const auto matrices = random_matrices(random, wires, k_frequency);
  auto weak = std::make_shared<LineMatrices>(*matrices);
  for (int j = 0; j + 1 < wires; ++j) {
    weak->capacitance(wires - 1, j) = weak->capacitance(j, wires - 1) = -1e-17;
    weak->conductance(wires - 1, j) = weak->conductance(j, wires - 1) = 0;
  }
  weak->capacitance(wires - 1, wires - 1) = wires * 1e-17;
  weak->conductance(wires - 1, wires - 1) = 0;
  sample.wires.resize(wires);
  for (int wire = 0; wire < wires; ++wire) sample.wires[wire].push_back(network.node_count++);
  for (int step = 0; step < steps; ++step) {
    Line line{weak, step % 2 == 0 ? 10.0 : 25e3, step % 2 == 0 ? 1 : 3, {}, {}};
    for (int wire = 0; wire < wires; ++wire) {
      line.from.push_back(sample.wires[wire].back());
      line.to.push_back(network.node_count++);
      sample.wires[wire].push_back(line.to.back());
      if (wire < 2) continue;
      sample.segments.emplace_back(line.from.back(), line.to.back());
      sample.floating.push_back(line.to.back());
    }
    network.lines.push_back(std::move(line));
  }
  network.sources.push_back({sample.wires[0].front(), 0, 120.0, {0.01, 0.02}});
  network.elements.push_back({sample.wires[1].front(), 0, 1e3});
  network.elements.push_back({sample.wires[0].back(), sample.wires[1].back(), 1.0 / Complex(20, 3)});
  network.elements.push_back({sample.wires[2].front(), sample.wires[3].front(), 1e3});
  network.elements.push_back({sample.wires[2].back(), sample.wires[3].back(), 1e3});
  return sample;
}

}  // namespace engine::testing
