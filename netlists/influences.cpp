#include "netlists/influences.h"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

#include "engine/sensitivity.h"
#include "netlists/drawn_network.h"
#include "netlists/reading.h"

namespace netlists {
namespace {

using engine::Complex;

constexpr double k_least_share = 1e-3;
constexpr double k_errors_apart = 3.0;  // standard errors between two means that differ

/// The first-order change of a Maxwell matrix whose partial capacitances change by `logarithms`.
Eigen::MatrixXd change_of_partials(const Eigen::MatrixXd& maxwell, const Eigen::MatrixXd& logarithms) {
  const Eigen::VectorXd to_earth = maxwell.rowwise().sum().cwiseProduct(logarithms.diagonal());
  Eigen::MatrixXd change = maxwell.cwiseProduct(logarithms);
  change.diagonal().setZero();
  change.diagonal() = to_earth - change.rowwise().sum();
  return change;
}

/// How one reading follows everything.
class Follower {
 public:
  Follower(const Building& staged, const Lowered& lowered, const engine::SolvedNetwork& solved,
           const Draws& draws, const InstrumentType& instrument, const RankedReading& ranked, int node,
           int reference)
      : building_(staged),
        lowered_(lowered),
        draws_(draws),
        all_(draws.uncertain()),
        omega_(2 * std::numbers::pi * staged.frequency),
        port_{ranked.place->open_circuit, ranked.place->source_impedance},
        input_(
            input_impedance(instrument, resistance_in_force(instrument, *ranked.reading), staged.frequency)),
        phasor_(port_.volts * input_ / (input_ + port_.impedance)),
        instrument_(instrument),
        sensitivity_(solved, {node, reference, input_ / (input_ + port_.impedance),
                              -port_.volts * input_ / std::pow(input_ + port_.impedance, 2)}) {
    for (std::size_t l = 0; l < lowered.network.lines.size(); ++l) {
      by_shunt_.push_back(sensitivity_.by_shunt(static_cast<int>(l)));
      by_impedance_.push_back(sensitivity_.by_impedance(static_cast<int>(l)));
    }
  }

  /// V for one standard deviation of a continuous quantity.
  double per_deviation(const Quantity& quantity) const {
    return magnitude(derivative(quantity)) * quantity.spread.sigma();
  }

  /// V, standard deviation that the layouts of a line cause.
  double by_layouts(std::size_t line) const {
    const Stretch& stretch = lowered_.line_stretches[line];
    const SectionContent& content = draws_.bank().content(stretch);
    const int count = content.layout_count();
    if (count < 2) return 0.0;
    double sum = 0.0;
    double squares = 0.0;
    for (int k = 0; k < count; ++k) {
      const double v = magnitude(of_matrices(line, content.layout(k)));
      sum += v;
      squares += v * v;
    }
    const double variance = (squares - sum * sum / count) / (count - 1);
    const int wander = all_.find(Quantity::Kind::wander, stretch.runs.front());
    const double length = lowered_.network.lines[line].length;
    const double held = wander < 0 ? 1.0 : length / all_.quantities[wander].spread.quantile(0.5);
    const double picks = std::max(1.0, std::round(held));
    // Of the mean of so many picks out of a bank that is itself a sample of `count` layouts.
    return std::sqrt(std::max(0.0, variance) * (1 / picks + (1 - 1 / picks) / count));
  }

 private:
  // The change of |R| with R's: the part of dR in phase with R.
  double magnitude(Complex change) const {
    const double size = std::abs(phasor_);
    return size == 0.0 ? 0.0 : (std::conj(phasor_) * change).real() / size;
  }

  Complex of_matrices(std::size_t line, const engine::LineMatrices& matrices) const {
    const Eigen::MatrixXcd shunt = matrices.conductance + Complex(0, omega_) * matrices.capacitance;
    return by_shunt_[line].cwiseProduct(shunt).sum() +
           by_impedance_[line].cwiseProduct(matrices.impedance).sum();
  }

  Complex of_logarithms(std::size_t line, const Eigen::MatrixXd& logarithms) const {
    const engine::LineMatrices& matrices = *lowered_.network.lines[line].matrices;
    const Eigen::MatrixXcd shunt = change_of_partials(matrices.conductance, logarithms) +
                                   Complex(0, omega_) * change_of_partials(matrices.capacitance, logarithms);
    return by_shunt_[line].cwiseProduct(shunt).sum();
  }

