#include "netlists/sections.h"

#include <fmt/format.h>

#include <algorithm>
#include <boost/random/uniform_real_distribution.hpp>
#include <cmath>
#include <numbers>
#include <optional>
#include <random>
#include <set>
#include <stdexcept>

#include "engine/capacitance.h"
#include "engine/impedance.h"
#include "engine/layout.h"
#include "engine/outline.h"
#include "engine/strip.h"

namespace netlists {
namespace {

constexpr double k_default_clearance = 50e-3;  // m
// Bare metal lies on bare metal only over its oxide and dirt; the gap keeps the two apart as
// conductors of the network, which joins them where they are bonded.
constexpr double k_bare_gap = 50e-6;        // m
constexpr double k_field_tolerance = 1e-3;  // layouts scatter by tens of percent; a tenth of one is ample
constexpr double k_row_gap = 1e-6;          // m, between neighbours that touch
constexpr double k_joint_slack = 1e-6;      // m, keeps a core that touches its jacket inside it
constexpr int k_most_layouts = 16;

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

engine::Dielectric dielectric(const Catalogue& catalogue, const std::string& material) {
  const auto found = catalogue.materials.find(material);
  if (found == catalogue.materials.end())
    throw std::invalid_argument("material '" + material + "' is not known");
  return {found->second.permittivity, found->second.loss_tangent};
}

engine::Metal metal(const Catalogue& catalogue, const std::string& material) {
  const auto found = catalogue.materials.find(material);
  if (found == catalogue.materials.end())
    throw std::invalid_argument("material '" + material + "' is not known");
  return {found->second.conductivity, found->second.relative_permeability,
          found->second.temperature_coefficient};
}

std::string wire_signature(const WireType& type) {
  std::string text =
      fmt::format("{}/{}/{}/{}", type.metal, type.conductor_diameter, type.strands, type.resistance);
  for (const auto& layer : type.layers) text += fmt::format("/{}:{}", layer.material, layer.thickness);
  return text;
}

double packing_radius(const WireType& type) {
  return type.outer_diameter() / 2 + (type.layers.empty() ? k_bare_gap : 0.0);
}

double packing_radius(const CableType& type) {
  const bool bare = type.armour && type.jacket.empty();
  return type.width / 2 + (bare ? k_bare_gap : 0.0);
}

// FNV-1a, so that a section's layouts depend on its content and the seed alone, on every platform.
std::uint64_t fingerprint(const std::string& text, std::uint64_t start) {
  std::uint64_t hash = 14695981039346656037ull ^ (start * 0x9E3779B97F4A7C15ull);
  for (const char c : text) hash = (hash ^ static_cast<unsigned char>(c)) * 1099511628211ull;
  return hash;
}

/// Layers of things side by side, each `width` wide at the most, from y = 0 upwards. Flat things lie flat.
std::vector<Eigen::Vector2d> stacked_rows(const std::vector<double>& radii,
                                          const std::vector<double>& half_heights, double width,
                                          std::mt19937_64& random) {
  std::vector<Eigen::Vector2d> centres(radii.size());
  std::size_t begin = 0;
  double floor = 0.0;
  while (begin < radii.size()) {
    std::size_t end = begin + 1;
    double taken = 2 * radii[begin];
    double highest = half_heights[begin];
    while (end < radii.size() && taken + 2 * radii[end] + k_row_gap <= width) {
      taken += 2 * radii[end] + k_row_gap;
      highest = std::max(highest, half_heights[end]);
      ++end;
    }
    const std::vector<double> row(radii.begin() + begin, radii.begin() + end);
    const auto places = engine::row_layout(row, k_row_gap, random);
    for (std::size_t i = begin; i < end; ++i) centres[i] = {places[i - begin].x(), floor + half_heights[i]};
    floor += 2 * highest + k_row_gap;
    begin = end;
  }
  return centres;
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

/// Grows a CrossSection item by item. Shells come after all conductors, so they wait till the end.
class Assembly {
 public:
  Assembly(const Building& building, const Wiring& wiring) : building_(building), wiring_(wiring) {
    section_.surroundings = engine::Surroundings::plane;
    section_.tolerance = k_field_tolerance;
  }

  void add_item(const Item& item, const Eigen::Vector2d& centre, double turn, int run) {
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
      section_.bodies.push_back(jacket_of(cable, building_.catalogue, centre, turn));
    }
  }

  void add_plastic_tube(const RacewayType& raceway, const Eigen::Vector2d& centre) {
    engine::Body tube;
    tube.centre = centre;
    tube.inner_radius = raceway.inner_diameter / 2;
    tube.outer_radius = raceway.outer_diameter / 2;
    tube.wall = dielectric(building_.catalogue, raceway.material);
    section_.bodies.push_back(tube);
  }

  /// A round tube, or the rectangle of a wireway.
  void add_metal_tube(const RacewayType& raceway, const Eigen::Vector2d& centre, int run) {
    const bool wireway = raceway.kind == RacewayKind::wireway;
    engine::Shell shell;
    shell.centre = centre;
    shell.inner_radius = wireway ? 0.0 : raceway.inner_diameter / 2;
    shell.outer_radius = wireway ? raceway.wall : raceway.outer_diameter / 2;
    if (wireway) shell.core.half_size = {raceway.width / 2, raceway.height / 2};
    shell.metal = metal(building_.catalogue, raceway.material);
    shells_.push_back(shell);
    shell_rows_.push_back({-1, run});
  }

  engine::CrossSection finish(std::vector<StretchRow>& rows) {
    section_.shells = shells_;
    rows = rows_;
    rows.insert(rows.end(), shell_rows_.begin(), shell_rows_.end());
    return section_;
  }

 private:
  void add_wire(int wire, const WireType& type, const Eigen::Vector2d& centre, int run) {
    engine::RoundConductor conductor;
    conductor.centre = centre;
    conductor.radius = type.conductor_diameter / 2;
    conductor.strands = type.strands;
    conductor.dc_resistance = type.resistance;
    conductor.metal = metal(building_.catalogue, type.metal);
    double radius = conductor.radius;
    for (const auto& layer : type.layers) {
      radius += layer.thickness;
      conductor.layers.push_back({radius, dielectric(building_.catalogue, layer.material)});
    }
    section_.conductors.push_back(conductor);
    rows_.push_back({wire, run});
  }

  void add_armour(const Item& item, const CableType& cable, const Eigen::Vector2d& centre, int run) {
    engine::Shell shell;
    shell.centre = centre;
    shell.inner_radius = cable.armour->inner_diameter / 2;
    shell.outer_radius = cable.armour->outer_diameter / 2;
    shell.metal = metal(building_.catalogue, cable.armour->material);
    shell.dc_resistance = cable.armour->resistance;
    if (!cable.filler.empty()) shell.filler = dielectric(building_.catalogue, cable.filler);
    if (!cable.jacket.empty()) {
      shell.layers.push_back(
          {shell.outer_radius + cable.jacket_thickness, dielectric(building_.catalogue, cable.jacket)});
    }
    shells_.push_back(shell);
    shell_rows_.push_back({item.armour, run});
  }

  const Building& building_;
  const Wiring& wiring_;
  engine::CrossSection section_;
  std::vector<engine::Shell> shells_;
  std::vector<StretchRow> rows_;
  std::vector<StretchRow> shell_rows_;
};

}  // namespace

std::string raceway_id(const Run& run) { return run.name.text + ".raceway"; }

double clearance_of(const Run& run) { return run.clearance.value_or(k_default_clearance); }

struct SectionLibrary::Impl {
  const Building& building;
  const Wiring& wiring;
  unsigned seed;
  std::vector<std::vector<Item>> items;      // by run
  std::vector<const RacewayType*> raceways;  // by run; nullptr: none
  std::map<std::string, std::shared_ptr<const engine::LineMatrices>> known;
  int solved = 0;
  int reused = 0;

