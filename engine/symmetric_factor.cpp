#include "engine/symmetric_factor.h"

#include <algorithm>
#include <cmath>
#include <functional>
#include <iterator>
#include <queue>
#include <utility>

#include "engine/elimination_order.h"

namespace engine {
namespace {

using Complex = std::complex<double>;

// Of what a diagonal entry was when its front was put together; rounding alone leaves 1e-16.
constexpr double k_vanished = 1e-14;
// From here on the product of a small matrix pays for packing its operands.
constexpr Eigen::Index k_blocked = 32;
constexpr Eigen::Index k_panel = 48;  // pivots; few enough that a panel stays in cache

/// One group of pivots and the rows below it. In `columns` the pivots' own block comes first, with the
/// inverse of D on its diagonal and L below; then the rows.
struct Front {
  int first = 0;          // place of the first pivot
  int pivots = 0;         // how many
  std::vector<int> rows;  // places, rising
  Eigen::MatrixXcd columns;

  Eigen::Index height() const { return pivots + static_cast<Eigen::Index>(rows.size()); }
  auto top() const { return columns.topRows(pivots); }
  auto below() const { return columns.bottomRows(static_cast<Eigen::Index>(rows.size())); }
};

/// What an eliminated front leaves to its rows; the lower triangle counts.
struct Remainder {
  const std::vector<int>* rows = nullptr;
  Eigen::MatrixXcd entries;
};

/// Takes columns `first` to `last` out of the lower triangle that begins at `last`. They hold L D there, and
/// L afterwards.
void take_out(Eigen::MatrixXcd& front, Eigen::Index first, Eigen::Index last) {
  const Eigen::Index rest = front.rows() - last, width = last - first;
  const Eigen::MatrixXcd unscaled = front.block(last, first, rest, width);
  for (Eigen::Index j = first; j < last; ++j) front.col(j).tail(front.rows() - j - 1) *= front(j, j);
  if (rest >= k_blocked) {
    front.bottomRightCorner(rest, rest).triangularView<Eigen::Lower>() -=
        front.block(last, first, rest, width) * unscaled.transpose();
    return;
  }
  for (Eigen::Index c = 0; c < rest; ++c)
    front.col(last + c).tail(rest - c).noalias() -=
        front.block(last + c, first, rest - c, width).lazyProduct(unscaled.row(c).transpose());
}

/// Eliminates the pivots of `front`, a panel at a time, and leaves the Schur complement in its lower right.
/// False if a pivot vanishes.
bool eliminate(Eigen::MatrixXcd& front, int pivots) {
  const Eigen::Index size = front.rows();
  const Eigen::VectorXd before = front.diagonal().head(pivots).cwiseAbs();
  for (Eigen::Index first = 0; first < pivots; first += k_panel) {
    const Eigen::Index last = std::min<Eigen::Index>(first + k_panel, pivots);
    for (Eigen::Index j = first; j < last; ++j) {
      const double pivot = std::abs(front(j, j));
      if (!(pivot > k_vanished * before[j]) || !std::isfinite(pivot)) return false;
      front(j, j) = 1.0 / front(j, j);
      for (Eigen::Index c = j + 1; c < last; ++c)
        front.col(c).tail(size - c) -= (front(c, j) * front(j, j)) * front.col(j).tail(size - c);
    }
    take_out(front, first, last);
  }
  return true;
}

}  // namespace

struct SymmetricFactor::Impl {
  Impl(int size, const BlockPattern& pattern)
      : order(elimination_order(size, pattern)), group_at(size), fronts(order.begin.size() - 1) {
    for (std::size_t g = 0; g < fronts.size(); ++g)
      for (int place = order.begin[g]; place < order.begin[g + 1]; ++place)
        group_at[place] = static_cast<int>(g);
  }

  bool factor(const BlockPattern& pattern, const BlockOf& block_of);
  Complex climb(const std::vector<SparseLu::Entry>& vector, std::vector<Complex>& values) const;

