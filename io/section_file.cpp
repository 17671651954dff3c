#include "io/section_file.h"

#include <fmt/format.h>

#include <algorithm>
#include <optional>
#include <set>
#include <stdexcept>
#include <tuple>

#include "io/catalogue_entry.h"
#include "io/section_clashes.h"
#include "io/section_values.h"
#include "io/yaml_reader.h"

namespace io {
namespace {

using engine::Surroundings;

constexpr Range k_size{1e-6, 100.0, "0.001 mm to 100 m"};
constexpr Range k_position{-1e3, 1e3, "-1 km to 1 km"};

/// "conductor 'a'", or the kind alone where no name is found.
std::string owner_of(const char* kind, const YamlNode& node) {
  for (std::size_t i = 0; node.kind == YamlKind::map && i + 1 < node.items.size(); i += 2)
    if (node.items[i].text == "name" && node.items[i + 1].kind == YamlKind::scalar)
      return fmt::format("{} '{}'", kind, node.items[i + 1].text);
  return kind;
}

enum class Enclosure { open, plane, metal_tube, rectangle };

/// Reads one section file: a function a key of its top level.
class SectionReading {
 public:
  SectionReading(SectionFile& file, const std::string& name, const netlists::Catalogue& catalogue)
      : file_(file), reader_(name, file.faults), values_(reader_, catalogue, file.materials) {}

  void read(const YamlNode& tree) {
    const YamlMap top(reader_, tree, "",
                      {"format", "frequency", "temperature", "earth_resistivity", "tolerance", "enclosure",
                       "reference", "conductors", "tubes", "jackets", "shells"});
    if (!top.is_map()) return;
    top.require("format");
    top.choice<int>("format", {{"idlewire-section/1", 1}});
    read_conditions(top);
    read_enclosure(top);
    each(top, "conductors", "[{name: a, x: 0 mm, y: 0 mm, diameter: 2 mm}]",
         [&](const YamlNode& node, int) { read_conductor(node); });
    each(top, "shells",
         "[{name: armour, centre: [0 mm, 0 mm], inner_diameter: 11 mm, outer_diameter: 12 mm}]",
         [&](const YamlNode& node, int) { read_shell(node); });
    each(top, "tubes", "[{centre: [0 mm, 0 mm], inner_diameter: 20.9 mm, outer_diameter: 26.7 mm}]",
         [&](const YamlNode& node, int number) { read_tube(node, fmt::format("tube {}", number)); });
    each(top, "jackets", "[{centre: [0 mm, 0 mm], circle: {diameter: 8.6 mm}, permittivity: 4.5}]",
         [&](const YamlNode& node, int number) { read_jacket(node, fmt::format("jacket {}", number)); });
    if (file_.names.empty()) top.error(tree, "the section has no conductors");
    read_reference(top);
    if (netlists::any_error(file_.faults)) return;
    report_clashes(reader_, file_.section, places());
    if (!netlists::any_error(file_.faults)) check_with_engine(tree);
  }

 private:
  template <class F>
  void each(const YamlMap& top, const char* key, const char* form, F f) {
    const auto* items = top.list(key, form);
    if (items == nullptr) return;
    int number = 0;
    for (const YamlNode& node : *items) f(node, ++number);
  }

  void read_conditions(const YamlMap& top) {
    engine::ImpedanceConditions& conditions = file_.conditions;
    conditions.frequency = top.quantity("frequency", Dimension::frequency, {1.0, 1e6, "1 Hz to 1000 kHz"})
                               .value_or(conditions.frequency);
    conditions.temperature =
        top.quantity("temperature", Dimension::temperature, {-100.0, 500.0, "-100 degC to 500 degC"})
            .value_or(conditions.temperature);
    conditions.earth_resistivity =
        top.quantity("earth_resistivity", Dimension::resistivity, {1e-3, 1e6, "0.001 ohm m to 1e6 ohm m"})
            .value_or(conditions.earth_resistivity);
    file_.section.tolerance =
        top.number("tolerance", {1e-12, 0.1, "1e-12 to 0.1"}).value_or(file_.section.tolerance);
  }

  void read_enclosure(const YamlMap& top) {
    const YamlNode* node = top.require("enclosure");
    if (node == nullptr) return;
    const YamlMap map(reader_, *node, "enclosure",
                      {"kind", "inner_diameter", "outer_diameter", "material", "width", "height", "wall"});
    map.require("kind");
    const auto kind = map.choice<Enclosure>("kind", {{"metal_tube", Enclosure::metal_tube},
                                                     {"open", Enclosure::open},
                                                     {"plane", Enclosure::plane},
                                                     {"rectangle", Enclosure::rectangle}});
    if (!kind) return;
    enclosed_ = true;
    switch (*kind) {
      case Enclosure::metal_tube:
        refuse_keys(map, {"width", "height", "wall"});
        return read_metal_tube(map);
      case Enclosure::rectangle:
        refuse_keys(map, {"inner_diameter", "outer_diameter"});
        return read_rectangle(map);
      case Enclosure::plane:
        file_.section.surroundings = Surroundings::plane;
        break;
      case Enclosure::open:
        break;
    }
    refuse_keys(map, {"inner_diameter", "outer_diameter", "material", "width", "height", "wall"});
  }

