// Stages and what may vary: every setting must be one that can be set.
#include <fmt/format.h>

#include <unordered_set>

#include "netlists/checks.h"
#include "netlists/stage.h"

namespace netlists {
namespace {

std::string owner_of(const std::string& target) { return target.substr(0, target.find('.')); }

/// Tries a setting on a building of the one circuit or panel it names, so that many stages of a large
/// building stay cheap. Returns what is wrong, or "".
std::string try_setting(const Checks& checks, const std::string& target, const std::string& value) {
  Building one;
  const std::string owner = owner_of(target);
  if (const int circuit = checks.circuits.find(owner); circuit >= 0)
    one.circuits.push_back(checks.building.circuits[static_cast<std::size_t>(circuit)]);
  if (const int panel = checks.panels.find(owner); panel >= 0)
    one.panels.push_back(checks.building.panels[static_cast<std::size_t>(panel)]);
  return apply_setting(one, target, value);
}

void check_set(Checks& checks, const Stage& stage, const Name& target, const Name& value) {
  const std::string label = fmt::format("stage '{}'", stage.name.text);
  const std::string owner = owner_of(target.text);
  if (!checks.circuits.has(owner) && !checks.panels.has(owner)) {
    checks.error(target.mark, fmt::format("{}: there is no circuit '{}'{}", label, owner,
                                          checks.hint(owner, checks.circuits.all())));
    return;
  }
  const std::string wrong = try_setting(checks, target.text, value.text);
  if (!wrong.empty())
    checks.error(target.mark,
                 fmt::format("{}: cannot set {} to '{}': {}", label, target.text, value.text, wrong));
}

/// True if some value can be set there: the target exists.
bool can_vary(const Checks& checks, const std::string& target) {
  for (const std::string& form : {target, target + ".state", target + ".position"})
    for (const char* value : {"on", "1"})
      if (try_setting(checks, form, value).empty()) return true;
  return false;
}

}  // namespace

void check_stages(Checks& checks) {
  std::unordered_set<std::string> seen;
  for (const Stage& stage : checks.building.stages) {
    if (!stage.name.text.empty() && !seen.insert(stage.name.text).second)
      checks.error(stage.name.mark, fmt::format("two stages are called '{}'", stage.name.text));
    for (const auto& [target, value] : stage.set) check_set(checks, stage, target, value);
    for (const Name& gone : stage.remove)
      checks.known(checks.circuits, gone, fmt::format("stage '{}': remove", stage.name.text), "circuit");
  }
  for (const Name& target : checks.building.uncertainty.may_vary)
    if (!can_vary(checks, target.text))
      checks.error(target.mark, fmt::format("uncertainty: may_vary: there is no breaker, switch or load '{}'",
                                            target.text));
}

}  // namespace netlists
