#include "netlists/section_assembly.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "engine/outline.h"

namespace netlists {
namespace {

constexpr double k_joint_slack = 1e-6;  // m, keeps a core that touches its jacket inside it

const Material& material_of(const Catalogue& catalogue, const std::string& material) {
  const auto found = catalogue.materials.find(material);
  if (found == catalogue.materials.end())
    throw std::invalid_argument("material '" + material + "' is not known");
  return found->second;
}

/// The jacket of a cable, a strip with round ends if it is flat. What the cores' places need of it, where
/// a catalogue's figures contradict each other, goes before its thickness.
engine::Body jacket_of(const CableType& cable, const Catalogue& catalogue, const Eigen::Vector2d& centre,
                       double turn) {
  const double thin = std::min(cable.width, cable.height) / 2;
  engine::Body body;
  body.centre = centre;
  body.core = {{cable.width / 2 - thin, cable.height / 2 - thin}, turn};
  double reach = 0.0;
  for (const Core& core : cable.cores)
    reach = std::max(
        reach, core.wire.outer_diameter() / 2 +
                   engine::signed_distance({{0.0, 0.0}, {body.core.half_size, 0.0}, 0.0}, {core.x, core.y}));
  body.inner_radius = std::max(thin - cable.jacket_thickness, reach + k_joint_slack);
  body.outer_radius = std::max(thin, body.inner_radius + k_joint_slack);
  body.filler = dielectric(catalogue, cable.filler.empty() ? cable.jacket : cable.filler);
  body.wall = dielectric(catalogue, cable.jacket);
  return body;
}

}  // namespace

engine::Dielectric dielectric(const Catalogue& catalogue, const std::string& material) {
  const Material& found = material_of(catalogue, material);
  return {found.permittivity, found.loss_tangent};
}

engine::Metal metal(const Catalogue& catalogue, const std::string& material) {
  const Material& found = material_of(catalogue, material);
  return {found.conductivity, found.relative_permeability, found.temperature_coefficient};
}

int insulation_number(std::vector<Insulation>& list, const std::string& owner, const std::string& material) {
  for (std::size_t i = 0; i < list.size(); ++i)
    if (list[i].owner == owner && list[i].material == material) return static_cast<int>(i);
  list.push_back({owner, material});
  return static_cast<int>(list.size()) - 1;
}

Assembly::Assembly(const Building& building, const Wiring& wiring, double tolerance)
    : building_(building), wiring_(wiring) {
  drawn_.section.surroundings = engine::Surroundings::plane;
  drawn_.section.tolerance = tolerance;
}

void Assembly::add_item(const Item& item, const Eigen::Vector2d& centre, double turn, int run) {
  if (!item.cable) {
    add_wire(item.wires[0], *wiring_.wires[item.wires[0]].type, centre, run);
    return;
  }
  const CableType& cable = *item.cable;
  for (std::size_t i = 0; i < item.wires.size(); ++i) {
    const Core& core = cable.cores[i];
    const Eigen::Vector2d offset{core.x * std::cos(turn) - core.y * std::sin(turn),
                                 core.x * std::sin(turn) + core.y * std::cos(turn)};
    add_wire(item.wires[i], core.wire, centre + offset, run);
  }
  if (cable.armour) {
    add_armour(item, cable, centre, run);
  } else {
    add_jacket(cable, centre, turn);
  }
}

void Assembly::add_plastic_tube(const RacewayType& raceway, const Eigen::Vector2d& centre) {
  engine::Body tube;
  tube.centre = centre;
  tube.inner_radius = raceway.inner_diameter / 2;
  tube.outer_radius = raceway.outer_diameter / 2;
  tube.wall = dielectric(building_.catalogue, raceway.material);
  drawn_.section.bodies.push_back(tube);
  drawn_.tags.bodies.emplace_back(tag(raceway.name, raceway.material), -1);
}

void Assembly::add_metal_tube(const RacewayType& raceway, const Eigen::Vector2d& centre, int run) {
  const bool wireway = raceway.kind == RacewayKind::wireway;
  engine::Shell shell;
  shell.centre = centre;
  shell.inner_radius = wireway ? 0.0 : raceway.inner_diameter / 2;
  shell.outer_radius = wireway ? raceway.wall : raceway.outer_diameter / 2;
  if (wireway) shell.core.half_size = {raceway.width / 2, raceway.height / 2};
  shell.metal = metal(building_.catalogue, raceway.material);
  shells_.push_back(shell);
  shell_rows_.push_back({-1, run});
  drawn_.tags.shells.emplace_back(-1, std::vector<int>{});
}

DrawnSection Assembly::finish() {
  drawn_.section.shells = shells_;
  drawn_.rows.insert(drawn_.rows.end(), shell_rows_.begin(), shell_rows_.end());
  return std::move(drawn_);
}

void Assembly::add_wire(int wire, const WireType& type, const Eigen::Vector2d& centre, int run) {
  engine::RoundConductor conductor;
  conductor.centre = centre;
  conductor.radius = type.conductor_diameter / 2;
  conductor.strands = type.strands;
  conductor.dc_resistance = type.resistance;
  conductor.metal = metal(building_.catalogue, type.metal);
  double radius = conductor.radius;
  std::vector<int> tags;
  for (const auto& layer : type.layers) {
    radius += layer.thickness;
    conductor.layers.push_back({radius, dielectric(building_.catalogue, layer.material)});
    tags.push_back(tag(type.name, layer.material));
  }
  drawn_.section.conductors.push_back(conductor);
  drawn_.tags.conductor_layers.push_back(tags);
  drawn_.rows.push_back({wire, run});
}

void Assembly::add_armour(const Item& item, const CableType& cable, const Eigen::Vector2d& centre, int run) {
  engine::Shell shell;
  shell.centre = centre;
  shell.inner_radius = cable.armour->inner_diameter / 2;
  shell.outer_radius = cable.armour->outer_diameter / 2;
  shell.metal = metal(building_.catalogue, cable.armour->material);
  shell.dc_resistance = cable.armour->resistance;
  std::pair<int, std::vector<int>> tags{-1, {}};
  if (!cable.filler.empty()) {
    shell.filler = dielectric(building_.catalogue, cable.filler);
    tags.first = tag(cable.name, cable.filler);
  }
  if (!cable.jacket.empty()) {
    shell.layers.push_back(
        {shell.outer_radius + cable.jacket_thickness, dielectric(building_.catalogue, cable.jacket)});
    tags.second.push_back(tag(cable.name, cable.jacket));
  }
  shells_.push_back(shell);
  shell_rows_.push_back({item.armour, run});
  drawn_.tags.shells.push_back(tags);
}

void Assembly::add_jacket(const CableType& cable, const Eigen::Vector2d& centre, double turn) {
  const std::string& filler = cable.filler.empty() ? cable.jacket : cable.filler;
  drawn_.section.bodies.push_back(jacket_of(cable, building_.catalogue, centre, turn));
  drawn_.tags.bodies.emplace_back(tag(cable.name, cable.jacket), tag(cable.name, filler));
}

// Air has nothing uncertain in it.
int Assembly::tag(const std::string& owner, const std::string& material) {
  return material == "air" ? -1 : insulation_number(drawn_.insulations, owner, material);
}

}  // namespace netlists