  Impl(const Building& b, const Wiring& w, unsigned s) : building(b), wiring(w), seed(s) {
    items.resize(b.runs.size());
    for (const Run& run : b.runs) {
      const auto found = b.catalogue.raceways.find(run.raceway.text);
      raceways.push_back(found == b.catalogue.raceways.end() || found->second.kind == RacewayKind::none
                             ? nullptr
                             : &found->second);
    }
    collect_items();
  }

  void collect_items() {
    std::map<std::pair<int, int>, std::size_t> cable_item;  // (run, circuit) -> its item
    for (std::size_t w = 0; w < wiring.wires.size(); ++w) {
      const PhysicalWire& wire = wiring.wires[w];
      for (const int run : wire.runs) {
        if (wire.core < 0 && !wire.armour) {
          items[run].push_back({{static_cast<int>(w)},
                                -1,
                                nullptr,
                                wire.id,
                                wire_signature(*wire.type),
                                packing_radius(*wire.type),
                                packing_radius(*wire.type)});
          continue;
        }
        const Circuit& circuit = building.circuits[wire.circuit];
        const auto [slot, fresh] = cable_item.try_emplace({run, wire.circuit}, items[run].size());
        if (fresh) {
          const CableType& cable = building.catalogue.cables.at(circuit.cable->text);
          items[run].push_back({{},
                                -1,
                                &cable,
                                circuit.name.text,
                                "cable " + cable.name,
                                packing_radius(cable),
                                packing_radius(cable) - (cable.width - cable.height) / 2});
        }
        Item& item = items[run][slot->second];
        if (wire.armour) {
          item.armour = static_cast<int>(w);
        } else {
          item.wires.push_back(static_cast<int>(w));
        }
      }
    }
    // Equal contents in another order are the same section.
    for (auto& list : items) {
      std::stable_sort(list.begin(), list.end(),
                       [](const Item& a, const Item& b) { return a.signature < b.signature; });
    }
  }

