#include "engine/outline_region.h"

#include <Eigen/LU>
#include <algorithm>
#include <cmath>
#include <numbers>
#include <stdexcept>
#include <string>

#include "engine/harmonics.h"
#include "engine/outline_field.h"
#include "engine/outline_resolution.h"
#include "engine/round_region.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Eigen::Index;
using Eigen::MatrixXcd;
using Eigen::MatrixXd;
using Eigen::VectorXcd;
using Eigen::VectorXd;

// What every row makes of the field that arrives: a circle reflects each harmonic, a point of an outline
// takes the charge that bends the field as its permittivities ask. Metal is the limit of each.
VectorXcd responses(const OutlineRegion& region, const OutlineField& field) {
  VectorXcd response(field.size());
  for (size_t i = 0; i < region.circles.size(); ++i) {
    const CoveredCircle& c = region.circles[i];
    const int order = field.circles()[i].order();
    const VectorXcd reflection = metal_reflection(c.metal_radius, c.layers, c.medium, order);
    for (int n = 1; n <= order; ++n)
      for (const int part : {0, 1}) response(field.harmonic_row(i, n) + part) = reflection(n - 1);
  }
  const PanelledOutlines& outlines = field.outlines();
  for (int p = 0; p < outlines.points.size(); ++p) {
    const Panel& panel = outlines.panels[static_cast<size_t>(outlines.points.panel[static_cast<size_t>(p)])];
    const Surface& surface = region.surfaces[static_cast<size_t>(panel.outline)];
    Complex contrast = 1.0;
    if (surface.kind == Surface::Kind::dielectric)
      contrast = (surface.inside - surface.outside) / (surface.inside + surface.outside);
    if (surface.kind == Surface::Kind::wall) contrast = -1.0;
    response(field.point_row(p)) = -contrast / std::numbers::pi;
  }
  return response;
}

// The places of the conductors: where their potential is taken, and what a unit of charge drives.
struct Ports {
  MatrixXcd drive;   // right side per charge
  MatrixXd reading;  // potentials per unknown
  MatrixXcd direct;  // potentials per charge with all unknowns at rest
};

std::vector<int> conductor_surfaces(const OutlineRegion& region) {
  std::vector<int> numbers;
  for (size_t k = 0; k < region.surfaces.size(); ++k)
    if (region.surfaces[k].kind == Surface::Kind::conductor) numbers.push_back(static_cast<int>(k));
  return numbers;
}

Ports ports_of(const OutlineRegion& region, const OutlineField& field, const VectorXcd& response) {
  const std::vector<int> metal = conductor_surfaces(region);
  const auto circles = static_cast<Index>(region.circles.size());
  const Index count = circles + static_cast<Index>(metal.size());
  Ports ports{MatrixXcd::Zero(field.size(), count), MatrixXd::Zero(count, field.size()),
              MatrixXcd::Zero(count, count)};
  ports.reading.topRows(circles) = field.at_circles();
  for (Index i = 0; i < circles; ++i) {
    const CoveredCircle& c = region.circles[static_cast<size_t>(i)];
    ports.drive.col(i) =
        response.cwiseProduct(field.from_charge(static_cast<int>(i)).cast<Complex>()) / c.medium;
    ports.direct.col(i).head(circles) = field.between_charges().col(i).cast<Complex>() / c.medium;
    ports.direct(i, i) += rise_through(c.metal_radius, c.layers);
  }
  for (size_t k = 0; k < metal.size(); ++k) {
    const Index row = circles + static_cast<Index>(k);
    const Surface& surface = region.surfaces[static_cast<size_t>(metal[k])];
    // Within metal the potential is the same everywhere, so its middle will do.
    const Complex middle(surface.outline.centre.x(), surface.outline.centre.y());
    ports.reading.row(row) = field.at_place(middle);
    for (Index i = 0; i < circles; ++i)
      ports.direct(row, i) =
          field.charge_at_place(static_cast<int>(i), middle) / region.circles[static_cast<size_t>(i)].medium;
    const VectorXd around = field.lengths_of(metal[k]);
    for (Index p = 0; p < around.size(); ++p)
      if (around(p) > 0.0) ports.drive(p, row) = 1.0 / (around.sum() * surface.outside);
  }
  return ports;
}

// u = response (K u + drive); on metal outlines the mean charge is given instead of asked for.
MatrixXcd system_matrix(const OutlineRegion& region, const OutlineField& field, const VectorXcd& response) {
  MatrixXcd system = -(response.asDiagonal() * field.matrix().cast<Complex>());
  system.diagonal().array() += 1.0;
  for (const int k : conductor_surfaces(region)) {
    const VectorXd around = field.lengths_of(k);
    const double whole = around.sum();
    for (Index p = 0; p < around.size(); ++p)
      if (around(p) > 0.0) system.row(p) += (around / whole).transpose().cast<Complex>();
  }
  return system;
}

MatrixXcd solved(const MatrixXcd& system, const MatrixXcd& right) {
  const bool real = system.imag().cwiseAbs().maxCoeff() == 0.0 && right.imag().cwiseAbs().maxCoeff() == 0.0;
  if (real)
    return MatrixXd(MatrixXd(system.real()).partialPivLu().solve(MatrixXd(right.real()))).cast<Complex>();
  return system.partialPivLu().solve(right);
}

}  // namespace

OutlineSolution potential_coefficients(const OutlineRegion& region, double resolution) {
  OutlineSolution solution;
  if (region.circles.empty() && conductor_surfaces(region).empty()) return solution;
  const OutlineField field(region, resolution_of(region, resolution));
  const VectorXcd response = responses(region, field);
  const Ports ports = ports_of(region, field, response);
  const MatrixXcd u = solved(system_matrix(region, field, response), ports.drive);
  const MatrixXcd potentials = ports.direct + ports.reading.cast<Complex>() * u;
  solution.potentials = (potentials + potentials.transpose()) / 2.0;
  for (const HarmonicCircle& circle : field.circles())
    solution.order = std::max(solution.order, circle.order());
  if (solution.order == 0) solution.order = field.outlines().order;
  solution.unknowns = field.size();
  return solution;
}

}  // namespace engine
