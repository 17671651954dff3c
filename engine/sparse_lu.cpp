#include "engine/sparse_lu.h"

#include <klu.h>

#include <mutex>
#include <stdexcept>
#include <string>

namespace engine {
namespace {

// KLU takes complex numbers as pairs of double, which is how std::complex lies in memory
// ([complex.numbers] of the standard promises it), and never writes to the matrix.
double* as_doubles(const std::complex<double>* values) {
  return reinterpret_cast<double*>(const_cast<std::complex<double>*>(values));
}

[[noreturn]] void fail(const klu_common& common, const char* doing) {
  const char* why = common.status == KLU_SINGULAR        ? "the matrix is singular"
                    : common.status == KLU_OUT_OF_MEMORY ? "out of memory"
                    : common.status == KLU_TOO_LARGE     ? "the matrix is too large"
                                                         : "the matrix is invalid";
  throw std::runtime_error(std::string(doing) + " the network: " + why);
}

}  // namespace

struct SparseLu::Impl {
  klu_common common{};
  klu_symbolic* symbolic = nullptr;
  klu_numeric* numeric = nullptr;
  int size = 0;
  std::mutex solving;  // KLU keeps its workspace in the numeric object

  Impl() { klu_defaults(&common); }
  Impl(const Impl&) = delete;
  Impl& operator=(const Impl&) = delete;
  ~Impl() {
    if (numeric) klu_z_free_numeric(&numeric, &common);
    if (symbolic) klu_free_symbolic(&symbolic, &common);
  }
};

SparseLu::SparseLu(const Eigen::SparseMatrix<std::complex<double>>& matrix)
    : impl_(std::make_unique<Impl>()) {
  impl_->size = static_cast<int>(matrix.rows());
  if (impl_->size == 0) return;
  klu_common& common = impl_->common;
  common.btf = 0;     // the pattern is symmetric: block triangular means block diagonal, AMD sees that
  common.scale = 0;   // scaling rows alone would spoil the symmetry that makes diagonal pivots safe
  common.tol = 1e-3;  // keep to the diagonal
  int* columns = const_cast<int*>(matrix.outerIndexPtr());
  int* rows = const_cast<int*>(matrix.innerIndexPtr());
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

}  // namespace engine
