// What the top of a model leaves open and the program fills in, in words. What its entries leave open
// is told by the lowering, which fills it in.
#include <fmt/format.h>

#include "io/model_reading.h"

namespace io {

void tell_defaults(netlists::Building& building, const YamlMap& top) {
  const auto missing = [&](const char* key, std::string words) {
    if (!top.has(key)) building.defaults.push_back(std::move(words));
  };
  missing("frequency", fmt::format("frequency {:g} Hz", building.frequency));
  missing("temperature", fmt::format("temperature {:g} degC", building.temperature));
  missing("earth_resistivity", fmt::format("earth resistivity {:g} ohm m", building.earth_resistivity));
  missing("instruments", "instruments dmm, low_impedance and analog_5k");
}

}  // namespace io
