// What the model leaves open and the program fills in, in words.
#include <fmt/format.h>

#include <algorithm>

#include "io/model_reading.h"

namespace io {
namespace {

using netlists::Building;

/// "C1, C2, C3 and 14 more"
std::string some_of(const std::vector<std::string>& names) {
  constexpr std::size_t k_most = 6;
  const std::size_t shown = std::min(names.size(), k_most);
  std::string list =
      fmt::format("{}", fmt::join(names.begin(), names.begin() + static_cast<std::ptrdiff_t>(shown), ", "));
  if (names.size() > shown) list += fmt::format(" and {} more", names.size() - shown);
  return list;
}

void tell(Building& building, const std::vector<std::string>& names, std::string_view words) {
  if (!names.empty()) building.defaults.push_back(fmt::format(fmt::runtime(words), some_of(names)));
}

bool open_to_surroundings(const Building& building, const netlists::Run& run) {
  const auto raceway = building.catalogue.raceways.find(run.raceway.text);
  return raceway == building.catalogue.raceways.end() || !raceway->second.metal();
}

}  // namespace

void tell_top_defaults(Building& building, const YamlMap& top) {
  const auto missing = [&](const char* key, std::string words) {
    if (!top.has(key)) building.defaults.push_back(std::move(words));
  };
  missing("frequency", fmt::format("frequency {:g} Hz", building.frequency));
  missing("temperature", fmt::format("temperature {:g} degC", building.temperature));
  missing("earth_resistivity", fmt::format("earth resistivity {:g} ohm m", building.earth_resistivity));
  missing("instruments", "instruments dmm, low_impedance and analog_5k");
}

void tell_defaults(Building& building) {
  std::vector<std::string> no_clearance, no_loads, no_size;
  for (const auto& run : building.runs)
    if (!run.clearance && open_to_surroundings(building, run)) no_clearance.push_back(run.name.text);
  for (const auto& circuit : building.circuits) {
    if (circuit.panel && !circuit.loads) no_loads.push_back(circuit.name.text);
    for (const auto& load : circuit.loads.value_or(std::vector<netlists::Load>{}))
      if (!load.power && !load.apparent && !load.current && !load.resistance && !load.capacitance)
        no_size.push_back(circuit.name.text);
  }
  no_size.erase(std::unique(no_size.begin(), no_size.end()), no_size.end());
  tell(building, no_clearance, "clearance to an earthed plane 50 mm: runs {}");
  tell(building, no_loads, "loads not stated, none taken in the nominal case: circuits {}");
  tell(building, no_size, "size of a load not given, the usual of its kind taken: circuits {}");
}

}  // namespace io
