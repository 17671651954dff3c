#include "netlists/findings.h"

#include <stdexcept>

namespace netlists {

std::string to_string(Condition condition) {
  switch (condition) {
    case Condition::grounded:
      return "grounded";
    case Condition::energised:
      return "energised";
    case Condition::through_load:
      return "through_load";
    case Condition::grounded_through_load:
      return "grounded_through_load";
    case Condition::floating:
      return "floating";
  }
  throw std::logic_error("a condition without a name");
}

std::string to_string(Appearance appearance) {
  switch (appearance) {
    case Appearance::live_like:
      return "live_like";
    case Appearance::unclear:
      return "unclear";
    case Appearance::dead_like:
      return "dead_like";
  }
  throw std::logic_error("an appearance without a name");
}

std::string to_string(Misleads misleads) {
  switch (misleads) {
    case Misleads::no:
      return "no";
    case Misleads::false_dead:
      return "false_dead";
    case Misleads::false_live:
      return "false_live";
  }
  throw std::logic_error("a way of misleading without a name");
}

const std::string& caution() {
  static const std::string text =
      "A prediction is not a test. Treat every conductor as live until proved dead with a proper, proven "
      "instrument. Local codes and a licensed person decide. Isolated systems can read nothing to ground and "
      "be live; while one leg is loaded to ground, by a meter or a person, the other leg is at full voltage "
      "to ground.";
  return text;
}

}  // namespace netlists