  double half_width(int run) const {
    const RacewayType* raceway = raceways[run];
    if (raceway && raceway->kind == RacewayKind::wireway) return raceway->width / 2 + raceway->wall;
    if (raceway && raceway->kind != RacewayKind::tray) return raceway->outer_diameter / 2;
    double width = 0.0;
    for (const Item& item : items[run]) width += 2 * item.radius + k_row_gap;
    return std::min(width, bundle_width(run)) / 2;
  }

  // Open cables are strapped up about as wide as high.
  double bundle_width(int run) const {
    double widest = 0.0;
    for (const Item& item : items[run]) widest = std::max(widest, 2 * item.radius + k_row_gap);
    const double columns = std::ceil(std::sqrt(static_cast<double>(items[run].size())));
    return widest * std::max(columns, std::min(3.0, static_cast<double>(items[run].size())));
  }

  std::vector<Eigen::Vector2d> given_layout(int run) const {
    std::vector<Eigen::Vector2d> centres;
    for (const Item& item : items[run]) {
      const auto& layout = building.runs[run].layout;
      const auto found = layout.find(item.layout_name);
      if (found == layout.end()) {
        throw std::invalid_argument(fmt::format("run '{}': its layout has no position for '{}'",
                                                building.runs[run].name.text, item.layout_name));
      }
      centres.push_back(found->second);
    }
    return centres;
  }

  void add_run(Assembly& assembly, int run, double x, std::mt19937_64& random) const {
    const RacewayType* raceway = raceways[run];
    const bool tube = raceway && raceway->kind != RacewayKind::tray;
    const bool given = !building.runs[run].layout.empty();
    Eigen::Vector2d origin{x, 0.0};
    if (tube) {
      origin.y() = clearance_of(building.runs[run]) + outer_half_height(*raceway);
      if (raceway->metal())
        assembly.add_metal_tube(*raceway, origin, run);
      else
        assembly.add_plastic_tube(*raceway, origin);
    } else if (!given || raceway) {
      origin.y() = raceway ? k_row_gap : clearance_of(building.runs[run]);
    }
    const std::vector<Eigen::Vector2d> centres = given ? given_layout(run) : drawn_layout(run, random);
    boost::random::uniform_real_distribution<double> turn(0.0, 2 * std::numbers::pi);
    for (std::size_t i = 0; i < items[run].size(); ++i) {
      // A cable pulled into a tube turns as it likes; in the open a flat one lies flat.
      const double angle = items[run][i].cable && tube ? turn(random) : 0.0;
      assembly.add_item(items[run][i], origin + centres[i], angle, run);
    }
  }

  static double outer_half_height(const RacewayType& raceway) {
    return raceway.kind == RacewayKind::wireway ? raceway.height / 2 + raceway.wall
                                                : raceway.outer_diameter / 2;
  }

  // Counted from the middle of a tube or a wireway, else from the lowest point of what lies there.
  std::vector<Eigen::Vector2d> drawn_layout(int run, std::mt19937_64& random) const {
    const RacewayType* raceway = raceways[run];
    std::vector<double> radii, half_heights;
    for (const Item& item : items[run]) {
      radii.push_back(item.radius);
      half_heights.push_back(item.half_height);
    }
    if (!raceway || raceway->kind == RacewayKind::tray)
      return stacked_rows(radii, half_heights, raceway ? raceway->width : bundle_width(run), random);
    if (raceway->kind == RacewayKind::wireway)
      return engine::resting_layout(radii, Eigen::Vector2d(raceway->width / 2, raceway->height / 2), random);
    return engine::resting_layout(radii, raceway->inner_diameter / 2, random);
  }

