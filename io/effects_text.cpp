#include "io/effects_text.h"

#include <fmt/format.h>

#include "io/text_layout.h"

namespace io {
namespace {
using netlists::Effect;
using netlists::Findings;

constexpr double k_near = 0.2;  // of the threshold: what lies below is not worth a line

bool hurts(const Effect& effect) { return effect.what == "person_feels" && effect.happens; }

std::string in_words(const Effect& effect) {
  if (effect.what == "person_feels")
    return effect.happens ? "a person feels it" : "below what a person feels";
  if (effect.what == "lamp_glows") return effect.happens ? "lamp may glow" : "lamp stays dark";
  if (effect.what == "input_reads_on") return effect.happens ? "input may read on" : "input reads off";
  if (effect.what == "coil_stays_in") return effect.happens ? "coil may stay in" : "coil drops out";
  if (effect.what == "coil_pulls_in") return effect.happens ? "coil may pull in" : "coil does not pull in";
  if (effect.what == "device_trips") return effect.happens ? "device may trip" : "device holds";
  if (effect.what == "alarm_sounds") return effect.happens ? "alarm may sound" : "alarm stays silent";
  return effect.what;
}

std::string amount(double value, const std::string& unit) {
  return unit == "A" ? amperes_text(value) : volts_text(value);
}

std::string line(const Effect& effect, int width) {
  return paragraph("  ", effect_in_words(effect) + ". Threshold: " + printable(effect.source) + ".", width,
                   4);
}

}  // namespace

std::string effect_in_words(const Effect& effect) {
  const std::string value = amount(effect.value, effect.unit);
  const std::string threshold = amount(effect.threshold, effect.unit);
  std::string text = effect.what == "person_feels"
                         ? fmt::format("{}: {} through a person ({} is felt): {}", printable(effect.where),
                                       value, threshold, printable(effect.subject))
                         : fmt::format("{}, {}: {}: {}, from {} on it may", printable(effect.where),
                                       printable(effect.subject), in_words(effect), value, threshold);
  // What a load conducts needs no length to speak of.
  if (effect.run_length && *effect.run_length < 0.1)
    text += "; at any length";
  else if (effect.run_length)
    text += fmt::format("; reached at a run of {:.3g} m", *effect.run_length);
  return text;
}

std::string hurting_text(const Findings& findings, int width) {
  std::string out;
  for (const Effect& effect : findings.effects)
    if (hurts(effect)) out += line(effect, width);
  return out.empty() ? "" : "\n" + paragraph("", "CURRENT THAT CAN HURT", width) + out;
}

std::string effects_text(const Findings& findings, int width, const std::string& place, int most) {
  std::string out;
  int left_out = 0;
  for (const Effect& effect : findings.effects) {
    const bool here =
        place.empty() ? !hurts(effect) && effect.value >= k_near * effect.threshold : effect.where == place;
    if (!here) continue;
    if (most-- > 0)
      out += line(effect, width);
    else
      ++left_out;
  }
  if (out.empty()) return "";
  if (left_out > 0) out += paragraph("  ", fmt::format("and {} more, in the JSON output.", left_out), width);
  return "\n" +
         paragraph(
             "",
             place.empty() ? "What coupled current does" : "What coupled current does at " + printable(place),
             width) +
         out;
}

std::string patterns_text(const Findings& findings, int width) {
  std::string out;
  for (const netlists::ReceptaclePattern& pattern : findings.patterns)
    out += paragraph(
        "  ",
        fmt::format("{} at {}, {}: lit {}: {}. L-N {}, L-G {}, N-G {}.", printable(pattern.instrument),
                    printable(pattern.place), printable(pattern.circuit), pattern.lit, pattern.meaning,
                    volts_text(pattern.hot_neutral), volts_text(pattern.hot_ground),
                    volts_text(pattern.neutral_ground)),
        width, 4);
  if (out.empty()) return "";
  return "\n" + paragraph("", "Lamps of receptacle testers; no pattern proves anything dead", width) + out;
}

}  // namespace io
