// Which neighbour puts the voltage there.
#pragma once

#include <memory>
#include <vector>

#include "engine/solve.h"

namespace engine {

/// Who is an aggressor. Group numbers are the caller's own, >= 0; -1 marks a victim.
struct Aggressors {
  std::vector<int> of_node;                  // size node_count; earth is ignored
  std::vector<std::vector<int>> of_segment;  // [line][conductor]
  std::vector<int> of_source;                // size sources: the group an EMF between victim nodes is
                                             // reported under; ignored where both ends are aggressors
};

enum class Path {
  electric,   // through shunt capacitance and its loss
  magnetic,   // through mutual series impedance
  conductive  // through elements and sources
};

struct Contribution {
  int group = 0;
  Path path = Path::electric;
  Complex volts;  // V RMS
};

/// Splits the voltages of a solved network by cause. Every aggressor node is fixed at its solved
/// voltage and every aggressor segment's current at its solved value; the contribution of group k to
/// a victim is its response with all other groups' voltages and currents zero.
class Attribution {
 public:
  /// Factors the victims' network. `solved` must outlive it and stay where it is. A segment is an aggressor
  /// exactly where its ends are, earth counting as one; a source at a victim has a group. Throws
  /// std::invalid_argument otherwise. Method and source: engine/README.md, "The network".
  Attribution(const SolvedNetwork& solved, const Aggressors& aggressors);
  ~Attribution();

  /// The contributions to v_a - v_b, a a victim, b earth or any node. They add up to
  /// solved.volts(a, b) within 1e-9 relative. Where b is an aggressor its own voltage is counted,
  /// with its sign, in its group's conductive part. Sorted by magnitude, largest first; exact zeros left out.
  /// None where solved.volts(a, b) is undetermined. One solve; throws std::invalid_argument if a is no
  /// victim.
  std::vector<Contribution> contributions(int a, int b) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace engine