  engine::CrossSection draw(const Stretch& stretch, int number, std::vector<StretchRow>& rows) const {
    std::mt19937_64 random(
        fingerprint(signature(stretch), (static_cast<std::uint64_t>(seed) << 16) + number));
    Assembly assembly(building, wiring);
    double x = 0.0;
    for (std::size_t i = 0; i < stretch.runs.size(); ++i) {
      if (i > 0) {
        x += half_width(stretch.runs[i - 1]) + std::max(stretch.spacing[i - 1], 2 * k_row_gap) +
             half_width(stretch.runs[i]);
      }
      add_run(assembly, stretch.runs[i], x, random);
    }
    return assembly.finish(rows);
  }

  std::string signature(const Stretch& stretch) const {
    std::string text = fmt::format("{} {}", building.frequency, building.temperature);
    for (std::size_t i = 0; i < stretch.runs.size(); ++i) {
      const Run& run = building.runs[stretch.runs[i]];
      text +=
          fmt::format("|{} {} {}", run.raceway.text, clearance_of(run), i > 0 ? stretch.spacing[i - 1] : 0.0);
      for (const Item& item : items[stretch.runs[i]]) text += "," + item.signature;
      // Given positions belong to names, so such a run is like no other.
      if (!run.layout.empty()) text += " as laid in " + run.name.text;
    }
    return text;
  }

  bool on_tray(const Stretch& stretch) const {
    return stretch.runs.size() == 1 && raceways[stretch.runs[0]] &&
           raceways[stretch.runs[0]]->kind == RacewayKind::tray;
  }

  // The tray is the plane of its section; here it becomes a conductor over the earth, the last row.
  void put_tray_on_earth(const Stretch& stretch, const engine::CrossSection& section,
                         const engine::ImpedanceConditions& conditions,
                         engine::LineMatrices& matrices) const {
    const RacewayType& tray = *raceways[stretch.runs[0]];
    const engine::Strip strip{tray.width, tray.wall, clearance_of(building.runs[stretch.runs[0]]),
                              2 * tray.height * tray.wall, metal(building.catalogue, tray.material)};
    engine::add_strip_row(section, strip, conditions, matrices.impedance, matrices.capacitance,
                          matrices.conductance);
  }

  engine::LineMatrices solve(const Stretch& stretch, int draws) {
    engine::LineMatrices sum;
    const double omega = 2 * std::numbers::pi * building.frequency;
    const engine::ImpedanceConditions conditions{building.frequency, building.temperature,
                                                 building.earth_resistivity};
    for (int number = 0; number < draws; ++number) {
      std::vector<StretchRow> rows;
      const engine::CrossSection section = draw(stretch, number, rows);
      const engine::FieldMatrices field = engine::field_matrices(section, engine::Inductance::without);
      ++solved;
      engine::LineMatrices one{engine::series_impedance(section, conditions), field.capacitance,
                               omega * field.loss_capacitance};
      if (on_tray(stretch)) put_tray_on_earth(stretch, section, conditions, one);
      if (number == 0) {
        sum = one;
        continue;
      }
      sum.impedance += one.impedance;
      sum.capacitance += one.capacitance;
      sum.conductance += one.conductance;
    }
    sum.impedance /= draws;
    sum.capacitance /= draws;
    sum.conductance /= draws;
    return sum;
  }

  double wander_length() const {
    return std::sqrt(building.uncertainty.wander_length.first * building.uncertainty.wander_length.second);
  }

