#include "engine/network.h"

#include <cmath>
#include <sstream>
#include <stdexcept>
#include <string>

namespace engine {
namespace {

// How far a matrix may be from its transpose, relative to its largest entry. Rounding leaves 1e-15.
constexpr double k_symmetry = 1e-9;

template <typename... Parts>
[[noreturn]] void refuse(const Parts&... parts) {
  std::ostringstream message;
  (message << ... << parts);
  throw std::invalid_argument(message.str());
}

bool is_finite(Complex value) { return std::isfinite(value.real()) && std::isfinite(value.imag()); }

void require_node(const Network& network, const std::string& where, int node) {
  if (node < 0 || node >= network.node_count)
    refuse(where, ": node ", node, " is out of range; nodes are 0 to ", network.node_count - 1);
}

template <typename Matrix>
void require_matrix(const std::string& where, const char* what, const Matrix& matrix, Eigen::Index n) {
  if (matrix.rows() != n || matrix.cols() != n)
    refuse(where, ": ", what, " is ", matrix.rows(), " x ", matrix.cols(), ", but the line has ", n,
           " conductors");
  if (!matrix.allFinite()) refuse(where, ": ", what, " is not finite");
  const double largest = matrix.cwiseAbs().maxCoeff();
  const double skew = (matrix - matrix.transpose()).cwiseAbs().maxCoeff();
  if (skew > k_symmetry * largest)
    refuse(where, ": ", what, " is not symmetric: entries differ by ", skew, " of ", largest);
}

void require_valid_line(const Network& network, const Line& line, const std::string& where) {
  if (!(std::isfinite(line.length) && line.length > 0))
    refuse(where, ": length ", line.length, " m is not positive and finite");
  if (line.cells < 1) refuse(where, ": ", line.cells, " cells; at least 1 is needed");
  if (line.from.empty()) refuse(where, ": has no conductor");
  if (line.from.size() != line.to.size())
    refuse(where, ": ", line.from.size(), " conductors begin, but ", line.to.size(), " end");
  if (!line.matrices) refuse(where, ": has no matrices");
  for (const int node : line.from) require_node(network, where, node);
  for (const int node : line.to) require_node(network, where, node);
  const auto n = static_cast<Eigen::Index>(line.from.size());
  require_matrix(where, "impedance", line.matrices->impedance, n);
  require_matrix(where, "capacitance", line.matrices->capacitance, n);
  require_matrix(where, "conductance", line.matrices->conductance, n);
}

}  // namespace

void require_valid(const Network& network) {
  if (!(std::isfinite(network.frequency) && network.frequency > 0))
    refuse("frequency ", network.frequency, " Hz is not positive and finite");
  if (network.node_count < 1) refuse(network.node_count, " nodes; earth alone is one");
  for (std::size_t i = 0; i < network.lines.size(); ++i)
    require_valid_line(network, network.lines[i], "line " + std::to_string(i));
  for (std::size_t i = 0; i < network.elements.size(); ++i) {
    const Element& element = network.elements[i];
    const std::string where = "element " + std::to_string(i);
    require_node(network, where, element.a);
    require_node(network, where, element.b);
    if (!is_finite(element.admittance)) refuse(where, ": admittance is not finite");
  }
  for (std::size_t i = 0; i < network.sources.size(); ++i) {
    const Source& source = network.sources[i];
    const std::string where = "source " + std::to_string(i);
    require_node(network, where, source.a);
    require_node(network, where, source.b);
    if (!is_finite(source.volts)) refuse(where, ": volts are not finite");
    if (!is_finite(source.impedance)) refuse(where, ": impedance is not finite");
    if (source.impedance == Complex{}) refuse(where, ": has no impedance");
  }
}

}  // namespace engine
