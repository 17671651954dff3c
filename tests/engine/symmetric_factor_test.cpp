#include "engine/symmetric_factor.h"

#include <gtest/gtest.h>

#include <Eigen/LU>
#include <random>

#include "engine/flat_network.h"
#include "engine/island_basis.h"
#include "tests/engine/sample_networks.h"

namespace engine {
namespace {

SymmetricFactor factor_of(const IslandBasis& basis, int size) {
  auto factor = SymmetricFactor::make(
      size, basis.pattern(), [&](int index, Eigen::MatrixXcd& entries) { basis.block(index, entries); });
  EXPECT_TRUE(factor.has_value());
  return std::move(*factor);
}

// Beside KLU, which pivots, on the matrix that another path assembled in one piece.
TEST(SymmetricFactor, AgreesWithKlu) {
  for (unsigned seed = 31; seed < 37; ++seed) {
    SCOPED_TRACE(seed);
    const IslandBasis basis(flatten(testing::random_building(seed, seed == 36 ? 60 : 15).network));
    EXPECT_FALSE(basis.is_pivoted());
    const Eigen::SparseMatrix<Complex> matrix = basis.assemble();
    const int size = static_cast<int>(matrix.rows());
    const SymmetricFactor factor = factor_of(basis, size);
    const SparseLu klu(matrix);
    std::mt19937 random(seed);
    std::uniform_int_distribution<int> pick(0, size - 1);
    std::vector<std::vector<SparseLu::Entry>> vectors;
    for (int i = 0; i < 20; ++i) vectors.push_back({{pick(random), 1.0}, {pick(random), {-1.0, 0.5}}});
    const std::vector<Complex> own = factor.quadratic_forms(vectors), other = klu.quadratic_forms(vectors);
    for (std::size_t i = 0; i < own.size(); ++i)  // condition 1e12 at most, of which the forms feel little
      EXPECT_LT(std::abs(own[i] - other[i]), 1e-9 * std::abs(other[i])) << i;
    Eigen::VectorXcd x = Eigen::VectorXcd::Random(size);
    const Eigen::VectorXcd right_side = x;
    factor.solve(x);
    // Backward error, a few roundings in each sum: no reference needed.
    EXPECT_LT((matrix * x - right_side).cwiseAbs().maxCoeff(),
              1e-13 * (matrix.cwiseAbs() * x.cwiseAbs() + right_side.cwiseAbs()).maxCoeff());
  }
}

// One front of more pivots than a panel holds, and a matrix that is dense below them.
TEST(SymmetricFactor, SolvesDenseBlocks) {
  std::srand(5);
  const int half = 120;
  Eigen::MatrixXcd block = Eigen::MatrixXcd::Random(2 * half, 2 * half);
  block = (block * block.transpose()).eval();
  block.diagonal().array() += Complex(500, 200);
  BlockPattern pattern;  // the first block's first half is in it alone, the rest in both
  for (const int first : {0, half}) {
    for (int i = 0; i < 2 * half; ++i) pattern.unknowns.push_back(first + i);
    pattern.begin.push_back(static_cast<int>(pattern.unknowns.size()));
  }
  const auto factor =
      SymmetricFactor::make(3 * half, pattern, [&](int, Eigen::MatrixXcd& entries) { entries = block; });
  ASSERT_TRUE(factor.has_value());
  Eigen::MatrixXcd whole = Eigen::MatrixXcd::Zero(3 * half, 3 * half);
  for (const int first : {0, half}) whole.block(first, first, 2 * half, 2 * half) += block;
  Eigen::VectorXcd x = Eigen::VectorXcd::Ones(3 * half);
  factor->solve(x);
  const Eigen::VectorXcd expected = whole.partialPivLu().solve(Eigen::VectorXcd::Ones(3 * half));
  EXPECT_LT((x - expected).norm(), 1e-11 * expected.norm());
}

TEST(SymmetricFactor, RefusesWhatIsSingular) {
  BlockPattern pattern{{0, 2}, {0, 1}};
  const auto ones = [](int, Eigen::MatrixXcd& entries) { entries.setOnes(2, 2); };
  EXPECT_FALSE(SymmetricFactor::make(2, pattern, ones).has_value());
  EXPECT_FALSE(SymmetricFactor::make(3, pattern, ones).has_value());  // an unknown that no block holds
}

// A coil and a capacitor in series, both without loss: j and -j meet at a node whose diagonal is zero, and
// the matrix is regular all the same.
TEST(IslandBasis, PivotsWhereALosslessResonanceNeedsIt) {
  Network network;
  network.node_count = 3;
  network.elements.push_back({1, 2, {0, -1}});
  network.elements.push_back({2, 0, {0, 1}});
  network.elements.push_back({1, 0, 1.0});
  network.sources.push_back({1, 0, 1.0, 1.0});
  const IslandBasis basis(flatten(network));
  // The resonance shorts node 1: the source drives 1 A through it, and 1 A in -j ohm is the volts between.
  const auto state = basis.solve({true, {}});
  EXPECT_LT(std::abs(basis.potential(state, 1)), 1e-14);
  EXPECT_LT(std::abs(basis.potential(state, 2) - Complex(0, -1)), 1e-14);
}

}  // namespace
}  // namespace engine
