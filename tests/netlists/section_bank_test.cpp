#include "netlists/section_bank.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <string>

#include "netlists/lower.h"
#include "netlists/wiring.h"
#include "tests/netlists/model_text.h"

namespace netlists {
namespace {

/// A model with the parts that a bank is made of.
struct Banked {
  Building building;
  Wiring wires;
  SectionLibrary library;
  Stretch stretch{{0}, {}};
  SectionBank bank;

  explicit Banked(const std::string& raceway)
      : building(building_of(one_circuit("20 m", raceway) +
                             "  spare: {wires: {a: THHN 12, b: THHN 14}, runs: [C1]}\n")),
        wires(wiring(building)),
        library(building, wires, 1),
        bank(building, library, {stretch}, {5e-3, 1.0}, 2) {}

  SectionDraw mean_draw() const {
    return {std::vector<int>(bank.content(stretch).layout_count(), 1),
            Eigen::VectorXd::Zero(static_cast<Eigen::Index>(bank.insulations().size())),
            {}};
  }
};

double norm(const Eigen::MatrixXd& change, const Eigen::MatrixXd& c) {
  double most = 0.0;
  for (Eigen::Index i = 0; i < c.rows(); ++i)
    for (Eigen::Index j = 0; j < c.cols(); ++j)
      most = std::max(most, std::abs(change(i, j)) / std::sqrt(c(i, i) * c(j, j)));
  return most;
}

void expect_maxwell_form(const Eigen::MatrixXd& c) {
  EXPECT_LT((c - c.transpose()).cwiseAbs().maxCoeff(), 1e-9 * c.maxCoeff());
  for (Eigen::Index i = 0; i < c.rows(); ++i) {
    EXPECT_GT(c(i, i), 0.0);
    EXPECT_GE(c.row(i).sum(), -1e-9 * c(i, i));
    for (Eigen::Index j = 0; j < c.cols(); ++j) EXPECT_LE(i == j ? 0.0 : c(i, j), 1e-9 * c(i, i));
  }
}

// The derivatives come from a loss tangent; central differences of the field solution itself are another way.
TEST(Slopes, AreTheDerivativesByPermittivity) {
  for (const char* raceway : {"none", "EMT 3/4", "PVC 40 3/4"}) {
    SCOPED_TRACE(raceway);
    Banked model(raceway);
    const std::vector<InsulationSlope> slopes = model.library.slopes(model.stretch, 0);
    ASSERT_FALSE(slopes.empty());
    const double h = 0.2;  // of ln permittivity; all of one material at a time
    for (const std::string material : {"PVC", "nylon"}) {
      Eigen::MatrixXd sum;
      for (const InsulationSlope& slope : slopes)
        if (slope.insulation.material == material) {
          if (sum.size() == 0) sum = Eigen::MatrixXd::Zero(slope.slope.rows(), slope.slope.cols());
          sum += slope.slope;
        }
      if (sum.size() == 0) continue;
      const auto capacitance_at = [&](double factor) {
        Building changed = model.building;
        changed.catalogue.materials.at(material).permittivity *= factor;
        const Wiring wires = wiring(changed);
        return SectionLibrary(changed, wires, 1).one_layout(model.stretch, 0).capacitance;
      };
      const Eigen::MatrixXd c = capacitance_at(1.0);
      const auto central = [&](double step) -> Eigen::MatrixXd {
        return (capacitance_at(std::exp(step)) - capacitance_at(std::exp(-step))) / (2 * step);
      };
      const Eigen::MatrixXd difference = (4.0 * central(h / 2) - central(h)) / 3.0;  // Richardson
      EXPECT_GT(norm(sum, c), 0.01) << material;
      // Slopes are those of sections solved to 1e-2; those of the difference, solved to a tenth of 1e-3,
      // count for 1e-4 / h.
      EXPECT_LT(norm(sum - difference, c), 1e-2) << material;
    }
  }
}

// Far from the centre, as at the ends of a spread: against the section solved there.
TEST(SectionContent, FollowsPermittivityOverItsSpread) {
  Banked model("none");
  for (const double factor : {0.8, 1.25}) {
    Building changed = model.building;
    changed.catalogue.materials.at("PVC").permittivity *= factor;
    const Wiring wires = wiring(changed);
    const SectionLibrary library(changed, wires, 1);
    Eigen::MatrixXd exact;
    SectionDraw draw = model.mean_draw();
    for (std::size_t k = 0; k < draw.picks.size(); ++k) {
      const Eigen::MatrixXd c = library.one_layout(model.stretch, static_cast<int>(k)).capacitance;
      exact = k == 0 ? c : Eigen::MatrixXd(exact + c);
    }
    exact /= static_cast<double>(draw.picks.size());
    for (std::size_t i = 0; i < model.bank.insulations().size(); ++i)
      if (model.bank.insulations()[i].material == "PVC")
        draw.log_permittivity(static_cast<Eigen::Index>(i)) = std::log(factor);
    const Eigen::MatrixXd drawn = model.bank.content(model.stretch).drawn(draw).capacitance;
    expect_maxwell_form(drawn);
    EXPECT_LT(norm(drawn - exact, exact), 0.02) << factor;  // a tenth of what the permittivity does itself
  }
}

TEST(SectionContent, FollowsClearanceBetweenTheSolvedOnes) {
  Banked model("none");
  for (const double clearance : {7e-3, 30e-3, 120e-3, 0.6}) {
    SectionDraw draw = model.mean_draw();
    std::fill(draw.picks.begin() + 1, draw.picks.end(), 0);
    draw.clearance = clearance;
    const Eigen::MatrixXd drawn = model.bank.content(model.stretch).drawn(draw).capacitance;
    const Eigen::MatrixXd exact = model.library.one_layout(model.stretch, 0, clearance).capacitance;
    expect_maxwell_form(drawn);
    EXPECT_LT(norm(drawn - exact, exact), 0.02) << clearance;
  }
}

// At the centre nothing is scaled: the mean over all layouts, to the last digits.
TEST(SectionContent, AtTheCentreIsTheMeanOfTheLayouts) {
  for (const char* raceway : {"none", "EMT 3/4", "PVC 40 3/4"}) {
    Banked model(raceway);
    const SectionContent& content = model.bank.content(model.stretch);
    EXPECT_EQ(content.layout_count(), k_most_layouts);
    const engine::LineMatrices drawn = content.drawn(model.mean_draw());
    Eigen::MatrixXd mean = Eigen::MatrixXd::Zero(drawn.capacitance.rows(), drawn.capacitance.cols());
    for (int k = 0; k < content.layout_count(); ++k) mean += content.layout(k).capacitance;
    mean /= content.layout_count();
    EXPECT_LT(norm(drawn.capacitance - mean, mean), 1e-14) << raceway;
    expect_maxwell_form(drawn.capacitance);
  }
}

}  // namespace
}  // namespace netlists
