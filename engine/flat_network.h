// A network taken apart into sections of one cell and single branches, ready to be assembled.
#pragma once

#include <Eigen/Core>
#include <cstddef>
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "engine/network.h"

namespace engine {

/// The admittances of one cell of a line.
struct CellBlocks {
  Eigen::MatrixXcd series;      // S, n x n: the currents from -> to are series * (v_from - v_to)
  Eigen::MatrixXcd half_shunt;  // S, n x n: the currents half_shunt * v leave at each end
};

/// One pi section. Its nodes stand in FlatNetwork::ends.
struct Section {
  std::shared_ptr<const CellBlocks> blocks;
  std::size_t first_end = 0;

  int size() const { return static_cast<int>(blocks->series.rows()); }
};

/// An admittance with an EMF: the current a -> b is admittance * (v_a - v_b - emf).
struct Branch {
  int a = 0;
  int b = 0;
  Complex admittance;  // S
  Complex emf;         // V RMS
};

struct FlatNetwork {
  int node_count = 1;             // nodes between cells included
  std::vector<int> ends;          // line by line, cell boundary by cell boundary, n nodes each
  std::vector<Section> sections;  // line by line, cell by cell
  std::vector<Branch> branches;

  std::span<const int> from(const Section& section) const {
    return std::span(ends).subspan(section.first_end, section.size());
  }
  std::span<const int> to(const Section& section) const {
    return std::span(ends).subspan(section.first_end + section.size(), section.size());
  }
};

/// The inverse of a line's impedance matrix, per metre: S m, symmetric. Throws std::invalid_argument
/// with `where` in front if there is none.
Eigen::MatrixXcd inverse_impedance(const Eigen::MatrixXcd& impedance, const std::string& where);

/// The nodes at the cell boundaries of every line, in the order of FlatNetwork::ends. Nodes between cells
/// are numbered from network.node_count on; `node_count` is set to the number of all.
std::vector<int> cell_boundaries(const Network& network, int& node_count);

/// Takes a valid network apart. Branches are the elements in their order, then the sources.
FlatNetwork flatten(const Network& network);

}  // namespace engine
