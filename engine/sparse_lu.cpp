#include "engine/sparse_lu.h"

#include <klu.h>

#include <functional>
#include <mutex>
#include <optional>
#include <queue>
#include <stdexcept>
#include <string>

namespace engine {
namespace {

using Complex = std::complex<double>;

// KLU takes complex numbers as pairs of double, which is how std::complex lies in memory
// ([complex.numbers] of the standard promises it).
double* as_doubles(Complex* values) { return reinterpret_cast<double*>(values); }

[[noreturn]] void fail(const klu_common& common, const char* doing) {
  const char* why = common.status == KLU_SINGULAR        ? "the matrix is singular"
                    : common.status == KLU_OUT_OF_MEMORY ? "out of memory"
                    : common.status == KLU_TOO_LARGE     ? "the matrix is too large"
                                                         : "the matrix is invalid";
  throw std::runtime_error(std::string(doing) + " the network: " + why);
}

/// A lower triangular matrix by columns, for right sides that are nearly empty.
class LowerColumns {
 public:
  /// Column k has entries begin[k] to begin[k + 1].
  LowerColumns(std::vector<int> begin, std::vector<int> rows, std::vector<Complex> values)
      : begin_(std::move(begin)), rows_(std::move(rows)), values_(std::move(values)), solution_(size()) {}

  int size() const { return static_cast<int>(begin_.size()) - 1; }

  /// Solves for a sparse right side and returns the whole solution, zero but at `touched()`.
  const std::vector<Complex>& solve(const std::vector<SparseLu::Entry>& right_side) {
    for (const int row : touched_) solution_[row] = 0;
    touched_.clear();
    for (const SparseLu::Entry& entry : right_side) {
      solution_[entry.row] += entry.value;
      waiting_.push(entry.row);
    }
    while (!waiting_.empty()) {
      const int column = waiting_.top();
      while (!waiting_.empty() && waiting_.top() == column) waiting_.pop();
      touched_.push_back(column);
      eliminate(column);
    }
    return solution_;
  }

  const std::vector<int>& touched() const { return touched_; }

 private:
  void eliminate(int column) {
    for (int p = begin_[column]; p < begin_[column + 1]; ++p)
      if (rows_[p] == column) solution_[column] /= values_[p];
    for (int p = begin_[column]; p < begin_[column + 1]; ++p) {
      if (rows_[p] == column) continue;
      if (solution_[rows_[p]] == Complex{}) waiting_.push(rows_[p]);
      solution_[rows_[p]] -= values_[p] * solution_[column];
    }
  }

  std::vector<int> begin_, rows_;
  std::vector<Complex> values_;
  std::vector<Complex> solution_;
  std::vector<int> touched_;
  std::priority_queue<int, std::vector<int>, std::greater<>> waiting_;
};

/// What KLU hands out of its factors: L U = A with rows permuted by `rows` and columns by `columns`.
struct Factors {
  LowerColumns lower, upper_transposed;
  std::vector<int> place_of_row, place_of_column;
};

std::vector<Complex> joined(const std::vector<double>& real, const std::vector<double>& imaginary) {
  std::vector<Complex> values(real.size());
  for (std::size_t i = 0; i < values.size(); ++i) values[i] = {real[i], imaginary[i]};
  return values;
}

LowerColumns transposed(const std::vector<int>& begin, const std::vector<int>& rows,
                        const std::vector<Complex>& values) {
  const int n = static_cast<int>(begin.size()) - 1;
  std::vector<int> new_begin(begin.size()), new_rows(rows.size());
  std::vector<Complex> new_values(values.size());
  for (const int row : rows) ++new_begin[row + 1];
  for (int i = 0; i < n; ++i) new_begin[i + 1] += new_begin[i];
  std::vector<int> next(new_begin.begin(), new_begin.end() - 1);
  for (int column = 0; column < n; ++column)
    for (int p = begin[column]; p < begin[column + 1]; ++p) {
      const int place = next[rows[p]]++;
      new_rows[place] = column;
      new_values[place] = values[p];
    }
  return {std::move(new_begin), std::move(new_rows), std::move(new_values)};
}

std::vector<int> inverse(const std::vector<int>& permutation) {
  std::vector<int> place(permutation.size());
  for (std::size_t i = 0; i < permutation.size(); ++i) place[permutation[i]] = static_cast<int>(i);
  return place;
}

}  // namespace

struct SparseLu::Impl {
  klu_common common{};
  klu_symbolic* symbolic = nullptr;
  klu_numeric* numeric = nullptr;
  int size = 0;
  std::mutex solving;  // KLU keeps its workspace in the numeric object, LowerColumns its own
  std::optional<Factors> factors;

