// The network of one draw: the lowered one with everything uncertain put where the draw has it.
#pragma once

#include <Eigen/Core>
#include <map>
#include <memory>
#include <string>
#include <vector>

#include "netlists/building.h"
#include "netlists/lower.h"
#include "netlists/section_bank.h"
#include "netlists/uncertain.h"

namespace netlists {

/// The values that one draw gives to everything uncertain.
class DrawnValues {
 public:
  /// `point` has one coordinate in (0, 1) for each quantity.
  DrawnValues(const Uncertain& uncertain, Eigen::RowVectorXd point);

  double value(int quantity) const;
  /// The same, or `otherwise` where nothing of the kind is uncertain.
  double value(Quantity::Kind kind, const std::string& target, double otherwise) const;
  double value(Quantity::Kind kind, int index, double otherwise) const;

  /// Power (W) of a load that the model does not list; 0: it is not there.
  double unlisted_power(const std::string& circuit) const;

  /// ln of each insulation's permittivity over its central one. A thicker layer counts as one of a lower
  /// permittivity, which has the same capacitance per metre around its wire.
  Eigen::VectorXd log_permittivities(const Catalogue& catalogue) const;

  /// One character for each quantity of Kind::state: '1' on or closed.
  std::string states() const;

 private:
  const Uncertain& uncertain_;
  Eigen::RowVectorXd point_;
};

/// A building lowered in one of the states that may vary.
struct StateLowering {
  Lowered lowered;
  std::map<std::string, std::size_t> conductor;  // by id, index into lowered.conductors
};

/// Sets each quantity of Kind::state in a building. Throws std::invalid_argument for one that cannot be set.
Building in_states(const Building& staged, const Uncertain& uncertain, const std::string& states);

/// Turns lowered networks into drawn ones. All that it is built from must outlive it.
class NetworkDrawer {
 public:
  NetworkDrawer(const Building& staged, const Uncertain& uncertain, const SectionBank& bank,
                const SectionLibrary& library, unsigned seed);

  engine::Network network(const Lowered& lowered, const DrawnValues& values, int draw) const;
  /// The connections that are there in this draw: unlisted loads that it has not are taken away.
  Lowered with_loads(const Lowered& lowered, const DrawnValues& values) const;

  /// Index of the supply whose voltage and phase a supply follows, through what feeds it.
  int root_supply_of(const std::string& supply) const;

 private:
  SectionDraw section_draw(const Stretch& stretch, double length, const DrawnValues& values, int draw,
                           int line) const;

  const Building& building_;
  const Uncertain& uncertain_;
  const SectionBank& bank_;
  const SectionLibrary& library_;
  unsigned seed_;
  std::map<std::string, int> roots_;  // by supply
};

}  // namespace netlists
