#include "io/json_text.h"
#include "io/writers.h"

namespace io {
namespace {
using nlohmann::ordered_json;

ordered_json line_json(const netlists::Lowered& lowered, const engine::Line& line, std::size_t k,
                       Numbers& number) {
  ordered_json out;
  out["run"] = lowered.line_runs.at(k);
  out["length_m"] = line.length;
  out["cells"] = line.cells;
  out["conductors"] = lowered.line_conductors.at(k);
  out["from"] = line.from;
  out["to"] = line.to;
  out["impedance_ohm_per_m"] =
      number.matrix(line.matrices->impedance, "the impedance of " + lowered.line_runs.at(k));
  out["capacitance_F_per_m"] =
      number.matrix(line.matrices->capacitance, "the capacitance of " + lowered.line_runs.at(k));
  out["conductance_S_per_m"] =
      number.matrix(line.matrices->conductance, "the conductance of " + lowered.line_runs.at(k));
  return out;
}

ordered_json element_json(const engine::Element& element, const std::string& name, Numbers& number) {
  ordered_json out;
  out["what"] = name;
  out["between"] = ordered_json::array({element.a, element.b});
  out["admittance_S"] = number.complex(element.admittance, name + ": admittance");
  return out;
}

ordered_json source_json(const engine::Source& source, const std::string& name, Numbers& number) {
  ordered_json out;
  out["what"] = name;
  out["between"] = ordered_json::array({source.a, source.b});
  out["volts"] = number.complex(source.volts, name + ": volts");
  out["impedance_ohm"] = number.complex(source.impedance, name + ": impedance");
  return out;
}

}  // namespace

std::string network_json(const netlists::Lowered& lowered, const engine::SolvedNetwork& solved) {
  Numbers number;
  const engine::Network& network = solved.network();
  ordered_json out;
  out["format"] = "idlewire-network/1";
  out["frequency_Hz"] = network.frequency;
  out["nodes"] = lowered.node_names;
  out["at"] = lowered.at;
  out["lines"] = ordered_json::array();
  for (std::size_t k = 0; k < network.lines.size(); ++k)
    out["lines"].push_back(line_json(lowered, network.lines[k], k, number));
  out["elements"] = ordered_json::array();
  for (std::size_t k = 0; k < network.elements.size(); ++k)
    out["elements"].push_back(element_json(network.elements[k], lowered.element_names.at(k), number));
  out["sources"] = ordered_json::array();
  for (std::size_t k = 0; k < network.sources.size(); ++k)
    out["sources"].push_back(source_json(network.sources[k], lowered.source_names.at(k), number));
  out["solution_V"] = ordered_json::array();
  for (int node = 0; node < network.node_count; ++node) {
    const std::string what = "the voltage of " + lowered.node_names.at(static_cast<std::size_t>(node));
    out["solution_V"].push_back(number.complex(solved.volts(node), what));
  }
  out["residual"] = number.real(solved.residual(), "the residual of the solution");
  out["states"] = lowered.states;
  out["assumptions"] = lowered.assumptions;
  out["warnings"] = lowered.warnings;
  for (const std::string& warning : number.warnings()) out["warnings"].push_back(warning);
  return json_text(out);
}

}  // namespace io
