// A coupled network at one frequency: what a building becomes before it is solved.
#pragma once

#include <Eigen/Core>
#include <complex>
#include <memory>
#include <vector>

namespace engine {

using Complex = std::complex<double>;

/// Per-metre matrices of n coupled conductors. `impedance` is complex symmetric with a positive
/// definite real part; `capacitance` and `conductance` are in Maxwell form counted from earth.
struct LineMatrices {
  Eigen::MatrixXcd impedance;   // ohm/m, n x n
  Eigen::MatrixXd capacitance;  // F/m, n x n
  Eigen::MatrixXd conductance;  // S/m, n x n
};

/// A stretch of n coupled conductors: `cells` equal pi sections in a row, each with the series
/// impedance of its length between its ends and half of its shunt admittance at each end.
struct Line {
  std::shared_ptr<const LineMatrices> matrices;  // lines of equal section share one
  double length = 0.0;                           // m, > 0
  int cells = 1;                                 // >= 1
  std::vector<int> from;                         // nodes, size n
  std::vector<int> to;                           // nodes, size n
};

/// An admittance between two nodes: a load, a bond, a leak, a stray capacitance.
struct Element {
  int a = 0;
  int b = 0;
  Complex admittance;  // S
};

/// An EMF of `volts` behind `impedance` that drives node a above node b.
struct Source {
  int a = 0;
  int b = 0;
  Complex volts;      // V RMS
  Complex impedance;  // ohm, not zero
};

/// Node 0 is earth, at 0 V. Contacts of no resistance have been joined into one node already.
struct Network {
  double frequency = 60.0;  // Hz
  int node_count = 1;       // earth included; nodes between the cells of a line are not counted
  std::vector<Line> lines;
  std::vector<Element> elements;
  std::vector<Source> sources;
};

/// Throws std::invalid_argument, naming the line, element or source by its number and what is wrong,
/// if a node is out of range, a matrix has the wrong shape or is not finite, a length or number of
/// cells is not positive, or a source has no impedance.
void require_valid(const Network& network);

}  // namespace engine
