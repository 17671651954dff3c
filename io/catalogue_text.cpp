#include "io/catalogue_text.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <stdexcept>
#include <utility>
#include <vector>

#include "io/text_layout.h"
#include "netlists/fault.h"
#include "netlists/findings.h"

namespace io {
namespace {

using netlists::CableType;
using netlists::Catalogue;
using netlists::InstrumentKind;
using netlists::InstrumentType;
using netlists::LoadKind;
using netlists::Material;
using netlists::RacewayKind;
using netlists::RacewayType;
using netlists::SystemType;
using netlists::WireType;

/// What is said of an entry, "what: value" a line.
using Lines = std::vector<std::pair<std::string, std::string>>;

std::string number(double value) { return fmt::format("{:.4g}", value); }

std::string size_text(double metres) {
  return fmt::format("{:.3f} mm ({:.4g} in)", metres * 1e3, std::round(metres / 25.4e-3 * 1e4) / 1e4);
}

std::string scaled(double value, const std::vector<std::pair<double, const char*>>& units) {
  for (const auto& [factor, unit] : units)
    if (std::abs(value) >= factor) return fmt::format("{} {}", number(value / factor), unit);
  return fmt::format("{} {}", number(value / units.back().first), units.back().second);
}

std::string ohms(double value) {
  return scaled(value, {{1e9, "Gohm"}, {1e6, "Mohm"}, {1e3, "kohm"}, {1, "ohm"}, {1e-3, "mohm"}});
}
std::string farads(double value) { return scaled(value, {{1e-6, "uF"}, {1e-9, "nF"}, {1e-12, "pF"}}); }
std::string watts(double value) { return scaled(value, {{1e3, "kW"}, {1, "W"}, {1e-3, "mW"}}); }

// ---- one line an entry, for lists --------------------------------------------------------------------

std::string summary(const Material& m) {
  if (m.conductivity > 0)
    return fmt::format("metal, {} MS/m, relative permeability {}", number(m.conductivity * 1e-6),
                       number(m.relative_permeability));
  if (m.permittivity_low == m.permittivity_high)
    return fmt::format("permittivity {}", number(m.permittivity));
  return fmt::format("permittivity {} ({} to {})", number(m.permittivity), number(m.permittivity_low),
                     number(m.permittivity_high));
}

std::string summary(const WireType& w) {
  std::string over = w.layers.empty() ? "bare" : "";
  for (const auto& layer : w.layers) over += (over.empty() ? "" : " and ") + layer.material;
  return fmt::format("{} {}, {} strand{}, {}, {:.2f} mm over all", w.metal,
                     number(w.conductor_diameter * 1e3) + " mm", w.strands, w.strands == 1 ? "" : "s", over,
                     w.outer_diameter() * 1e3);
}

std::string outline(const CableType& c) {
  return c.flat() ? fmt::format("flat, {:.1f} x {:.1f} mm", c.width * 1e3, c.height * 1e3)
                  : fmt::format("round, {:.1f} mm", c.width * 1e3);
}

std::string summary(const CableType& c) {
  std::string roles;
  for (const auto& core : c.cores) roles += (roles.empty() ? "" : ", ") + core.role;
  return fmt::format("{}{}; {}", outline(c), c.armour ? ", armour of " + c.armour->material : "", roles);
}

const char* kind_text(RacewayKind kind) {
  switch (kind) {
    case RacewayKind::metal_tube:
      return "metal tube";
    case RacewayKind::plastic_tube:
      return "plastic tube";
    case RacewayKind::wireway:
      return "wireway";
    case RacewayKind::tray:
      return "tray";
    case RacewayKind::none:
      break;
  }
  return "none";
}

std::string summary(const RacewayType& r) {
  if (r.inner_diameter > 0)
    return fmt::format("{} of {}, inside {:.2f} mm, outside {:.2f} mm", kind_text(r.kind), r.material,
                       r.inner_diameter * 1e3, r.outer_diameter * 1e3);
  return fmt::format("{} of {}, inside {:.1f} x {:.1f} mm", kind_text(r.kind), r.material, r.width * 1e3,
                     r.height * 1e3);
}

std::string summary(const SystemType& s) {
  std::string poles;
  for (const auto& line : s.lines) poles += (poles.empty() ? "" : ", ") + line.name;
  return fmt::format(
      "{}{}; grounding {}{}", poles, s.neutral ? ", neutral" : "", s.default_grounding,
      s.default_grounding == "solid" || s.default_grounding == "corner" ? ", " + s.grounded_pole : "");
}

std::string summary(const InstrumentType& i) {
  const std::string input = i.ranges.empty()
                                ? ohms(i.resistance)
                                : fmt::format("{} to {} by range", ohms(i.ranges.front().resistance),
                                              ohms(i.ranges.back().resistance));
  return fmt::format("{}, {}{}", i.label, input,
                     i.kind == InstrumentKind::indicator ? ", indicates only" : "");
}

std::string summary(const LoadKind& l) { return l.label; }

// ---- an entry in full --------------------------------------------------------------------------------

Lines details(const Material& m) {
  if (m.conductivity > 0)
    return {
        {"conductivity", number(m.conductivity * 1e-6) + " MS/m at 20 degC"},
        {"temperature coefficient", number(m.temperature_coefficient) + " 1/K"},
        {"relative permeability", number(m.relative_permeability) + ", effective at small wall currents"}};
  return {{"permittivity", summary(m).substr(std::string("permittivity ").size())},
          {"loss tangent", number(m.loss_tangent) + " at 50 and 60 Hz, 20 degC"}};
}

Lines details(const WireType& w) {
  Lines lines{{"metal", w.metal},
              {"conductor", fmt::format("{}, {} strand{}", size_text(w.conductor_diameter), w.strands,
                                        w.strands == 1 ? "" : "s")},
              {"resistance", w.resistance > 0 ? number(w.resistance * 1e3) + " ohm/km at 20 degC, dc"
                                              : "from the metal and the area of its strands"}};
  for (const auto& layer : w.layers)
    lines.emplace_back("insulation", layer.material + ", " + size_text(layer.thickness));
  if (w.layers.empty()) lines.emplace_back("insulation", "none");
  lines.emplace_back("over all", size_text(w.outer_diameter()));
  return lines;
}

Lines details(const CableType& c) {
  Lines lines{{"outline", c.flat() ? size_text(c.width) + " wide, " + size_text(c.height) + " high"
                                   : size_text(c.width)}};
  if (!c.jacket.empty()) lines.emplace_back("jacket", c.jacket + ", " + size_text(c.jacket_thickness));
  if (c.armour) {
    lines.emplace_back("armour",
                       fmt::format("{}, inside {}, outside {}", c.armour->material,
                                   size_text(c.armour->inner_diameter), size_text(c.armour->outer_diameter)));
    if (c.armour->resistance > 0)
      lines.emplace_back("armour resistance", number(c.armour->resistance * 1e3) + " ohm/km at 20 degC, dc");
  }
  lines.emplace_back("filler", c.filler);
  for (const auto& core : c.cores)
    lines.emplace_back("core " + core.role, fmt::format("{}, x {:.2f} mm, y {:.2f} mm from the centre",
                                                        core.wire.name, core.x * 1e3, core.y * 1e3));
  return lines;
}

Lines details(const RacewayType& r) {
  Lines lines{{"kind", kind_text(r.kind)}, {"material", r.material}};
  if (r.inner_diameter > 0) {
    lines.emplace_back("inside diameter", size_text(r.inner_diameter));
    lines.emplace_back("outside diameter", size_text(r.outer_diameter));
  } else {
    lines.emplace_back("inside", size_text(r.width) + " wide, " + size_text(r.height) + " high");
    lines.emplace_back("sheet", size_text(r.wall));
  }
  return lines;
}

Lines details(const SystemType& s) {
  Lines lines;
  std::vector<std::pair<std::string, std::complex<double>>> poles;
  for (const auto& line : s.lines) poles.emplace_back(line.name, std::polar(line.volts, line.angle));
  if (s.neutral) poles.emplace_back("neutral", s.neutral_volts);
  for (std::size_t i = 0; i < poles.size(); ++i)
    for (std::size_t j = i + 1; j < poles.size(); ++j)
      lines.emplace_back(fmt::format("{} to {}", poles[i].first, poles[j].first),
                         fmt::format("{:.1f} V", std::abs(poles[i].second - poles[j].second)));
  lines.emplace_back("grounding", s.default_grounding + ", unless the model says otherwise");
  if (!s.grounded_pole.empty())
    lines.emplace_back("grounded pole", s.grounded_pole + ", where one is grounded");
  lines.emplace_back("impedance of a line",
                     fmt::format("{} + j {}", ohms(s.impedance_resistance), ohms(s.impedance_reactance)));
  return lines;
}

Lines details(const InstrumentType& i) {
  Lines lines{{"what it is", i.label},
              {"judged", i.kind == InstrumentKind::voltmeter ? "yes, it shows volts"
                                                             : "no, it only lights, buzzes or glows"}};
  if (i.ranges.empty()) lines.emplace_back("resistance", ohms(i.resistance));
  for (const auto& range : i.ranges)
    lines.emplace_back(fmt::format("range {} V", number(range.full_scale)), ohms(range.resistance));
  lines.emplace_back("capacitance", i.capacitance > 0 ? farads(i.capacitance) : "none taken");
  if (i.kind == InstrumentKind::indicator) lines.emplace_back("may show from", number(i.threshold) + " V");
  return lines;
}

std::string effect_text(const netlists::LoadEffect& e) {
  std::string from;
  if (e.rectifies)
    from = fmt::format("from {} uA into {} V behind its rectifier", number(e.current * 1e6), number(e.volts));
  else if (e.what == "device_trips")
    from = fmt::format("from {} mA", number(e.current * 1e3));
  else if (e.share > 0)
    from = fmt::format("from {} % of its nominal voltage", number(e.share * 100));
  else if (e.volts_at_low_current > 0)
    from = fmt::format("from {} V, or from {} V while it draws no more than {} mA", number(e.volts),
                       number(e.volts_at_low_current), number(e.current * 1e3));
  else
    from = fmt::format("from {} V", number(e.volts));
  return from + " (" + e.source + ")";
}

Lines details(const LoadKind& l) {
  Lines lines{{"what it is", l.label},
              {"power factor", number(l.power_factor) + (l.power_factor == 1 ? ""
                                                         : l.capacitive      ? ", leading"
                                                                             : ", lagging")},
              l.default_capacitance > 0
                  ? std::pair<std::string, std::string>{"capacitance", farads(l.default_capacitance) +
                                                                           " where the model gives none"}
                  : std::pair<std::string, std::string>{
                        "power", watts(l.default_power) + " where the model gives none"}};
  std::string standby;
  if (l.standby_resistance > 0) standby = ohms(l.standby_resistance);
  if (l.standby_capacitance > 0)
    standby += (standby.empty() ? "" : " beside ") + farads(l.standby_capacitance);
  lines.emplace_back("standby", standby.empty() ? "open" : standby);
  for (const auto& effect : l.effects) lines.emplace_back(effect.what, effect_text(effect));
  return lines;
}

// ---- kinds -------------------------------------------------------------------------------------------

/// What entries are sorted by within a family of names, so that sizes ascend.
double size_of(const WireType& w) { return w.conductor_diameter; }
double size_of(const RacewayType& r) { return r.inner_diameter > 0 ? r.inner_diameter : r.width; }
template <class T>
double size_of(const T&) {
  return 0.0;
}

/// "THHN 12 solid" -> "THHNsolid": the name without its size.
std::string family(const std::string& name) {
  std::string kept;
  for (const char c : name)
    if (std::string(" 0123456789/.").find(c) == std::string::npos) kept += c;
  return kept;
}

/// The entries of a kind, other names left out, sizes ascending.
template <class T>
std::vector<const T*> sorted(const std::map<std::string, T>& entries) {
  std::vector<const T*> list;
  for (const auto& [name, entry] : entries)
    if (name == entry.name) list.push_back(&entry);
  std::stable_sort(list.begin(), list.end(), [](const T* a, const T* b) {
    const auto key = [](const T& entry) {
      return std::pair(size_of(entry) > 0 ? family(entry.name) : entry.name, size_of(entry));
    };
    return key(*a) < key(*b);
  });
  return list;
}

/// Calls f(kind, entries) for each kind, in the order in which people look for them.
template <class F>
void for_each_kind(const Catalogue& catalogue, F f) {
  f("wires", catalogue.wires);
  f("cables", catalogue.cables);
  f("raceways", catalogue.raceways);
  f("systems", catalogue.systems);
  f("instruments", catalogue.instruments);
  f("loads", catalogue.loads);
  f("materials", catalogue.materials);
}

/// Names in lines of at most `width` columns, none of them broken.
template <class T>
std::string name_lines(const std::vector<const T*>& entries, int width) {
  std::string text;
  std::string line;
  for (const T* entry : entries) {
    const std::string name = printable(entry->name) + (entry == entries.back() ? "" : ",");
    if (!line.empty() && columns_of(line) + 1 + columns_of(name) > width)
      text += std::exchange(line, "") + "\n";
    line += (line.empty() ? "  " : " ") + name;
  }
  return text + line + "\n";
}

template <class T>
std::string table(const std::string& kind, const std::vector<const T*>& entries, int width) {
  std::size_t widest = 0;
  for (const T* entry : entries) widest = std::max(widest, printable(entry->name).size());
  std::string text = kind + "\n";
  for (const T* entry : entries)
    text += paragraph(fmt::format("  {:{}}  ", printable(entry->name), widest), printable(summary(*entry)),
                      width);
  return text;
}

template <class T>
std::string in_full(const std::string& kind, const T& entry, const std::vector<std::string>& others,
                    int width) {
  Lines lines = details(entry);
  if (!others.empty()) lines.emplace_back("also called", fmt::format("{}", fmt::join(others, ", ")));
  lines.emplace_back("source", entry.source);
  std::size_t widest = 0;
  for (const auto& [what, value] : lines) widest = std::max(widest, what.size());
  std::string text = paragraph("", fmt::format("{} ({})", printable(entry.name), kind), width);
  for (const auto& [what, value] : lines)
    text += paragraph(fmt::format("  {:{}}  ", printable(what), widest), printable(value), width);
  return text;
}

template <class T>
std::vector<std::string> other_names(const std::map<std::string, T>& entries, const T& entry) {
  std::vector<std::string> names;
  for (const auto& [name, same] : entries)
    if (same.name == entry.name && name != entry.name) names.push_back(name);
  return names;
}

std::string with_caution(const std::string& text, int width) {
  return text + "\n" + paragraph("", netlists::caution(), width);
}

[[noreturn]] void refuse(const Catalogue& catalogue, const std::string& name) {
  std::vector<std::string> names;
  for_each_kind(catalogue, [&](const char* kind, const auto& entries) {
    names.emplace_back(kind);
    for (const auto& [known, entry] : entries) names.push_back(known);
  });
  const std::string hint = netlists::nearest_hint(name, names);
  throw std::invalid_argument(fmt::format("'{}' is not in the catalogue{}", printable(name),
                                          hint.empty() ? "; without a name it lists all there is" : hint));
}

}  // namespace

std::string catalogue_list(const Catalogue& catalogue, int width) {
  std::string text;
  for_each_kind(catalogue, [&](const char* kind, const auto& entries) {
    text += fmt::format("{}\n{}\n", kind, name_lines(sorted(entries), width));
  });
  text += paragraph(
      "", "A name shows its entry in full with its sources, as in: idlewire catalogue 'THHN 12'", width);
  text += paragraph("", "A kind shows its entries one a line, as in: idlewire catalogue cables", width);
  return with_caution(text, width);
}

std::string catalogue_entry(const Catalogue& catalogue, const std::string& name, int width) {
  std::string text;
  for_each_kind(catalogue, [&](const char* kind, const auto& entries) {
    if (name == kind) text += (text.empty() ? "" : "\n") + table(kind, sorted(entries), width);
    const auto found = entries.find(name);
    if (found == entries.end()) return;
    const std::string one(kind, std::string(kind).size() - 1);
    text +=
        (text.empty() ? "" : "\n") + in_full(one, found->second, other_names(entries, found->second), width);
  });
  if (text.empty()) refuse(catalogue, name);
  return with_caution(text, width);
}

}  // namespace io
