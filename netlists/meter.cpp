#include "netlists/meter.h"

#include <algorithm>

namespace netlists {

void Meter::begin(const char* stage, int total) {
  total_ = 0;
  done_ = 0;
  stage_ = stage;
  total_ = total;
}

Meter::State Meter::state() const {
  const int total = total_;
  const int done = done_;
  return {stage_, total > 0 ? std::clamp(done, 0, total) : done, total};
}

Meter& meter() {
  static Meter one;
  return one;
}

}  // namespace netlists