  EliminationOrder order;
  std::vector<int> group_at;  // of each place
  std::vector<Front> fronts;  // of each group
};

namespace {

/// The work of a factorisation, front by front.
class Elimination {
 public:
  Elimination(const EliminationOrder& order, const std::vector<int>& group_at, const BlockPattern& pattern,
              const SymmetricFactor::BlockOf& block_of)
      : order_(order),
        group_at_(group_at),
        pattern_(pattern),
        block_of_(block_of),
        local_(group_at.size(), -1),
        blocks_(order.begin.size()),
        remainders_(order.begin.size()) {
    for (int block = 0; block < pattern.count(); ++block) {
      if (pattern.size(block) == 0) continue;
      int first = static_cast<int>(group_at.size());
      for (int p = pattern.begin[block]; p < pattern.begin[block + 1]; ++p)
        first = std::min(first, order.place[pattern.unknowns[p]]);
      blocks_[group_at[first]].push_back(block);
    }
  }

  bool make(int group, Front& front) {
    front.first = order_.begin[group];
    front.pivots = order_.begin[group + 1] - front.first;
    find_rows(group, front);
    dense_.setZero(front.height(), front.height());
    for (const int block : blocks_[group]) add_block(block);
    for (const Remainder& remainder : remainders_[group]) add_remainder(remainder);
    for (const int row : front.rows) local_[row] = -1;
    for (int i = 0; i < front.pivots; ++i) local_[front.first + i] = -1;
    remainders_[group] = {};
    if (!eliminate(dense_, front.pivots)) return false;
    front.columns = dense_.leftCols(front.pivots);
    const auto rest = static_cast<Eigen::Index>(front.rows.size());
    if (rest > 0)
      remainders_[group_at_[front.rows.front()]].push_back(
          {&front.rows, dense_.bottomRightCorner(rest, rest)});
    return true;
  }

 private:
  void find_rows(int group, Front& front) {
    const auto meet = [&](int place) {
      if (local_[place] >= 0) return;
      local_[place] = 0;
      if (place >= front.first + front.pivots) front.rows.push_back(place);
    };
    for (const int block : blocks_[group])
      for (int p = pattern_.begin[block]; p < pattern_.begin[block + 1]; ++p)
        meet(order_.place[pattern_.unknowns[p]]);
    for (const Remainder& remainder : remainders_[group])
      for (const int place : *remainder.rows) meet(place);
    std::sort(front.rows.begin(), front.rows.end());
    front.rows.shrink_to_fit();
    for (int i = 0; i < front.pivots; ++i) local_[front.first + i] = i;
    for (std::size_t i = 0; i < front.rows.size(); ++i)
      local_[front.rows[i]] = front.pivots + static_cast<int>(i);
  }

  void add_block(int block) {
    block_of_(block, entries_);
    const int* unknowns = pattern_.unknowns.data() + pattern_.begin[block];
    for (int j = 0; j < pattern_.size(block); ++j) {
      const int column = local_[order_.place[unknowns[j]]];
      for (int i = 0; i < pattern_.size(block); ++i)
        if (const int row = local_[order_.place[unknowns[i]]]; row >= column)
          dense_(row, column) += entries_(i, j);
    }
  }

  void add_remainder(const Remainder& remainder) {  // rows rise, and so do their places in the front
    const std::vector<int>& rows = *remainder.rows;
    for (std::size_t j = 0; j < rows.size(); ++j) {
      const int column = local_[rows[j]];
      for (std::size_t i = j; i < rows.size(); ++i)
        dense_(local_[rows[i]], column) += remainder.entries(i, j);
    }
  }

