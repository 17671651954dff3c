// Does the section of a full raceway take less than a blink, so that many layouts of it can be averaged?
#include <benchmark/benchmark.h>

#include <cmath>
#include <random>
#include <vector>

#include "engine/capacitance.h"
#include "engine/layout.h"

namespace {

constexpr double k_wire_radius = 1.168e-3;       // m, 12 AWG in seven strands
constexpr double k_insulated_radius = 1.651e-3;  // m

/// Wires of 12 AWG at rest in a metal tube of which they fill a third.
engine::CrossSection raceway(int wires) {
  std::mt19937_64 random(1);
  engine::CrossSection section;
  section.surroundings = engine::Surroundings::metal_tube;
  section.tube_inner_radius = k_insulated_radius * std::sqrt(3.0 * wires);
  section.tube_outer_radius = section.tube_inner_radius + 1.2e-3;
  const std::vector<double> radii(static_cast<std::size_t>(wires), k_insulated_radius);
  for (const Eigen::Vector2d& centre : engine::resting_layout(radii, section.tube_inner_radius, random)) {
    engine::RoundConductor wire;
    wire.centre = centre;
    wire.radius = k_wire_radius;
    wire.layers = {{k_insulated_radius, {4.0, 0.05}}};
    section.conductors.push_back(wire);
  }
  return section;
}

/// max |dC_ij| / sqrt(C_ii C_jj), the error norm of a section.
double distance(const Eigen::MatrixXd& a, const Eigen::MatrixXd& b) {
  double worst = 0.0;
  for (Eigen::Index i = 0; i < a.rows(); ++i) {
    for (Eigen::Index j = 0; j < a.cols(); ++j) {
      worst = std::max(worst, std::abs(a(i, j) - b(i, j)) / std::sqrt(b(i, i) * b(j, j)));
    }
  }
  return worst;
}

void bench_field_matrices(benchmark::State& state) {
  engine::CrossSection section = raceway(static_cast<int>(state.range(0)));
  const Eigen::MatrixXd timed = engine::field_matrices(section).capacitance;
  const double tolerance = section.tolerance;
  section.tolerance = tolerance / 100;
  const double error = distance(timed, engine::field_matrices(section).capacitance);
  section.tolerance = tolerance;
  if (!(error < tolerance)) {
    state.SkipWithError("the capacitance matrix misses its tolerance");
    return;
  }
  for (auto _ : state) benchmark::DoNotOptimize(engine::field_matrices(section));
  state.counters["error"] = error;
}
BENCHMARK(bench_field_matrices)->ArgName("wires")->Arg(3)->Arg(9)->Arg(27)->Unit(benchmark::kMillisecond);

}  // namespace