  template <typename Of>
  Complex over_lines(Of of) const {
    Complex sum = 0.0;
    for (std::size_t l = 0; l < lowered_.network.lines.size(); ++l) sum += of(l);
    return sum;
  }

  bool begins_with(std::size_t line, int run) const {
    return lowered_.line_stretches[line].runs.front() == run;
  }

  Complex by_log_permittivity(int insulation) const {
    return over_lines([&](std::size_t line) {
      Complex sum = 0.0;
      for (const auto& slope : draws_.bank().content(lowered_.line_stretches[line]).slopes())
        if (slope.insulation == insulation) sum += of_logarithms(line, slope.log_slope);
      return sum;
    });
  }

  Complex by_thickness(const std::string& type) const {
    const WireType& wire = building_.catalogue.wires.at(type);
    const double coat = wire.outer_diameter() / wire.conductor_diameter - 1;
    const double log_permittivity = -coat / ((1 + coat) * std::log1p(coat));  // per unit of the factor
    Complex sum = 0.0;
    for (std::size_t i = 0; i < all_.insulations.size(); ++i)
      if (all_.insulations[i].owner == type)
        sum += log_permittivity * by_log_permittivity(static_cast<int>(i));
    return sum;
  }

  Complex by_clearance(const Quantity& quantity) const {
    constexpr double k_step = 0.05;  // of the logarithm: well within one interval of the solved heights
    return over_lines([&](std::size_t line) -> Complex {
      if (!begins_with(line, quantity.index)) return 0.0;
      const SectionContent& content = draws_.bank().content(lowered_.line_stretches[line]);
      const double at = quantity.spread.mid;
      const Eigen::MatrixXd slope = (content.log_clearance_factor(at * std::exp(k_step)) -
                                     content.log_clearance_factor(at * std::exp(-k_step))) /
                                    (2 * k_step);
      return of_logarithms(line, slope) / at;
    });
  }

  Complex by_supply(const Quantity& quantity) const {
    Complex sum = 0.0;
    for (std::size_t s = 0; s < lowered_.network.sources.size(); ++s) {
      const std::string& name = lowered_.source_names[s];
      if (draws_.root_supply_of(name.substr(0, name.rfind(' '))) != quantity.target) continue;
      sum += sensitivity_.by_emf(static_cast<int>(s)) * lowered_.network.sources[s].volts;
    }
    return quantity.kind == Quantity::Kind::supply_angle ? Complex(0, 1) * sum : sum;
  }

  // By a factor on its resistance R: with admittance 1/R + j omega C, dM = M^2 / R.
  Complex by_instrument() const {
    const Complex m = input_;
    const double conductance = (1.0 / input_).real();
    return port_.volts * port_.impedance / std::pow(m + port_.impedance, 2) * m * m * conductance;
  }

  Complex derivative(const Quantity& quantity) const {
    switch (quantity.kind) {
      case Quantity::Kind::supply_volts:
      case Quantity::Kind::supply_angle:
        return by_supply(quantity);
      case Quantity::Kind::length:
        return over_lines([&](std::size_t line) -> Complex {
          if (!begins_with(line, quantity.index)) return 0.0;
          return sensitivity_.by_length(static_cast<int>(line)) * lowered_.network.lines[line].length;
        });
      case Quantity::Kind::clearance:
        return by_clearance(quantity);
      case Quantity::Kind::permittivity:
        return by_log_permittivity(quantity.index) / quantity.spread.mid;
      case Quantity::Kind::thickness:
        return by_thickness(quantity.target);
      case Quantity::Kind::instrument_resistance:
        return quantity.target == instrument_.name ? by_instrument() : 0.0;
      case Quantity::Kind::instrument_reading:
        return quantity.target == instrument_.name ? phasor_ : 0.0;
      case Quantity::Kind::wander:  // only with layouts
      case Quantity::Kind::unlisted_load:
      case Quantity::Kind::state:
        break;
    }
    return 0.0;
  }

