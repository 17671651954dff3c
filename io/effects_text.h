// What coupled current does, in lines for people.
#pragma once

#include <string>

#include "netlists/findings.h"

namespace io {

/// One effect in words, without its threshold's source and the full stop: "JB-6: 0.23 mA through ...".
std::string effect_in_words(const netlists::Effect& effect);

/// Currents that people feel, under a heading of their own; "" where there are none.
std::string hurting_text(const netlists::Findings& findings, int width);

/// The other effects: those that happen, then the nearest to happening. `place` "" takes all of the model,
/// at most `most` of them with the number left out; otherwise those at that place.
std::string effects_text(const netlists::Findings& findings, int width, const std::string& place, int most);

/// What receptacle testers of three lamps show; "" where the model lists none.
std::string patterns_text(const netlists::Findings& findings, int width);

}  // namespace io