  const EliminationOrder& order_;
  const std::vector<int>& group_at_;
  const BlockPattern& pattern_;
  const SymmetricFactor::BlockOf& block_of_;
  std::vector<int> local_;                          // of each place: its row in the front at work, -1 if none
  std::vector<std::vector<int>> blocks_;            // that come in with each group
  std::vector<std::vector<Remainder>> remainders_;  // of the group's children in the elimination tree
  Eigen::MatrixXcd dense_, entries_;
};

}  // namespace

bool SymmetricFactor::Impl::factor(const BlockPattern& pattern, const BlockOf& block_of) {
  Elimination elimination(order, group_at, pattern, block_of);
  for (std::size_t g = 0; g < fronts.size(); ++g)
    if (!elimination.make(static_cast<int>(g), fronts[g])) return false;
  return true;
}

/// y^T inv(D) y with L y = r. `values` is zero at every place, and is left so.
Complex SymmetricFactor::Impl::climb(const std::vector<SparseLu::Entry>& vector,
                                     std::vector<Complex>& values) const {
  std::priority_queue<int, std::vector<int>, std::greater<>> waiting;
  for (const SparseLu::Entry& entry : vector) {
    values[order.place[entry.row]] += entry.value;
    waiting.push(group_at[order.place[entry.row]]);
  }
  Complex sum;
  while (!waiting.empty()) {
    const Front& front = fronts[waiting.top()];
    while (!waiting.empty() && &fronts[waiting.top()] == &front) waiting.pop();
    Eigen::Map<Eigen::VectorXcd> own(values.data() + front.first, front.pivots);
    front.top().triangularView<Eigen::UnitLower>().solveInPlace(own);
    for (int j = 0; j < front.pivots; ++j) {
      sum += own[j] * own[j] * front.columns(j, j);
      for (std::size_t i = 0; i < front.rows.size(); ++i)
        values[front.rows[i]] -= front.columns(front.pivots + i, j) * own[j];
    }
    own.setZero();
    if (!front.rows.empty()) waiting.push(group_at[front.rows.front()]);
  }
  return sum;
}

SymmetricFactor::SymmetricFactor(std::unique_ptr<Impl> impl) : impl_(std::move(impl)) {}
SymmetricFactor::~SymmetricFactor() = default;
SymmetricFactor::SymmetricFactor(SymmetricFactor&&) noexcept = default;
SymmetricFactor& SymmetricFactor::operator=(SymmetricFactor&&) noexcept = default;

std::optional<SymmetricFactor> SymmetricFactor::make(int size, const BlockPattern& pattern,
                                                     const BlockOf& block_of) {
  auto impl = std::make_unique<Impl>(size, pattern);
  if (!impl->factor(pattern, block_of)) return std::nullopt;
  return SymmetricFactor(std::move(impl));
}

void SymmetricFactor::solve(Eigen::Ref<Eigen::VectorXcd> right_side) const {
  Eigen::VectorXcd x(right_side.size());
  for (Eigen::Index i = 0; i < x.size(); ++i) x[impl_->order.place[i]] = right_side[i];
  Eigen::VectorXcd rest;
  for (const Front& front : impl_->fronts) {
    auto own = x.segment(front.first, front.pivots);
    front.top().triangularView<Eigen::UnitLower>().solveInPlace(own);
    rest = front.below().lazyProduct(own);
    for (std::size_t i = 0; i < front.rows.size(); ++i) x[front.rows[i]] -= rest[i];
  }
  for (std::size_t i = impl_->fronts.size(); i-- > 0;) {
    const Front& front = impl_->fronts[i];
    auto own = x.segment(front.first, front.pivots);
    own.array() *= front.columns.diagonal().array();
    rest = x(front.rows);
    own -= front.below().transpose().lazyProduct(rest);
    front.top().transpose().triangularView<Eigen::UnitUpper>().solveInPlace(own);
  }
  for (Eigen::Index i = 0; i < x.size(); ++i) right_side[i] = x[impl_->order.place[i]];
}

std::vector<Complex> SymmetricFactor::quadratic_forms(
    const std::vector<std::vector<SparseLu::Entry>>& vectors) const {
  std::vector<Complex> values(impl_->group_at.size()), forms;
  forms.reserve(vectors.size());
  for (const std::vector<SparseLu::Entry>& vector : vectors) forms.push_back(impl_->climb(vector, values));
  return forms;
}

std::size_t SymmetricFactor::entries() const {
  std::size_t sum = 0;
  for (const Front& front : impl_->fronts) sum += front.columns.size();
  return sum;
}

}  // namespace engine
