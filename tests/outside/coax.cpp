// What an outside project does with the package: one catalogue wire on the axis of a catalogue
// conduit, its capacitance computed by the engine and held against the closed form of a coax of
// several dielectrics, C = 2 pi epsilon_0 / sum of ln(r_out / r_in) / epsilon_r (any textbook on
// electrostatics). Ends with 0 if they agree within the section's tolerance.
#include <cmath>
#include <cstdio>
#include <numbers>
#include <variant>

#include "engine/capacitance.h"
#include "engine/constants.h"
#include "engine/cross_section.h"
#include "io/catalogue_file.h"
#include "io/quantity.h"
#include "netlists/catalogue.h"

int main() {
  const netlists::Catalogue& catalogue = io::builtin_catalogue();
  const netlists::WireType& wire = catalogue.wires.at("THHN 12");
  const netlists::RacewayType& conduit = catalogue.raceways.at("EMT 3/4");

  engine::RoundConductor conductor;
  conductor.radius = wire.conductor_diameter / 2;
  double radius = conductor.radius;  // m
  double elastance = 0.0;            // sum of ln(r_out / r_in) / epsilon_r
  for (const netlists::InsulationLayer& layer : wire.layers) {
    const double permittivity = catalogue.materials.at(layer.material).permittivity;
    elastance += std::log((radius + layer.thickness) / radius) / permittivity;
    radius += layer.thickness;
    conductor.layers.push_back({radius, {permittivity, 0.0}});
  }
  elastance += std::log(conduit.inner_diameter / 2 / radius);  // air out to the conduit

  engine::CrossSection section;
  section.surroundings = engine::Surroundings::metal_tube;
  section.tube_inner_radius = conduit.inner_diameter / 2;
  section.tube_outer_radius = conduit.outer_diameter / 2;
  section.conductors = {conductor};

  const double computed = engine::field_matrices(section).capacitance(0, 0);       // F/m
  const double expected = 2 * std::numbers::pi * engine::k_epsilon_0 / elastance;  // F/m
  const double length = std::get<double>(io::parse_quantity("10 m", io::Dimension::length, "length"));
  std::printf("%s on the axis of %s, 10 m: %.4f pF, closed form %.4f pF\n", wire.name.c_str(),
              conduit.name.c_str(), 1e12 * computed * length, 1e12 * expected * length);
  return std::abs(computed - expected) <= section.tolerance * expected ? 0 : 1;
}
