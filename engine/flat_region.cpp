#include "engine/flat_region.h"

#include "engine/harmonics.h"

namespace engine {
namespace {

using Complex = std::complex<double>;
using Boundary = OutlineRegion::Boundary;

Outline moved(Outline outline, const Eigen::Vector2d& origin) {
  outline.centre -= origin;
  return outline;
}

class Gathering {
 public:
  Gathering(const SectionTree& tree, const Eigen::Vector2d& origin, OutlineRegion& region)
      : tree_(tree), origin_(origin), region_(region) {}

  void take(int parent, Complex medium) {
    for (const int member : tree_.children_of(parent)) {
      if (tree_.solid(member).kind == Solid::Kind::body)
        take_body(member, medium);
      else
        take_metal(member, medium);
    }
  }

  std::vector<int> numbers() const {
    std::vector<int> all = round_;
    all.insert(all.end(), flat_.begin(), flat_.end());
    return all;
  }

 private:
  void take_metal(int member, Complex medium) {
    const Solid& solid = tree_.solid(member);
    if (solid.core.is_point()) {
      region_.circles.push_back(
          {solid.centre - origin_, solid.metal_radius, tree_.layers_of(member), medium});
      round_.push_back(tree_.number_of(member));
    } else {
      region_.surfaces.push_back({Surface::Kind::conductor, moved(solid.outer(), origin_), 1.0, medium});
      flat_.push_back(tree_.number_of(member));
    }
  }

  void take_body(int member, Complex medium) {
    const Body& body = tree_.body(member);
    const Complex wall = complex_permittivity(body.wall), filler = complex_permittivity(body.filler);
    const bool has_wall = body.outer_radius > body.inner_radius;
    add_boundary(moved(tree_.solid(member).outer(), origin_), has_wall ? wall : filler, medium);
    if (has_wall) add_boundary(moved(tree_.solid(member).inner(), origin_), filler, wall);
    take(member, filler);
  }

  void add_boundary(const Outline& outline, Complex inside, Complex outside) {
    if (inside != outside) region_.surfaces.push_back({Surface::Kind::dielectric, outline, inside, outside});
  }

  const SectionTree& tree_;
  Eigen::Vector2d origin_;
  OutlineRegion& region_;
  std::vector<int> round_, flat_;
};

void set_wall(OutlineRegion& region, const Outline& wall, Complex filler) {
  if (wall.is_circle()) {
    region.boundary = Boundary::round_wall;
    region.radius = wall.rounding;
  } else {
    region.boundary = Boundary::wall;
    region.radius = farthest(wall, wall.centre);
    region.surfaces.push_back({Surface::Kind::wall, wall, filler, 1.0});
  }
}

}  // namespace

FlatRegion flat_region(const SectionTree& tree, int enclosure) {
  const CrossSection& section = tree.section();
  FlatRegion result;
  result.region.tolerance = section.tolerance;
  Eigen::Vector2d origin = Eigen::Vector2d::Zero();
  Complex medium = 1.0;
  if (enclosure != k_surroundings) {
    origin = tree.solid(enclosure).centre;
    medium = complex_permittivity(tree.shell(enclosure).filler);
    set_wall(result.region, moved(tree.solid(enclosure).inner(), origin), medium);
  } else if (section.surroundings == Surroundings::metal_tube) {
    set_wall(result.region, tube_outline(section), medium);
  } else {
    result.region.boundary = section.surroundings == Surroundings::plane ? Boundary::plane : Boundary::open;
    result.region.radius = tree.extent();
  }
  Gathering gathering(tree, origin, result.region);
  gathering.take(enclosure, medium);
  result.numbers = gathering.numbers();
  return result;
}

}  // namespace engine
