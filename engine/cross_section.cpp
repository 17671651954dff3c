#include "engine/cross_section.h"

#include <cmath>
#include <sstream>
#include <stdexcept>
#include <string>

#include "engine/nesting.h"

namespace engine {
namespace {

void require_length(const std::string& what, double length) {
  if (!(length > 0.0) || !std::isfinite(length))
    throw std::invalid_argument(what + " is " + in_mm(length) + "; it must be positive and finite");
}

void require_centre(const std::string& what, const Eigen::Vector2d& centre) {
  if (!centre.allFinite()) throw std::invalid_argument("the centre of " + what + " is not finite");
}

void require_dielectric(const std::string& what, const Dielectric& dielectric) {
  std::ostringstream text;
  if (!(dielectric.permittivity >= 1.0) || !std::isfinite(dielectric.permittivity))
    text << "the permittivity of " << what << " is " << dielectric.permittivity << "; it must be 1 or more";
  else if (!(dielectric.loss_tangent >= 0.0) || !std::isfinite(dielectric.loss_tangent))
    text << "the loss tangent of " << what << " is " << dielectric.loss_tangent << "; it must be 0 or more";
  if (!text.str().empty()) throw std::invalid_argument(text.str());
}

void require_layers(const std::string& what, double radius, const std::vector<Layer>& layers) {
  for (size_t i = 0; i < layers.size(); ++i) {
    const std::string layer = "layer " + std::to_string(i) + " of " + what;
    require_length("the outer radius of " + layer, layers[i].outer_radius);
    if (!(layers[i].outer_radius > radius))
      throw std::invalid_argument(layer + " does not grow: outer radius " + in_mm(layers[i].outer_radius) +
                                  ", it begins at " + in_mm(radius));
    require_dielectric(layer, layers[i].dielectric);
    radius = layers[i].outer_radius;
  }
}

void require_core(const std::string& what, const Core& core) {
  if (!core.half_size.allFinite() || core.half_size.minCoeff() < 0.0 || !std::isfinite(core.turn))
    throw std::invalid_argument("the core of " + what + " is not finite, or its size is negative");
}

void require_wall(const std::string& what, const Core& core, double inner, double outer, bool may_be_thin) {
  require_core(what, core);
  if (!(core.is_rectangle() && inner == 0.0)) require_length("the inner radius of " + what, inner);
  require_length("the outer radius of " + what, outer);
  if (outer < inner || (outer == inner && !may_be_thin))
    throw std::invalid_argument("the wall of " + what + " is inside out: inner radius " + in_mm(inner) +
                                ", outer radius " + in_mm(outer));
}

void require_items(const CrossSection& section) {
  for (size_t i = 0; i < section.conductors.size(); ++i) {
    const RoundConductor& c = section.conductors[i];
    const std::string name = "conductor " + std::to_string(i);
    require_centre(name, c.centre);
    require_length("the radius of " + name, c.radius);
    require_layers(name, c.radius, c.layers);
  }
  for (size_t i = 0; i < section.bodies.size(); ++i) {
    const Body& b = section.bodies[i];
    const std::string name = "body " + std::to_string(i);
    require_centre(name, b.centre);
    require_wall(name, b.core, b.inner_radius, b.outer_radius, true);
    require_dielectric("the wall of " + name, b.wall);
    require_dielectric("the filler of " + name, b.filler);
  }
  for (size_t i = 0; i < section.shells.size(); ++i) {
    const Shell& s = section.shells[i];
    const std::string name = "shell " + std::to_string(i);
    require_centre(name, s.centre);
    require_wall(name, s.core, s.inner_radius, s.outer_radius, false);
    require_dielectric("the filler of " + name, s.filler);
    require_layers(name, s.outer_radius, s.layers);
    if (!s.layers.empty() && !s.core.is_point())
      throw std::invalid_argument(name + " is not round, so it cannot have layers");
  }
}

void require_reference(const CrossSection& section) {
  if (section.surroundings == Surroundings::open &&
      (section.reference < 0 || section.reference >= section.conductor_count()))
    throw std::invalid_argument(
        "an open section needs one of its conductors as the reference; found number " +
        std::to_string(section.reference) + " of " + std::to_string(section.conductor_count()));
}

}  // namespace

void require_valid(const CrossSection& section) {
  if (!(section.tolerance > 0.0) || !std::isfinite(section.tolerance)) {
    std::ostringstream text;
    text << "the tolerance is " << section.tolerance << "; it must be positive and finite";
    throw std::invalid_argument(text.str());
  }
  if (section.surroundings == Surroundings::metal_tube)
    require_wall("the tube", section.tube_core, section.tube_inner_radius, section.tube_outer_radius, false);
  require_items(section);
  nested_solids(section);
  require_reference(section);
}

}  // namespace engine
