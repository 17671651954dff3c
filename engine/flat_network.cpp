#include "engine/flat_network.h"

#include <Eigen/LU>
#include <map>
#include <numbers>
#include <stdexcept>
#include <string>
#include <utility>

namespace engine {

Eigen::MatrixXcd inverse_impedance(const Eigen::MatrixXcd& impedance, const std::string& where) {
  const Eigen::MatrixXcd inverse = impedance.partialPivLu().inverse();
  if (!inverse.allFinite()) throw std::invalid_argument(where + ": its impedance matrix is singular");
  return 0.5 * (inverse + inverse.transpose());
}

std::vector<int> cell_boundaries(const Network& network, int& node_count) {
  std::vector<int> ends;
  node_count = network.node_count;
  for (const Line& line : network.lines) {
    ends.insert(ends.end(), line.from.begin(), line.from.end());
    for (int cell = 1; cell < line.cells; ++cell)
      for (std::size_t i = 0; i < line.from.size(); ++i) ends.push_back(node_count++);
    ends.insert(ends.end(), line.to.begin(), line.to.end());
  }
  return ends;
}

FlatNetwork flatten(const Network& network) {
  FlatNetwork flat;
  flat.ends = cell_boundaries(network, flat.node_count);
  const double omega = 2 * std::numbers::pi * network.frequency;  // rad/s
  std::map<const LineMatrices*, Eigen::MatrixXcd> inverses;
  std::map<std::pair<const LineMatrices*, double>, std::shared_ptr<const CellBlocks>> known;
  std::size_t end = 0;
  for (std::size_t i = 0; i < network.lines.size(); ++i) {
    const Line& line = network.lines[i];
    const LineMatrices* matrices = line.matrices.get();
    const double length = line.length / line.cells;  // m
    std::shared_ptr<const CellBlocks>& blocks = known[{matrices, length}];
    if (!blocks) {
      Eigen::MatrixXcd& inverse = inverses[matrices];
      if (inverse.size() == 0) inverse = inverse_impedance(matrices->impedance, "line " + std::to_string(i));
      const Eigen::MatrixXcd shunt = matrices->conductance + Complex(0, omega) * matrices->capacitance;
      blocks = std::make_shared<CellBlocks>(
          CellBlocks{inverse / length, 0.25 * length * (shunt + shunt.transpose())});
    }
    for (int cell = 0; cell < line.cells; ++cell, end += line.from.size())
      flat.sections.push_back({blocks, end});
    end += line.from.size();
  }
  for (const Element& element : network.elements)
    flat.branches.push_back({element.a, element.b, element.admittance, Complex{}});
  for (const Source& source : network.sources)
    flat.branches.push_back({source.a, source.b, 1.0 / source.impedance, source.volts});
  return flat;
}

}  // namespace engine