  // Powers of two, so that runs of similar length and equal content share their matrices.
  int layouts(const Stretch& stretch, double length) const {
    const bool given = std::all_of(stretch.runs.begin(), stretch.runs.end(),
                                   [&](int run) { return !building.runs[run].layout.empty(); });
    const bool single = std::all_of(stretch.runs.begin(), stretch.runs.end(),
                                    [&](int run) { return items[run].size() <= 1 && !raceways[run]; });
    if (given || single) return 1;
    int count = 1;
    while (count < k_most_layouts && count * std::sqrt(2.0) * wander_length() < length) count *= 2;
    return count;
  }
};

SectionLibrary::SectionLibrary(const Building& building, const Wiring& wiring, unsigned seed)
    : impl_(std::make_unique<Impl>(building, wiring, seed)) {}
SectionLibrary::~SectionLibrary() = default;

std::vector<StretchRow> SectionLibrary::rows(const Stretch& stretch) const {
  // The order of Assembly: loose wires and cores item by item and run by run, then armour and tubes
  // in the order they were met; a tube is met before what lies in it.
  std::vector<StretchRow> rows;
  std::vector<StretchRow> shells;
  for (const int run : stretch.runs) {
    const RacewayType* raceway = impl_->raceways[run];
    if (raceway && raceway->metal() && raceway->kind != RacewayKind::tray) shells.push_back({-1, run});
    for (const Item& item : impl_->items[run]) {
      for (const int wire : item.wires) rows.push_back({wire, run});
      if (item.armour >= 0) shells.push_back({item.armour, run});
    }
  }
  rows.insert(rows.end(), shells.begin(), shells.end());
  if (impl_->on_tray(stretch)) rows.push_back({-1, stretch.runs[0]});
  return rows;
}

std::shared_ptr<const engine::LineMatrices> SectionLibrary::matrices(const Stretch& stretch, double length) {
  const int draws = impl_->layouts(stretch, length);
  const std::string key = fmt::format("{} x {}", impl_->signature(stretch), draws);
  auto& known = impl_->known[key];
  if (known) {
    ++impl_->reused;
  } else {
    known = std::make_shared<engine::LineMatrices>(impl_->solve(stretch, draws));
  }
  return known;
}

RunSection SectionLibrary::section(const Stretch& stretch, int draw) const {
  RunSection result;
  std::vector<StretchRow> drawn;
  result.section = impl_->draw(stretch, draw, drawn);
  for (const int run : stretch.runs) {
    result.run += (result.run.empty() ? "" : "+") + impl_->building.runs[run].name.text;
  }
  for (const StretchRow& row : drawn) {
    result.names.push_back(row.wire < 0 ? raceway_id(impl_->building.runs[row.run])
                                        : impl_->wiring.wires[row.wire].id);
  }
  return result;
}

std::vector<std::string> SectionLibrary::assumptions() const {
  std::set<std::string> texts;
  for (std::size_t r = 0; r < impl_->items.size(); ++r) {
    const RacewayType* raceway = impl_->raceways[r];
    const Run& run = impl_->building.runs[r];
    if (impl_->items[r].empty()) continue;
    if (!run.clearance) {
      texts.insert("runs without a clearance: taken 50 mm above an earthed plane");
    }
    if (run.layout.empty() && (raceway || impl_->items[r].size() > 1)) {
      texts.insert(
          fmt::format("conductors lie at random in their raceway and change places every {:.2g} m: matrices "
                      "are the mean of up to {} layouts",
                      impl_->wander_length(), k_most_layouts));
    }
    if (raceway && raceway->kind == RacewayKind::wireway) {
      texts.insert(fmt::format(
          "'{}' carries current like a round tube of its metal and of its mean distance from the middle",
          raceway->name));
    }
    if (raceway && raceway->kind == RacewayKind::tray) {
      texts.insert(fmt::format("'{}' is taken as a metal plane under its cables", raceway->name));
    }
    for (const Item& item : impl_->items[r]) {
      if (!item.cable || item.cable->armour) continue;
      const bool turned = item.cable->flat() && raceway && raceway->kind != RacewayKind::tray;
      texts.insert(fmt::format(
          "cable '{}': the space between its cores has a permittivity of {:.2g}{}", item.cable->name,
          dielectric(impl_->building.catalogue,
                     item.cable->filler.empty() ? item.cable->jacket : item.cable->filler)
              .permittivity,
          turned ? "; in a raceway it keeps the room of the circle around it" : ""));
    }
  }
  return {texts.begin(), texts.end()};
}

int SectionLibrary::solved() const { return impl_->solved; }
int SectionLibrary::reused() const { return impl_->reused; }

RunSection run_section(const Building& building, const std::string& run, unsigned seed) {
  const Wiring wires = wiring(building);
  const SectionLibrary library(building, wires, seed);
  for (std::size_t i = 0; i < building.runs.size(); ++i) {
    if (building.runs[i].name.text == run) return library.section({{static_cast<int>(i)}, {}}, 0);
  }
  throw std::invalid_argument("run '" + run + "' is not in the model");
}

}  // namespace netlists
