// Prints the sections that finite_elements_test.py solves anew, geometry and matrices, as JSON in SI.
#include <iostream>
#include <nlohmann/json.hpp>

#include "engine/capacitance.h"

namespace {

using engine::CrossSection;
using engine::Dielectric;
using engine::RoundConductor;
using engine::Surroundings;
using nlohmann::json;

RoundConductor wire(double x, double y, double radius, std::vector<engine::Layer> layers) {
  RoundConductor conductor;
  conductor.centre = {x, y};
  conductor.radius = radius;
  conductor.layers = std::move(layers);
  return conductor;
}

// Five wires with two lossy layers each on the floor of a metal tube, gaps from 0.1 mm.
CrossSection five_in_metal_tube() {
  CrossSection section;
  section.surroundings = Surroundings::metal_tube;
  section.tube_inner_radius = 10.46e-3;
  section.tube_outer_radius = 11.7e-3;
  const std::vector<engine::Layer> layers = {{1.4e-3, {4.5, 0.08}}, {1.65e-3, {4.0, 0.02}}};
  for (const auto& [x, y] : {std::pair{0.0, -8.7e-3},
                             {3.4e-3, -7.9e-3},
                             {-3.5e-3, -7.8e-3},
                             {1.5e-3, -5.0e-3},
                             {-2.0e-3, -3.5e-3}})
    section.conductors.push_back(wire(x, y, 1.02e-3, layers));
  return section;
}

// Over a plane: a plastic tube with two wires, one at its wall, and beside it a round cable of two cores
// whose filler has a higher permittivity than their insulation.
CrossSection tube_and_cable_over_plane() {
  CrossSection section;
  section.surroundings = Surroundings::plane;
  section.bodies = {{{0.0, 13e-3}, 8e-3, 9.5e-3, {3.3, 0.02}, {1.0, 0.0}},
                    {{14.2e-3, 9e-3}, 3.5e-3, 4.3e-3, {4.5, 0.08}, {5.5, 0.1}}};
  const std::vector<engine::Layer> pvc = {{1.65e-3, {4.5, 0.08}}}, xlpe = {{1.4e-3, {2.4, 0.003}}};
  section.conductors = {wire(5.5e-3, 10.5e-3, 1.02e-3, pvc), wire(-1.0e-3, 8.0e-3, 1.02e-3, pvc),
                        wire(12.6e-3, 9e-3, 0.8e-3, xlpe), wire(15.8e-3, 9.4e-3, 0.8e-3, xlpe)};
  return section;
}

json as_json(const Dielectric& d) { return {d.permittivity, -d.permittivity * d.loss_tangent}; }

json as_json(const Eigen::MatrixXd& matrix) {
  json rows = json::array();
  for (Eigen::Index i = 0; i < matrix.rows(); ++i)
    rows.push_back(std::vector<double>(matrix.row(i).begin(), matrix.row(i).end()));
  return rows;
}

json as_json(const CrossSection& section) {
  json circles = json::array(), conductors = json::array();  // insulating circles from the outside in
  for (const engine::Body& b : section.bodies) {
    circles.push_back(
        {{"x", b.centre.x()}, {"y", b.centre.y()}, {"r", b.outer_radius}, {"e", as_json(b.wall)}});
    circles.push_back(
        {{"x", b.centre.x()}, {"y", b.centre.y()}, {"r", b.inner_radius}, {"e", as_json(b.filler)}});
  }
  for (const RoundConductor& c : section.conductors) {
    for (auto layer = c.layers.rbegin(); layer != c.layers.rend(); ++layer)
      circles.push_back({{"x", c.centre.x()},
                         {"y", c.centre.y()},
                         {"r", layer->outer_radius},
                         {"e", as_json(layer->dielectric)}});
    conductors.push_back({{"x", c.centre.x()}, {"y", c.centre.y()}, {"r", c.radius}});
  }
  const engine::FieldMatrices matrices = engine::field_matrices(section);
  return {{"tube_radius", section.tube_inner_radius},  // 0: a plane at y = 0
          {"circles", circles},
          {"conductors", conductors},
          {"capacitance_F_per_m", as_json(matrices.capacitance)},
          {"loss_capacitance_F_per_m", as_json(matrices.loss_capacitance)}};
}

}  // namespace

int main() {
  std::cout << json{{"five_in_metal_tube", as_json(five_in_metal_tube())},
                    {"tube_and_cable_over_plane", as_json(tube_and_cable_over_plane())}}
                   .dump(1)
            << '\n';
}