  Impl() { klu_defaults(&common); }
  Impl(const Impl&) = delete;
  Impl& operator=(const Impl&) = delete;
  ~Impl() {
    if (numeric) klu_z_free_numeric(&numeric, &common);
    if (symbolic) klu_free_symbolic(&symbolic, &common);
  }

  Factors extract();
};

Factors SparseLu::Impl::extract() {
  const std::size_t in_lower = numeric->lnz, in_upper = numeric->unz;
  std::vector<int> lower_begin(size + 1), lower_rows(in_lower), upper_begin(size + 1), upper_rows(in_upper);
  std::vector<double> lower_real(in_lower), lower_imag(in_lower), upper_real(in_upper), upper_imag(in_upper);
  std::vector<int> rows(size), columns(size);
  if (!klu_z_extract(numeric, symbolic, lower_begin.data(), lower_rows.data(), lower_real.data(),
                     lower_imag.data(), upper_begin.data(), upper_rows.data(), upper_real.data(),
                     upper_imag.data(), nullptr, nullptr, nullptr, nullptr, rows.data(), columns.data(),
                     nullptr, nullptr, &common))
    fail(common, "reading the factors of");
  return {LowerColumns(std::move(lower_begin), std::move(lower_rows), joined(lower_real, lower_imag)),
          transposed(upper_begin, upper_rows, joined(upper_real, upper_imag)), inverse(rows),
          inverse(columns)};
}

SparseLu::SparseLu(Eigen::SparseMatrix<Complex> matrix) : impl_(std::make_unique<Impl>()) {
  impl_->size = static_cast<int>(matrix.rows());
  if (impl_->size == 0) return;
  klu_common& common = impl_->common;
  common.btf = 0;     // the pattern is symmetric: block triangular means block diagonal, AMD sees that
  common.scale = 0;   // scaling rows alone would spoil the symmetry that makes diagonal pivots safe
  common.tol = 1e-3;  // keep to the diagonal
  int* columns = matrix.outerIndexPtr();
  int* rows = matrix.innerIndexPtr();
  impl_->symbolic = klu_analyze(impl_->size, columns, rows, &common);
  if (!impl_->symbolic) fail(common, "ordering");
  impl_->numeric = klu_z_factor(columns, rows, as_doubles(matrix.valuePtr()), impl_->symbolic, &common);
  if (!impl_->numeric || common.status != KLU_OK) fail(common, "factoring");
}

SparseLu::~SparseLu() = default;
SparseLu::SparseLu(SparseLu&&) noexcept = default;
SparseLu& SparseLu::operator=(SparseLu&&) noexcept = default;

void SparseLu::solve(Eigen::MatrixXcd& right_sides) const {
  if (impl_->size == 0) return;
  const std::lock_guard lock(impl_->solving);
  if (!klu_z_solve(impl_->symbolic, impl_->numeric, impl_->size, static_cast<int>(right_sides.cols()),
                   as_doubles(right_sides.data()), &impl_->common))
    fail(impl_->common, "solving");
}

std::vector<Complex> SparseLu::quadratic_forms(const std::vector<std::vector<Entry>>& vectors) const {
  const std::lock_guard lock(impl_->solving);
  std::vector<Complex> forms(vectors.size());
  if (impl_->size == 0) return forms;
  if (!impl_->factors) impl_->factors.emplace(impl_->extract());
  Factors& factors = *impl_->factors;
  const auto placed = [](std::vector<Entry> entries, const std::vector<int>& place) {
    for (Entry& entry : entries) entry.row = place[entry.row];
    return entries;
  };
  for (std::size_t i = 0; i < vectors.size(); ++i) {
    const std::vector<Complex>& left =
        factors.upper_transposed.solve(placed(vectors[i], factors.place_of_column));
    const std::vector<Complex>& right = factors.lower.solve(placed(vectors[i], factors.place_of_row));
    for (const int row : factors.lower.touched()) forms[i] += left[row] * right[row];
  }
  return forms;
}

}  // namespace engine
