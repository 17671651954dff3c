#include "engine/sensitivity.h"

#include "engine/solve_impl.h"

namespace engine {

// With the nodal equations Y v = J, V = e^T v and Z = e^T y, where Y y = e = e_a - e_b: dV = -y^T dY v and
// dZ = -y^T dY y, so dR = -y^T dY w with w = by_volts v + by_impedance y.
struct Sensitivity::Impl {
  const SolvedNetwork::Impl& solved;
  Observable observable;
  IslandBasis::State adjoint;

  Impl(const SolvedNetwork::Impl& s, const Observable& o)
      : solved(s), observable(o), adjoint(s.basis.solve({false, {{o.a, 1.0}, {o.b, -1.0}}})) {}

  struct Pair {
    Eigen::VectorXcd y;
    Eigen::VectorXcd w;
  };

  Eigen::VectorXcd combined(const Eigen::VectorXcd& v, const Eigen::VectorXcd& y) const {
    return observable.by_volts * v + observable.by_impedance * y;
  }

  Pair potentials(std::span<const int> nodes) const {
    const auto n = static_cast<Eigen::Index>(nodes.size());
    Eigen::VectorXcd v(n);
    Eigen::VectorXcd y(n);
    for (Eigen::Index i = 0; i < n; ++i) {
      v(i) = solved.basis.potential(solved.state, nodes[i]);
      y(i) = solved.basis.potential(adjoint, nodes[i]);
    }
    return {y, combined(v, y)};
  }

  Pair drops(const Section& section) const {
    const Eigen::VectorXcd y = solved.basis.series_drops(adjoint, section);
    return {y, combined(solved.basis.series_drops(solved.state, section), y)};
  }

  Complex drop(const IslandBasis::State& state, int a, int b) const { return solved.basis.drop(state, a, b); }

  template <typename Visit>
  void each_section(int line, Visit visit) const {
    for (int k = solved.first_section[line]; k < solved.first_section[line + 1]; ++k)
      visit(solved.basis.network().sections[k]);
  }

  double cell_length(int line) const {
    return solved.network.lines[line].length / solved.network.lines[line].cells;
  }
};

Sensitivity::Sensitivity(const SolvedNetwork& solved, const Observable& observable)
    : impl_(std::make_unique<Impl>(*solved.impl_, observable)) {}
Sensitivity::~Sensitivity() = default;

Eigen::MatrixXcd Sensitivity::by_shunt(int line) const {
  const auto n = static_cast<Eigen::Index>(impl_->solved.network.lines[line].from.size());
  Eigen::MatrixXcd sum = Eigen::MatrixXcd::Zero(n, n);
  impl_->each_section(line, [&](const Section& section) {
    const FlatNetwork& flat = impl_->solved.basis.network();
    for (const auto ends : {flat.from(section), flat.to(section)}) {
      const Impl::Pair at = impl_->potentials(ends);
      sum -= at.y * at.w.transpose();
    }
  });
  return sum * (impl_->cell_length(line) / 2);
}

Eigen::MatrixXcd Sensitivity::by_impedance(int line) const {
  const auto n = static_cast<Eigen::Index>(impl_->solved.network.lines[line].from.size());
  Eigen::MatrixXcd sum = Eigen::MatrixXcd::Zero(n, n);
  impl_->each_section(line, [&](const Section& section) {
    // d inv(Z) = -inv(Z) dZ inv(Z), and inv(Z) times a drop is a current.
    const Impl::Pair across = impl_->drops(section);
    const Eigen::MatrixXcd& series = section.blocks->series;
    sum += (series * across.y) * (series * across.w).transpose();
  });
  return sum * impl_->cell_length(line);
}

Complex Sensitivity::by_length(int line) const {
  Complex sum = 0.0;
  impl_->each_section(line, [&](const Section& section) {
    const FlatNetwork& flat = impl_->solved.basis.network();
    const Impl::Pair across = impl_->drops(section);
    sum += (across.y.transpose() * section.blocks->series * across.w)(0);
    for (const auto ends : {flat.from(section), flat.to(section)}) {
      const Impl::Pair at = impl_->potentials(ends);
      sum -= (at.y.transpose() * section.blocks->half_shunt * at.w)(0);
    }
  });
  return sum / impl_->solved.network.lines[line].length;
}

Complex Sensitivity::by_element(int element) const {
  const Element& one = impl_->solved.network.elements[element];
  const Complex y = impl_->drop(impl_->adjoint, one.a, one.b);
  const Complex v = impl_->drop(impl_->solved.state, one.a, one.b);
  return -y * (impl_->observable.by_volts * v + impl_->observable.by_impedance * y);
}

Complex Sensitivity::by_emf(int source) const {
  const Source& one = impl_->solved.network.sources[source];
  return impl_->observable.by_volts * impl_->drop(impl_->adjoint, one.a, one.b) / one.impedance;
}

}  // namespace engine