  static void refuse_keys(const YamlMap& map, const std::vector<const char*>& keys) {
    for (const char* key : keys)
      if (map.has(key)) map.error(*map.key_node(key), fmt::format("{} belongs to another kind", key));
  }

  void read_metal_tube(const YamlMap& map) {
    file_.section.surroundings = Surroundings::metal_tube;
    const auto [inner, outer] = values_.read_wall(map);
    file_.section.tube_inner_radius = inner;
    file_.section.tube_outer_radius = outer;
    file_.section.tube_metal = values_.read_metal(map, "steel");
  }

  void read_rectangle(const YamlMap& map) {
    file_.section.surroundings = Surroundings::metal_tube;
    file_.section.tube_core.half_size = values_.read_size(map) / 2;
    file_.section.tube_outer_radius = values_.read_sheet(map);
    file_.section.tube_metal = values_.read_metal(map, "steel");
  }

  /// The entry's name, due and no one else's.
  std::string read_name(const YamlMap& map, const char* kind) {
    map.require("name");
    std::string name = map.text("name").value_or("");
    if (!name.empty() && !taken_.insert(name).second)
      map.error(*map.find("name"), fmt::format("the name '{}' is taken", name));
    if (name == "enclosure" || name == "plane")
      map.error(*map.find("name"), fmt::format("a {} cannot be called '{}'", kind, name));
    return name;
  }

  void read_conductor(const YamlNode& node) {
    const YamlMap map(reader_, node, owner_of("conductor", node),
                      {"name", "x", "y", "diameter", "material", "strands", "insulation"});
    if (!map.is_map()) return;
    for (const char* key : {"x", "y", "diameter"}) map.require(key);
    engine::RoundConductor conductor;
    const std::string name = read_name(map, "conductor");
    conductor.centre = {map.quantity("x", Dimension::length, k_position).value_or(0.0),
                        map.quantity("y", Dimension::length, k_position).value_or(0.0)};
    conductor.radius = map.quantity("diameter", Dimension::length, k_size).value_or(0.0) / 2;
    conductor.strands = map.whole("strands", 1, 1261).value_or(1);
    if (!is_concentric(conductor.strands))
      map.error(
          *map.find("strands"),
          fmt::format("{} strands do not lie in rings; it takes 1, 7, 19, 37, 61, ...", conductor.strands));
    conductor.metal = values_.read_metal(map, "copper");
    conductor.layers = values_.read_insulation(map, conductor.radius);
    conductors_.push_back({map.owner(), &node});
    file_.section.conductors.push_back(std::move(conductor));
    file_.names.push_back(name);
  }

  void read_shell(const YamlNode& node) {
    const YamlMap map(
        reader_, node, owner_of("shell", node),
        {"name", "centre", "inner_diameter", "outer_diameter", "material", "filler", "insulation"});
    if (!map.is_map()) return;
    engine::Shell shell;
    const std::string name = read_name(map, "shell");
    shell.centre = values_.read_centre(map);
    const auto [inner, outer] = values_.read_wall(map);
    shell.inner_radius = inner;
    shell.outer_radius = outer;
    if (!map.has("material")) map.error(map.place(), "material is missing");
    shell.metal = values_.read_metal(map, "steel");
    if (const auto filler = values_.read_filler(map)) shell.filler = *filler;
    shell.layers = values_.read_insulation(map, shell.outer_radius);
    shells_.push_back({map.owner(), &node});
    file_.section.shells.push_back(std::move(shell));
    file_.names.push_back(name);
  }

  void add_body(const std::string& what, const YamlNode& node, const engine::Body& body) {
    bodies_.push_back({what, &node});
    file_.section.bodies.push_back(body);
  }

  void read_tube(const YamlNode& node, const std::string& what) {
    const YamlMap map(
        reader_, node, what,
        {"centre", "inner_diameter", "outer_diameter", "permittivity", "loss_tangent", "material"});
    if (!map.is_map()) return;
    engine::Body body;
    body.centre = values_.read_centre(map);
    std::tie(body.inner_radius, body.outer_radius) = values_.read_wall(map);
    body.wall = values_.read_dielectric(map);
    add_body(what, node, body);
  }

