#include "netlists/section_bank.h"

#include <algorithm>
#include <cmath>
#include <functional>

#include "netlists/meter.h"
#include "netlists/parallel.h"
#include "netlists/section_assembly.h"

namespace netlists {
namespace {

constexpr int k_heights = 5;            // clearances at which a section is solved
constexpr double k_no_coupling = 1e-9;  // of the diagonal: rounding beside a screen, not scaled

/// The partial capacitances of a Maxwell matrix: between i and j off the diagonal, from i to earth on it.
Eigen::MatrixXd partials(const Eigen::MatrixXd& maxwell) {
  Eigen::MatrixXd c = -maxwell;
  c.diagonal() = maxwell.rowwise().sum();
  return c;
}

/// a / b where b is a coupling at all, else 0.
Eigen::MatrixXd ratio(const Eigen::MatrixXd& a, const Eigen::MatrixXd& b, const Eigen::VectorXd& scale) {
  Eigen::MatrixXd out = Eigen::MatrixXd::Zero(a.rows(), a.cols());
  for (Eigen::Index j = 0; j < a.cols(); ++j)
    for (Eigen::Index i = 0; i < a.rows(); ++i)
      if (std::abs(b(i, j)) > k_no_coupling * std::sqrt(scale(i) * scale(j))) out(i, j) = a(i, j) / b(i, j);
  return out;
}

Eigen::MatrixXd log_ratio(const Eigen::MatrixXd& a, const Eigen::MatrixXd& b) {
  const Eigen::MatrixXd quotient = ratio(partials(a), partials(b), b.diagonal());
  return quotient.unaryExpr([](double q) { return q > 0 ? std::log(q) : 0.0; });
}

/// p05 and p95 of a log-uniform spread to its ends.
std::pair<double, double> whole_range(std::pair<double, double> p) {
  const double beyond = std::pow(p.second / p.first, 0.05 / 0.9);
  return {p.first / beyond, p.second * beyond};
}

/// What is solved for one content, job by job.
struct Raw {
  Stretch stretch;
  std::vector<engine::LineMatrices> layouts;
  std::vector<std::vector<InsulationSlope>> slopes;  // by layout
  std::vector<double> heights;                       // m
  std::vector<engine::LineMatrices> at_height;       // of layout 0
};

bool gives_clearance(const Building& building, const Stretch& stretch) {
  return std::any_of(stretch.runs.begin(), stretch.runs.end(),
                     [&](int run) { return building.runs[run].clearance.has_value(); });
}

}  // namespace

void scale_partials(engine::LineMatrices& matrices, const Eigen::MatrixXd& logarithms) {
  const Eigen::MatrixXd factors = logarithms.array().exp();
  const auto scale = [&](Eigen::MatrixXd& maxwell) {
    const Eigen::VectorXd size = maxwell.diagonal().cwiseAbs();
    Eigen::VectorXd to_earth = maxwell.rowwise().sum();
    for (Eigen::Index i = 0; i < to_earth.size(); ++i)
      to_earth(i) = std::abs(to_earth(i)) > k_no_coupling * size(i) ? to_earth(i) * factors(i, i) : 0.0;
    maxwell = maxwell.cwiseProduct(factors);
    maxwell.diagonal().setZero();
    maxwell.diagonal() = to_earth - maxwell.rowwise().sum();
  };
  scale(matrices.capacitance);
  scale(matrices.conductance);
}

Eigen::MatrixXd SectionContent::log_clearance_factor(double clearance) const {
  const double h = std::log(clearance);
  const auto above = std::upper_bound(log_heights_.begin(), log_heights_.end(), h);
  const auto last = static_cast<std::ptrdiff_t>(log_heights_.size()) - 1;
  const auto k = static_cast<std::size_t>(std::clamp<std::ptrdiff_t>(above - log_heights_.begin(), 1, last));
  const double share = (h - log_heights_[k - 1]) / (log_heights_[k] - log_heights_[k - 1]);
  return height_factors_[k - 1] + std::clamp(share, 0.0, 1.0) * (height_factors_[k] - height_factors_[k - 1]);
}

engine::LineMatrices SectionContent::drawn(const SectionDraw& draw) const {
  const Eigen::Index n = layouts_.front().capacitance.rows();
  engine::LineMatrices sum{Eigen::MatrixXcd::Zero(n, n), Eigen::MatrixXd::Zero(n, n),
                           Eigen::MatrixXd::Zero(n, n)};
  double total = 0.0;
  for (std::size_t k = 0; k < layouts_.size(); ++k) {
    const double weight = draw.picks[k];
    if (weight == 0.0) continue;
    total += weight;
    sum.impedance += weight * layouts_[k].impedance;
    sum.capacitance += weight * layouts_[k].capacitance;
    sum.conductance += weight * layouts_[k].conductance;
  }
  sum.impedance /= total;
  sum.capacitance /= total;
  sum.conductance /= total;
  Eigen::MatrixXd logarithms = Eigen::MatrixXd::Zero(n, n);
  for (const Slope& slope : slopes_) logarithms += draw.log_permittivity(slope.insulation) * slope.log_slope;
  if (draw.clearance && !log_heights_.empty()) logarithms += log_clearance_factor(*draw.clearance);
  if (!logarithms.isZero(0.0)) scale_partials(sum, logarithms);
  return sum;
}

SectionBank::SectionBank(const Building& building, const SectionLibrary& library,
                         const std::vector<Stretch>& stretches, std::pair<double, double> clearance,
                         int threads)
    : library_(library) {
  std::map<std::string, Raw> raw;
  for (const Stretch& stretch : stretches) {
    const auto [at, fresh] = raw.try_emplace(library.signature(stretch));
    if (!fresh) continue;
    Raw& content = at->second;
    content.stretch = stretch;
    content.layouts.resize(library.varies(stretch) ? k_most_layouts : 1);
    content.slopes.resize(content.layouts.size());
    if (gives_clearance(building, stretch)) continue;
    const auto [low, high] = whole_range(clearance);
    for (int k = 0; k < k_heights; ++k)
      content.heights.push_back(low * std::pow(high / low, k / (k_heights - 1.0)));
    content.at_height.resize(content.heights.size());
  }
  // Whatever is dearest comes first, so that no thread is left with it at the end: sections differ by size.
  std::vector<std::pair<std::size_t, std::function<void()>>> jobs;
  for (auto& [signature, content] : raw) {
    const std::size_t size = library.rows(content.stretch).size();
    for (std::size_t k = 0; k < content.layouts.size(); ++k)
      jobs.emplace_back(size, [&library, &one = content, k] {
        one.layouts[k] = library.one_layout(one.stretch, static_cast<int>(k));
      });
    for (std::size_t k = 0; k < content.slopes.size(); ++k)
      jobs.emplace_back(size, [&library, &one = content, k] {
        one.slopes[k] = library.slopes(one.stretch, static_cast<int>(k));
      });
    for (std::size_t k = 0; k < content.heights.size(); ++k)
      jobs.emplace_back(size, [&library, &one = content, k] {
        one.at_height[k] = library.one_layout(one.stretch, 0, one.heights[k]);
      });
  }
  std::stable_sort(jobs.begin(), jobs.end(), [](const auto& a, const auto& b) { return a.first > b.first; });
  meter().begin("layouts for the draws", static_cast<int>(jobs.size()));
  in_parallel(static_cast<int>(jobs.size()), threads, [&](int i) {
    jobs[i].second();
    meter().step();
  });
  solved_ = static_cast<int>(jobs.size());

  for (auto& [signature, one] : raw) {
    const int number = static_cast<int>(contents_.size());
    SectionContent& content = contents_[signature];
    content.number_ = number;
    std::vector<Eigen::MatrixXd> sums;
    std::vector<int> numbers;
    Eigen::MatrixXd capacitance =
        Eigen::MatrixXd::Zero(one.layouts[0].capacitance.rows(), one.layouts[0].capacitance.cols());
    for (std::size_t k = 0; k < one.slopes.size(); ++k) {
      capacitance += one.layouts[k].capacitance;
      for (std::size_t i = 0; i < one.slopes[k].size(); ++i) {
        const InsulationSlope& slope = one.slopes[k][i];
        if (k == 0) {
          numbers.push_back(
              insulation_number(insulations_, slope.insulation.owner, slope.insulation.material));
          sums.push_back(slope.slope);
        } else {
          sums[i] += slope.slope;
        }
      }
    }
    for (std::size_t i = 0; i < sums.size(); ++i)
      content.slopes_.push_back(
          {numbers[i], ratio(partials(sums[i]), partials(capacitance), capacitance.diagonal())});
    for (std::size_t k = 0; k < one.heights.size(); ++k) {
      content.log_heights_.push_back(std::log(one.heights[k]));
      content.height_factors_.push_back(log_ratio(one.at_height[k].capacitance, one.layouts[0].capacitance));
    }
    content.layouts_ = std::move(one.layouts);
  }
}

const SectionContent& SectionBank::content(const Stretch& stretch) const {
  return contents_.at(library_.signature(stretch));
}

}  // namespace netlists
