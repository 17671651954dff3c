// One drawn cross-section of a run, grown item by item, with what each of its insulations is.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "engine/cross_section.h"
#include "netlists/building.h"
#include "netlists/sections.h"
#include "netlists/wiring.h"

namespace netlists {

/// A thing that lies in a raceway as one: a loose wire or a factory cable.
struct Item {
  std::vector<int> wires;  // cores in order, or the one loose wire
  int armour = -1;         // wire index of the cable's armour
  const CableType* cable = nullptr;
  std::string layout_name;   // what a `layout:` entry calls it
  std::string signature;     // equal for things of equal build
  double radius = 0.0;       // m, of the circle it takes up
  double half_height = 0.0;  // m, lying flat
};

/// The permittivity and loss, or the conductivity and permeability, of a material of the catalogue. Throw
/// std::invalid_argument for one that is not there.
engine::Dielectric dielectric(const Catalogue& catalogue, const std::string& material);
engine::Metal metal(const Catalogue& catalogue, const std::string& material);

/// Which insulation every dielectric of a section is, as indices into a list of them; -1 for air.
struct InsulationTags {
  std::vector<std::vector<int>> conductor_layers;        // of each conductor, from the inside out
  std::vector<std::pair<int, int>> bodies;               // wall, filler
  std::vector<std::pair<int, std::vector<int>>> shells;  // filler, layers
};

/// Number of an insulation in `list`, which grows by it where it is new.
int insulation_number(std::vector<Insulation>& list, const std::string& owner, const std::string& material);

/// A section as it was drawn.
struct DrawnSection {
  engine::CrossSection section;
  std::vector<StretchRow> rows;
  InsulationTags tags;
  std::vector<Insulation> insulations;  // that the tags mean, of this section alone
};

/// Grows a section item by item. Shells come after all conductors, so they wait till the end.
class Assembly {
 public:
  Assembly(const Building& building, const Wiring& wiring, double tolerance);

  void add_item(const Item& item, const Eigen::Vector2d& centre, double turn, int run);
  void add_plastic_tube(const RacewayType& raceway, const Eigen::Vector2d& centre);
  /// A round tube, or the rectangle of a wireway.
  void add_metal_tube(const RacewayType& raceway, const Eigen::Vector2d& centre, int run);
  DrawnSection finish();

 private:
  void add_wire(int wire, const WireType& type, const Eigen::Vector2d& centre, int run);
  void add_armour(const Item& item, const CableType& cable, const Eigen::Vector2d& centre, int run);
  void add_jacket(const CableType& cable, const Eigen::Vector2d& centre, double turn);
  int tag(const std::string& owner, const std::string& material);

  const Building& building_;
  const Wiring& wiring_;
  DrawnSection drawn_;
  std::vector<engine::Shell> shells_;
  std::vector<StretchRow> shell_rows_;
};

}  // namespace netlists