  void read_jacket(const YamlNode& node, const std::string& what) {
    const YamlMap map(
        reader_, node, what,
        {"centre", "circle", "stadium", "permittivity", "loss_tangent", "material", "filler", "wall"});
    if (!map.is_map()) return;
    engine::Body body;
    body.centre = values_.read_centre(map);
    body.wall = values_.read_dielectric(map);
    if (map.has("circle") == map.has("stadium")) {
      map.error(map.place(), "takes either a circle or a stadium");
      return;
    }
    if (map.has("circle"))
      read_circle(map, body);
    else
      read_stadium(map, body);
    read_inside(map, body);
    add_body(what, node, body);
  }

  void read_circle(const YamlMap& map, engine::Body& body) {
    const YamlMap round(reader_, *map.find("circle"), map.owner() + ": circle", {"diameter"});
    round.require("diameter");
    body.outer_radius = round.quantity("diameter", Dimension::length, k_size).value_or(0.0) / 2;
  }

  /// A strip with round ends, lying or, where it is higher than wide, standing.
  void read_stadium(const YamlMap& map, engine::Body& body) {
    const YamlMap flat(reader_, *map.find("stadium"), map.owner() + ": stadium", {"width", "height"});
    const Eigen::Vector2d half_size = values_.read_size(flat) / 2;
    body.outer_radius = half_size.minCoeff();
    body.core.half_size = half_size.array() - body.outer_radius;
  }

  /// Solid as far as the jacket reaches, or a filler inside a wall.
  void read_inside(const YamlMap& map, engine::Body& body) {
    body.inner_radius = body.outer_radius;
    body.filler = body.wall;
    if (map.has("filler") != map.has("wall")) map.error(map.place(), "filler and wall come together");
    if (const auto filler = values_.read_filler(map)) body.filler = *filler;
    const auto wall = map.quantity("wall", Dimension::length, k_size);
    if (!wall) return;
    body.inner_radius = body.outer_radius - *wall;
    if (body.inner_radius <= 0)
      map.error(*map.find("wall"), "wall must be under half the thickness of the jacket");
  }

  void read_reference(const YamlMap& top) {
    if (!enclosed_) return;  // reported already; what the reference may be hangs on the kind
    const bool open = file_.section.surroundings == Surroundings::open;
    const std::string usual = file_.section.surroundings == Surroundings::plane ? "plane" : "enclosure";
    const auto name = top.text("reference");
    if (!open) {
      file_.reference = usual;
      if (name && *name != usual && *name != "enclosure")
        top.error(*top.find("reference"),
                  fmt::format("reference '{}': with this enclosure the reference is the {}", *name, usual));
      return;
    }
    if (!name) {
      if (!top.has("reference"))
        top.error(*top.find("enclosure"),
                  "reference is missing: an open section counts from one of its conductors");
      return;
    }
    file_.reference = *name;
    const auto found = std::find(file_.names.begin(), file_.names.end(), *name);
    if (found != file_.names.end()) {
      file_.section.reference = static_cast<int>(found - file_.names.begin());
      if (file_.names.size() < 2)
        top.error(*top.find("reference"), "an open section has two conductors or more");
    } else {
      top.error(*top.find("reference"), fmt::format("reference '{}' is no conductor of the section{}", *name,
                                                    netlists::nearest_hint(*name, file_.names)));
    }
  }

  /// In the order in which the engine counts them.
  std::vector<SolidPlace> places() const {
    std::vector<SolidPlace> all = conductors_;
    all.insert(all.end(), bodies_.begin(), bodies_.end());
    all.insert(all.end(), shells_.begin(), shells_.end());
    return all;
  }

  /// Whatever else the engine may refuse.
  void check_with_engine(const YamlNode& tree) {
    try {
      engine::require_valid(file_.section);
    } catch (const std::invalid_argument& refusal) {
      reader_.error(tree, "", refusal.what());
    }
  }

  SectionFile& file_;
  YamlReader reader_;
  SectionValues values_;
  bool enclosed_ = false;  // the kind of the enclosure is known
  std::vector<SolidPlace> conductors_, bodies_, shells_;
  std::set<std::string> taken_;
};

}  // namespace

SectionFile read_section(const std::string& path, const netlists::Catalogue& catalogue) {
  SectionFile file;
  const auto text = read_text_file(path, file.faults);
  return text ? read_section_text(*text, path, catalogue) : file;
}

SectionFile read_section_text(const std::string& text, const std::string& name,
                              const netlists::Catalogue& catalogue) {
  SectionFile file;
  if (const auto tree = parse_yaml(text, name, file.faults)) {
    SectionReading reading(file, name, catalogue);
    reading.read(*tree);
  }
  netlists::sort_by_place(file.faults);
  return file;
}

}  // namespace io
