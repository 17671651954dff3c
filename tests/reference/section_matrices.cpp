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

// A flat cable: two insulated cores with a bare wire between them in a jacket with a filler of its own.
CrossSection flat_cable(CrossSection section, double height) {
  const std::vector<engine::Layer> pvc = {{1.65e-3, {4.5, 0.08}}};
  for (const double x : {-3.1e-3, 3.1e-3}) section.conductors.push_back(wire(x, height, 1.02e-3, pvc));
  section.conductors.push_back(wire(0.0, height, 0.8e-3, {}));
  section.bodies.push_back({{0.0, height}, 1.8e-3, 2.6e-3, {4.5, 0.08}, {2.0, 0.01}, {{3.1e-3, 0.0}, 0.0}});
  return section;
}

// In the open the net charge is zero, the bare wire is the reference.
CrossSection flat_cable_in_the_open() {
  CrossSection section = flat_cable({}, 0.0);
  section.reference = 2;
  return section;
}

CrossSection flat_cable_over_plane() {
  CrossSection section;
  section.surroundings = Surroundings::plane;
  return flat_cable(section, 4e-3);
}

// Two jackets 0.2 mm apart, one of them flat and upright.
CrossSection two_jacketed_cables() {
  CrossSection section;
  section.surroundings = Surroundings::plane;
  const std::vector<engine::Layer> pvc = {{1.65e-3, {4.5, 0.08}}};
  section.conductors = {wire(-3.5e-3, 5.5e-3, 1.02e-3, pvc), wire(-3.5e-3, 9.5e-3, 1.02e-3, pvc),
                        wire(2.2e-3, 7e-3, 1.02e-3, pvc), wire(6.0e-3, 7e-3, 1.02e-3, pvc)};
  section.bodies = {{{-3.5e-3, 7.5e-3}, 2.6e-3, 2.6e-3, {4.5, 0.08}, {4.5, 0.08}, {{0.0, 2.1e-3}, 0.0}},
                    {{4.0e-3, 7e-3}, 4.0e-3, 4.7e-3, {3.0, 0.02}, {2.0, 0.0}, {}}};
  return section;
}

// Wires on the floor and at the side of a wireway, gaps from 0.1 mm, and a flat cable.
CrossSection wires_in_a_wireway() {
  CrossSection section;
  section.surroundings = Surroundings::metal_tube;
  section.tube_core.half_size = {15e-3, 12e-3};
  section.tube_outer_radius = 1.5e-3;
  const std::vector<engine::Layer> pvc = {{1.65e-3, {4.5, 0.08}}};
  section = flat_cable(section, -4e-3);
  for (const auto& [x, y] : {std::pair{-13.2e-3, -10.2e-3}, {-9.8e-3, -10.2e-3}, {13.2e-3, 2e-3}})
    section.conductors.push_back(wire(x, y, 1.02e-3, pvc));
  return section;
}

json as_json(const Dielectric& d) { return {d.permittivity, -d.permittivity * d.loss_tangent}; }

json as_json(const Eigen::MatrixXd& matrix) {
  json rows = json::array();
  for (Eigen::Index i = 0; i < matrix.rows(); ++i)
    rows.push_back(std::vector<double>(matrix.row(i).begin(), matrix.row(i).end()));
  return rows;
}

// Half the width and the height of what the radius is counted from come along where a body is not round.
json around(const engine::Body& b, double radius, const Dielectric& inside) {
  return {{"x", b.centre.x()},         {"y", b.centre.y()},         {"r", radius},
          {"w", b.core.half_size.x()}, {"h", b.core.half_size.y()}, {"e", as_json(inside)}};
}

json as_json(const CrossSection& section) {
  json circles = json::array(), conductors = json::array();  // insulating circles from the outside in
  for (const engine::Body& b : section.bodies) {
    circles.push_back(around(b, b.outer_radius, b.wall));
    if (b.inner_radius < b.outer_radius) circles.push_back(around(b, b.inner_radius, b.filler));
  }
  for (const RoundConductor& c : section.conductors) {
    for (auto layer = c.layers.rbegin(); layer != c.layers.rend(); ++layer)
      circles.push_back({{"x", c.centre.x()},
                         {"y", c.centre.y()},
                         {"r", layer->outer_radius},
                         {"w", 0.0},
                         {"h", 0.0},
                         {"e", as_json(layer->dielectric)}});
    conductors.push_back({{"x", c.centre.x()}, {"y", c.centre.y()}, {"r", c.radius}});
  }
  const engine::FieldMatrices matrices = engine::field_matrices(section);
  const char* kind = section.surroundings == Surroundings::open    ? "open"
                     : section.surroundings == Surroundings::plane ? "plane"
                     : section.tube_core.is_point()                ? "tube"
                                                                   : "rectangle";
  return {{"surroundings", kind},
          {"tube_radius", section.tube_inner_radius},
          {"half_size", {section.tube_core.half_size.x(), section.tube_core.half_size.y()}},
          {"reference", section.reference},  // of an open section
          {"circles", circles},
          {"conductors", conductors},
          {"capacitance_F_per_m", as_json(matrices.capacitance)},
          {"loss_capacitance_F_per_m", as_json(matrices.loss_capacitance)}};
}

}  // namespace

int main() {
  std::cout << json{{"five_in_metal_tube", as_json(five_in_metal_tube())},
                    {"tube_and_cable_over_plane", as_json(tube_and_cable_over_plane())},
                    {"flat_cable_in_the_open", as_json(flat_cable_in_the_open())},
                    {"flat_cable_over_plane", as_json(flat_cable_over_plane())},
                    {"two_jacketed_cables", as_json(two_jacketed_cables())},
                    {"wires_in_a_wireway", as_json(wires_in_a_wireway())}}
                   .dump(1)
            << '\n';
}
