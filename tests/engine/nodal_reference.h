// Plain nodal analysis by Gauss elimination at any precision: an answer that shares nothing with the engine.
#pragma once

#include <boost/multiprecision/cpp_bin_float.hpp>
#include <complex>
#include <numbers>
#include <span>
#include <utility>
#include <vector>

#include "engine/network.h"

namespace engine::testing {

/// 45 decimal digits: 12 may cancel at a floating node and 30 are still right.
using Wide =
    boost::multiprecision::number<boost::multiprecision::cpp_bin_float<45>, boost::multiprecision::et_off>;

/// A network's nodal equations in complex numbers of Real, node voltages counted from earth.
template <typename Real>
class NodalReference {
 public:
  using Number = std::complex<Real>;
  using Matrix = std::vector<std::vector<Number>>;

  explicit NodalReference(const Network& network) : size_(network.node_count) {
    for (const Line& line : network.lines) size_ += (line.cells - 1) * static_cast<int>(line.from.size());
    matrix_.assign(size_, std::vector<Number>(size_));
    right_.assign(size_, Number{});
    int next = network.node_count;
    for (const Line& line : network.lines) add_line(network.frequency, line, next);
    for (const Element& element : network.elements)
      add_branch(element.a, element.b, wide(element.admittance));
    for (const Source& source : network.sources) {
      const Number y = Number(Real(1)) / wide(source.impedance);
      add_branch(source.a, source.b, y);
      right_[source.a] += y * wide(source.volts);
      right_[source.b] -= y * wide(source.volts);
    }
  }

  /// Node voltages, cells' inner nodes after the network's own.
  std::vector<Number> volts() const { return solve(right_); }

  /// Node voltages for 1 A into a and out of b, EMFs at rest.
  std::vector<Number> response(int a, int b) const {
    std::vector<Number> right(size_, Number{});
    right[a] += Number(Real(1));
    right[b] -= Number(Real(1));
    return solve(right);
  }

 private:
  static Number wide(Complex value) { return Number(Real(value.real()), Real(value.imag())); }
  static Real size_of(const Number& value) {
    using std::abs;
    return abs(value.real()) + abs(value.imag());
  }

  void add_branch(int a, int b, const Number& y) {
    matrix_[a][a] += y;
    matrix_[b][b] += y;
    matrix_[a][b] -= y;
    matrix_[b][a] -= y;
  }

  void add_line(double frequency, const Line& line, int& next) {
    const int n = static_cast<int>(line.from.size());
    const Real length = Real(line.length) / Real(line.cells);
    // 2 pi f is rounded to double in the engine too: the pi of the model, not of mathematics.
    const Real omega = Real(2 * std::numbers::pi * frequency);
    Matrix z(n, std::vector<Number>(n)), half(n, std::vector<Number>(n));
    for (int i = 0; i < n; ++i)
      for (int j = 0; j < n; ++j) {
        z[i][j] = wide(line.matrices->impedance(i, j)) * length;
        half[i][j] =
            Number(Real(line.matrices->conductance(i, j)), omega * Real(line.matrices->capacitance(i, j))) *
            (length / Real(2));
      }
    const Matrix y = inverse(z);
    std::vector<int> from = line.from;
    for (int cell = 0; cell < line.cells; ++cell) {
      std::vector<int> to = line.to;
      if (cell + 1 < line.cells)
        for (int& node : to) node = next++;
      for (int i = 0; i < n; ++i)
        for (int j = 0; j < n; ++j) {
          matrix_[from[i]][from[j]] += y[i][j] + half[i][j];
          matrix_[to[i]][to[j]] += y[i][j] + half[i][j];
          matrix_[from[i]][to[j]] -= y[i][j];
          matrix_[to[i]][from[j]] -= y[i][j];
        }
      from = to;
    }
  }

  static Matrix inverse(Matrix a) {
    const int n = static_cast<int>(a.size());
    Matrix result(n, std::vector<Number>(n));
    for (int i = 0; i < n; ++i) result[i][i] = Number(Real(1));
    for (int k = 0; k < n; ++k) {
      const Number pivot = Number(Real(1)) / a[k][k];
      for (int j = 0; j < n; ++j) a[k][j] *= pivot, result[k][j] *= pivot;
      for (int i = 0; i < n; ++i)
        if (const Number factor = a[i][k]; i != k && factor != Number{})
          for (int j = 0; j < n; ++j) a[i][j] -= factor * a[k][j], result[i][j] -= factor * result[k][j];
    }
    return result;
  }

  /// Eliminates earth by leaving out its row and column, then Gauss with row pivoting, zeros skipped.
  std::vector<Number> solve(std::vector<Number> right) const {
    Matrix a = matrix_;
    for (int k = size_ - 1; k > 0; --k) {
      int best = k;
      for (int i = k; i > 0; --i)
        if (size_of(a[i][k]) > size_of(a[best][k])) best = i;
      std::swap(a[k], a[best]);
      std::swap(right[k], right[best]);
      const Number pivot = Number(Real(1)) / a[k][k];
      std::vector<int> columns;
      for (int j = 1; j < k; ++j)
        if (a[k][j] != Number{}) columns.push_back(j);
      for (int i = k - 1; i > 0; --i) {
        if (a[i][k] == Number{}) continue;
        const Number factor = a[i][k] * pivot;
        for (const int j : columns) a[i][j] -= factor * a[k][j];
        right[i] -= factor * right[k];
      }
    }
    std::vector<Number> volts(size_, Number{});
    for (int k = 1; k < size_; ++k) {
      Number sum = right[k];
      for (int j = 1; j < k; ++j)
        if (a[k][j] != Number{}) sum -= a[k][j] * volts[j];
      volts[k] = sum / a[k][k];
    }
    return volts;
  }

  int size_ = 0;
  Matrix matrix_;
  std::vector<Number> right_;
};

}  // namespace engine::testing
