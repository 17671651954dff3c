// Do 200 draws of a building cost less than ten predictions of it?
#include <benchmark/benchmark.h>

#include <stdexcept>
#include <string>

#include "io/check_report.h"
#include "netlists/predict.h"

namespace {

const netlists::Building& model(int number) {
  const auto read = [](const std::string& name) {
    io::ModelFile file = io::check_model(std::string(IDLEWIRE_EXAMPLES "/") + name + "/model.yaml");
    if (netlists::any_error(file.faults)) throw std::runtime_error(name + " has faults");
    return file.building;
  };
  static const netlists::Building k_models[] = {read("05-office-floor"), read("06-plant-control")};
  return k_models[number];
}

void bench_predict(benchmark::State& state) {
  const netlists::Building& building = model(static_cast<int>(state.range(0)));
  netlists::PredictOptions options;
  options.draws = static_cast<int>(state.range(1));
  options.threads = static_cast<int>(state.range(2));
  if (netlists::predict(building, options).findings.draws != options.draws)
    state.SkipWithError("not the draws that were asked for");
  for (auto _ : state) benchmark::DoNotOptimize(netlists::predict(building, options));
}
BENCHMARK(bench_predict)
    ->ArgNames({"model", "draws", "threads"})
    ->ArgsProduct({{0, 1}, {0, 200}, {1, 2}})
    ->Unit(benchmark::kMillisecond)
    ->UseRealTime();

}  // namespace
