// How long does a whole building take, from its runs' matrices to every Thevenin impedance, and what would
// KLU or scipy's sparse LU take for one factorisation and solution of the same system?
//
//   network_bench SEGMENTS [branching|mesh] [own|klu|FILE]
//
// `own` times the engine alone, so that its peak memory can be read; `klu` (the default) also the library;
// FILE also writes the system and its answer for compare_scipy.py.
#include <sys/resource.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <random>
#include <string>
#include <vector>

#include "benchmarks/sample_building.h"
#include "engine/island_basis.h"
#include "engine/sparse_lu.h"
#include "engine/symmetric_factor.h"

namespace {

using engine::Complex;
using engine::IslandBasis;

class Stopwatch {
 public:
  double lap() {  // s since the last one
    const auto now = std::chrono::steady_clock::now();
    const double seconds = std::chrono::duration<double>(now - start_).count();
    start_ = now;
    return seconds;
  }

 private:
  std::chrono::steady_clock::time_point start_ = std::chrono::steady_clock::now();
};

double peak_GiB() {
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
  return static_cast<double>(usage.ru_maxrss) / (1024.0 * 1024.0);
}

template <typename T>
void put(std::ofstream& file, const T* values, std::size_t count) {
  file.write(reinterpret_cast<const char*>(values), static_cast<std::streamsize>(count * sizeof(T)));
}

/// Size and entries as int64, then columns, rows (int32), entries, right side and answer (complex128).
void write_system(const std::string& path, const Eigen::SparseMatrix<Complex>& matrix,
                  const Eigen::VectorXcd& right_side, const Eigen::VectorXcd& answer) {
  std::ofstream file(path, std::ios::binary);
  const std::int64_t head[] = {matrix.rows(), matrix.nonZeros()};
  put(file, head, 2);
  put(file, matrix.outerIndexPtr(), static_cast<std::size_t>(head[0] + 1));
  put(file, matrix.innerIndexPtr(), static_cast<std::size_t>(head[1]));
  put(file, matrix.valuePtr(), static_cast<std::size_t>(head[1]));
  put(file, right_side.data(), static_cast<std::size_t>(head[0]));
  put(file, answer.data(), static_cast<std::size_t>(head[0]));
}

/// Ten Thevenin impedances against refined solutions: the largest relative difference.
double worst_thevenin(const IslandBasis& basis, const std::vector<std::pair<int, int>>& pairs,
                      const std::vector<Complex>& found) {
  double worst = 0;
  for (std::size_t i = 0; i < 10; ++i) {
    const std::size_t at = i * (pairs.size() - 1) / 9;
    const auto [a, b] = pairs[at];
    const Complex full = basis.drop(basis.solve({false, {{a, 1.0}, {b, -1.0}}}), a, b);
    worst = std::max(worst, std::abs(found[at] - full) / std::abs(full));
  }
  return worst;
}

double time_klu(const Eigen::SparseMatrix<Complex>& matrix, const Eigen::VectorXcd& right_side,
                const Eigen::VectorXcd& answer) {
  Stopwatch watch;
  const engine::SparseLu klu(matrix);
  Eigen::MatrixXcd column = right_side;
  klu.solve(column);
  const double seconds = watch.lap();
  std::printf("  KLU, factor and solve               %8.3f s   differs by %.1e\n", seconds,
              (column.col(0) - answer).norm() / answer.norm());
  return seconds;
}

int run(const benchmarks::SampleBuilding& building, const std::string& beside) {
  std::printf("%d segments, %d floating nodes, %zu runs\n", building.segments,
              static_cast<int>(building.floating.size()), building.network.lines.size());
  Stopwatch watch;
  const IslandBasis basis(engine::flatten(building.network));
  const double factor = watch.lap();
  const IslandBasis::State state = basis.solve({true, {}});
  const double solve = watch.lap();
  std::vector<std::pair<int, int>> pairs = building.neighbours;
  for (const int node : building.floating) pairs.emplace_back(node, 0);
  watch.lap();
  const std::vector<Complex> impedances = basis.source_impedances(pairs);
  const double thevenin = watch.lap();
  std::printf("  islands, order, assemble, factor    %8.3f s\n", factor);
  std::printf("  solve and refine                    %8.3f s   residual %.1e\n", solve, state.residual);
  std::printf("  %7zu Thevenin impedances         %8.3f s   differ by %.1e from refined solutions\n",
              pairs.size(), thevenin, worst_thevenin(basis, pairs, impedances));
  std::printf("  everything                          %8.3f s   peak %.2f GiB\n", factor + solve + thevenin,
              peak_GiB());
  if (beside == "own") return 0;

  watch.lap();
  const Eigen::SparseMatrix<Complex> matrix = basis.assemble();
  const double assemble = watch.lap();
  const Eigen::VectorXcd right_side = Eigen::VectorXcd::Random(matrix.rows());
  watch.lap();
  const engine::BlockPattern pattern = basis.pattern();
  const auto own = engine::SymmetricFactor::make(
      static_cast<int>(matrix.rows()), pattern,
      [&](int index, Eigen::MatrixXcd& entries) { basis.block(index, entries); });
  Eigen::VectorXcd answer = right_side;
  own->solve(answer);
  const double seconds = watch.lap();
  std::printf("  own, blocks to solution             %8.3f s   %.2f entries of L per entry of the matrix\n",
              seconds, 2.0 * static_cast<double>(own->entries()) / static_cast<double>(matrix.nonZeros()));
  const double klu = time_klu(matrix, right_side, answer);
  std::printf("  its matrix, assembled               %8.3f s   gain %.2f with it, %.2f without\n", assemble,
              (assemble + klu) / seconds, klu / seconds);
  if (beside != "klu") write_system(beside, matrix, right_side, answer);
  return 0;
}

}  // namespace

int main(int count, char** arguments) {
  benchmarks::BuildingSize size;
  if (count > 1) size.segments = std::atoi(arguments[1]);
  const bool mesh = count > 2 && std::string(arguments[2]) == "mesh";
  return run(mesh ? benchmarks::mesh_of_trays(size) : benchmarks::branching_building(size),
             count > 3 ? arguments[3] : "klu");
}
