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
#include "engine/strip.h"
#include "netlists/section_assembly.h"

namespace netlists {
namespace {

constexpr double k_default_clearance = 50e-3;  // m
// Bare metal lies on bare metal only over its oxide and dirt; the gap keeps the two apart as
// conductors of the network, which joins them where they are bonded.
constexpr double k_bare_gap = 50e-6;        // m
constexpr double k_field_tolerance = 1e-3;  // layouts scatter by tens of percent; a tenth of one is ample
constexpr double k_row_gap = 1e-6;          // m, between neighbours that touch
constexpr double k_slope_tolerance = 1e-2;  // a few percent of a slope, which is but a spread's
constexpr double k_slope_step = 1e-6;       // tan delta that tells one insulation from the others

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

}  // namespace

std::string raceway_id(const Run& run) { return run.name.text + ".raceway"; }

double clearance_of(const Run& run) { return run.clearance.value_or(k_default_clearance); }

struct SectionLibrary::Impl {
  const Building& building;
  const Wiring& wiring;
  unsigned seed;
  std::vector<std::vector<Item>> items;      // by run
  std::vector<const RacewayType*> raceways;  // by run; nullptr: none
  std::shared_ptr<SectionCache> known;
  int solved = 0;
  int reused = 0;

  Impl(const Building& b, const Wiring& w, unsigned s, std::shared_ptr<SectionCache> cache)
      : building(b), wiring(w), seed(s), known(std::move(cache)) {
    if (!known) known = std::make_shared<SectionCache>();
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

  void add_run(Assembly& assembly, int run, double x, std::mt19937_64& random, double clearance) const {
    const RacewayType* raceway = raceways[run];
    const bool tube = raceway && raceway->kind != RacewayKind::tray;
    const bool given = !building.runs[run].layout.empty();
    Eigen::Vector2d origin{x, 0.0};
    if (tube) {
      origin.y() = clearance + outer_half_height(*raceway);
      if (raceway->metal())
        assembly.add_metal_tube(*raceway, origin, run);
      else
        assembly.add_plastic_tube(*raceway, origin);
    } else if (!given || raceway) {
      origin.y() = raceway ? k_row_gap : clearance;
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

  // `clearance`, if any, stands for that of every run.
  DrawnSection draw(const Stretch& stretch, int number, std::optional<double> clearance) const {
    std::mt19937_64 random(
        fingerprint(signature(stretch), (static_cast<std::uint64_t>(seed) << 16) + number));
    Assembly assembly(building, wiring, k_field_tolerance);
    double x = 0.0;
    for (std::size_t i = 0; i < stretch.runs.size(); ++i) {
      if (i > 0) {
        x += half_width(stretch.runs[i - 1]) + std::max(stretch.spacing[i - 1], 2 * k_row_gap) +
             half_width(stretch.runs[i]);
      }
      add_run(assembly, stretch.runs[i], x, random,
              clearance.value_or(clearance_of(building.runs[stretch.runs[i]])));
    }
    return assembly.finish();
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
  void put_tray_on_earth(const Stretch& stretch, const engine::CrossSection& section, double clearance,
                         engine::LineMatrices& matrices) const {
    const RacewayType& tray = *raceways[stretch.runs[0]];
    const engine::Strip strip{tray.width, tray.wall, clearance, 2 * tray.height * tray.wall,
                              metal(building.catalogue, tray.material)};
    engine::add_strip_row(section, strip, conditions(), matrices.impedance, matrices.capacitance,
                          matrices.conductance);
  }

  engine::ImpedanceConditions conditions() const {
    return {building.frequency, building.temperature, building.earth_resistivity};
  }

  engine::LineMatrices one_layout(const Stretch& stretch, int number, std::optional<double> clearance) const {
    const engine::CrossSection section = draw(stretch, number, clearance).section;
    const engine::FieldMatrices field = engine::field_matrices(section, engine::Inductance::without);
    const double omega = 2 * std::numbers::pi * building.frequency;
    engine::LineMatrices one{engine::series_impedance(section, conditions()), field.capacitance,
                             omega * field.loss_capacitance};
    if (on_tray(stretch))
      put_tray_on_earth(stretch, section, clearance.value_or(clearance_of(building.runs[stretch.runs[0]])),
                        one);
    return one;
  }

  std::string layout_key(const Stretch& stretch, int number) const {
    return fmt::format("{} # {}", signature(stretch), number);
  }

  const engine::LineMatrices& kept_layout(const Stretch& stretch, int number) {
    auto& kept = (*known)[layout_key(stretch, number)];
    if (!kept) kept = std::make_shared<engine::LineMatrices>(one_layout(stretch, number, std::nullopt));
    return *kept;
  }

  engine::LineMatrices solve(const Stretch& stretch, int draws) {
    engine::LineMatrices sum = kept_layout(stretch, 0);
    for (int number = 1; number < draws; ++number) {
      const engine::LineMatrices& one = kept_layout(stretch, number);
      sum.impedance += one.impedance;
      sum.capacitance += one.capacitance;
      sum.conductance += one.conductance;
    }
    solved += draws;
    sum.impedance /= draws;
    sum.capacitance /= draws;
    sum.conductance /= draws;
    return sum;
  }

  // C is an analytic function of every complex permittivity, so a loss tangent h of one insulation alone,
  // all others without loss, leaves h dC/d ln(permittivity) as loss, exact but for terms of h squared.
  Eigen::MatrixXd slope(const Stretch& stretch, DrawnSection drawn, int insulation) const {
    const auto set = [&](engine::Dielectric& dielectric, int tag) {
      dielectric.loss_tangent = tag == insulation ? k_slope_step : 0.0;
    };
    engine::CrossSection& section = drawn.section;
    section.tolerance = k_slope_tolerance;
    for (std::size_t i = 0; i < section.conductors.size(); ++i)
      for (std::size_t k = 0; k < section.conductors[i].layers.size(); ++k)
        set(section.conductors[i].layers[k].dielectric, drawn.tags.conductor_layers[i][k]);
    for (std::size_t i = 0; i < section.bodies.size(); ++i) {
      set(section.bodies[i].wall, drawn.tags.bodies[i].first);
      set(section.bodies[i].filler, drawn.tags.bodies[i].second);
    }
    for (std::size_t i = 0; i < section.shells.size(); ++i) {
      set(section.shells[i].filler, drawn.tags.shells[i].first);
      for (std::size_t k = 0; k < section.shells[i].layers.size(); ++k)
        set(section.shells[i].layers[k].dielectric, drawn.tags.shells[i].second[k]);
    }
    const engine::FieldMatrices field = engine::field_matrices(section, engine::Inductance::without);
    const Eigen::MatrixXd inner = field.loss_capacitance / k_slope_step;
    if (!on_tray(stretch)) return inner;
    // What ends on the plane ends on the tray; the tray's own capacitance to earth lies in air.
    const Eigen::Index n = inner.rows();
    Eigen::MatrixXd outer(n + 1, n + 1);
    const Eigen::VectorXd sums = inner.rowwise().sum();
    outer << inner, -sums, -sums.transpose(), sums.sum();
    return outer;
  }

  double wander_length() const {
    return std::sqrt(building.uncertainty.wander_length.first * building.uncertainty.wander_length.second);
  }

  bool varies(const Stretch& stretch) const {
    const bool given = std::all_of(stretch.runs.begin(), stretch.runs.end(),
                                   [&](int run) { return !building.runs[run].layout.empty(); });
    const bool single = std::all_of(stretch.runs.begin(), stretch.runs.end(),
                                    [&](int run) { return items[run].size() <= 1 && !raceways[run]; });
    return !given && !single;
  }

  // Powers of two, so that runs of similar length and equal content share their matrices.
  int layouts(const Stretch& stretch, double length) const {
    if (!varies(stretch)) return 1;
    int count = 1;
    while (count < k_most_layouts && count * std::sqrt(2.0) * wander_length() < length) count *= 2;
    return count;
  }
};

SectionLibrary::SectionLibrary(const Building& building, const Wiring& wiring, unsigned seed,
                               std::shared_ptr<SectionCache> cache)
    : impl_(std::make_unique<Impl>(building, wiring, seed, std::move(cache))) {}
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
  auto& known = (*impl_->known)[key];
  if (known) {
    ++impl_->reused;
  } else {
    known = std::make_shared<engine::LineMatrices>(impl_->solve(stretch, draws));
  }
  return known;
}

RunSection SectionLibrary::section(const Stretch& stretch, int draw) const {
  RunSection result;
  DrawnSection drawn = impl_->draw(stretch, draw, std::nullopt);
  result.section = std::move(drawn.section);
  for (const int run : stretch.runs) {
    result.run += (result.run.empty() ? "" : "+") + impl_->building.runs[run].name.text;
  }
  for (const StretchRow& row : drawn.rows) {
    result.names.push_back(row.wire < 0 ? raceway_id(impl_->building.runs[row.run])
                                        : impl_->wiring.wires[row.wire].id);
  }
  return result;
}

std::string SectionLibrary::signature(const Stretch& stretch) const { return impl_->signature(stretch); }

bool SectionLibrary::varies(const Stretch& stretch) const { return impl_->varies(stretch); }

engine::LineMatrices SectionLibrary::one_layout(const Stretch& stretch, int number,
                                                std::optional<double> clearance) const {
  if (!clearance) {
    const auto kept = impl_->known->find(impl_->layout_key(stretch, number));
    if (kept != impl_->known->end()) return *kept->second;
  }
  return impl_->one_layout(stretch, number, clearance);
}

std::vector<InsulationSlope> SectionLibrary::slopes(const Stretch& stretch, int number) const {
  const DrawnSection drawn = impl_->draw(stretch, number, std::nullopt);
  std::vector<InsulationSlope> all;
  for (std::size_t i = 0; i < drawn.insulations.size(); ++i)
    all.push_back({drawn.insulations[i], impl_->slope(stretch, drawn, static_cast<int>(i))});
  return all;
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