  const Building& building_;
  const Lowered& lowered_;
  const Draws& draws_;
  const Uncertain& all_;
  double omega_;
  Port port_;
  Complex input_;
  Complex phasor_;
  const InstrumentType& instrument_;
  engine::Sensitivity sensitivity_;
  std::vector<Eigen::MatrixXcd> by_shunt_;
  std::vector<Eigen::MatrixXcd> by_impedance_;
};

/// V: the difference of means with and without, times the standard deviation of being there; 0 where the
/// draws cannot tell it from none.
double by_chance(const std::vector<double>& readings, const std::vector<bool>& there) {
  double sum[2] = {0.0, 0.0};
  double squares[2] = {0.0, 0.0};
  double count[2] = {0.0, 0.0};
  for (std::size_t k = 0; k < readings.size(); ++k) {
    if (!std::isfinite(readings[k])) continue;
    const int with = there[k] ? 1 : 0;
    sum[with] += readings[k];
    squares[with] += readings[k] * readings[k];
    ++count[with];
  }
  if (count[0] < 2 || count[1] < 2) return 0.0;
  const double apart = sum[1] / count[1] - sum[0] / count[0];
  double error = 0.0;
  for (const int with : {0, 1})
    error += std::max(0.0, squares[with] / count[with] - std::pow(sum[with] / count[with], 2)) / count[with];
  if (std::abs(apart) < k_errors_apart * std::sqrt(error)) return 0.0;
  const double share = count[1] / (count[0] + count[1]);
  return apart * std::sqrt(share * (1 - share));
}

bool by_difference(const Quantity& quantity) {
  return quantity.kind == Quantity::Kind::state || quantity.kind == Quantity::Kind::unlisted_load;
}

/// Shares of the sum of variances, sorted.
std::vector<Influence> shared(std::vector<Influence> all) {
  double variance = 0.0;
  for (const Influence& one : all) variance += one.derivative * one.derivative;
  for (Influence& one : all) one.share = variance > 0 ? one.derivative * one.derivative / variance : 0.0;
  std::erase_if(all, [](const Influence& one) { return !(one.share >= k_least_share); });
  std::stable_sort(all.begin(), all.end(),
                   [](const Influence& a, const Influence& b) { return a.share > b.share; });
  return all;
}

}  // namespace

RankedReading ranked_reading(const ConductorFindings& found) {
  RankedReading best;
  for (const PlaceFindings& at : found.places)
    for (const Reading& reading : at.readings) {
      if (!reading.judged || reading.reference != at.reference) continue;
      if (best.reading == nullptr || reading.volts > best.reading->volts) best = {&at, &reading};
    }
  return best;
}

std::vector<Influence> influences(const Building& staged, const Lowered& lowered,
                                  const engine::SolvedNetwork& solved, const Draws& draws,
                                  const ConductorFindings& found) {
  const RankedReading ranked = ranked_reading(found);
  if (ranked.reading == nullptr) return {};
  const auto instrument =
      std::find_if(staged.instruments.begin(), staged.instruments.end(),
                   [&](const InstrumentType& one) { return one.name == ranked.reading->instrument; });
  const int node = lowered.at.at(found.id + "@" + ranked.place->place);
  const int reference = ranked.place->reference == "earth"
                            ? 0
                            : lowered.at.at(ranked.place->reference + "@" + ranked.place->place);
  if (node == reference) return {};
  const Follower follower(staged, lowered, solved, draws, *instrument, ranked, node, reference);
  std::vector<Influence> all;
  const Uncertain& uncertain = draws.uncertain();
  const std::vector<double> readings = draws.readings(found, *ranked.place, *ranked.reading);
  for (std::size_t q = 0; q < uncertain.quantities.size(); ++q) {
    const Quantity& quantity = uncertain.quantities[q];
    const double moved = by_difference(quantity) ? by_chance(readings, draws.there(static_cast<int>(q)))
                                                 : follower.per_deviation(quantity);
    all.push_back({quantity.name, moved, 0.0});
  }
  for (std::size_t line = 0; line < lowered.network.lines.size(); ++line)
    all.push_back({"layouts in " + lowered.line_runs[line], follower.by_layouts(line), 0.0});
  return shared(std::move(all));
}

}  // namespace netlists
