#include <fmt/format.h>

#include <cmath>
#include <map>
#include <set>

#include "io/effects_text.h"
#include "io/findings_view.h"
#include "io/page_html.h"
#include "io/page_parts.h"
#include "io/text_layout.h"

namespace io {
namespace {
using netlists::Building;
using netlists::Findings;

/// Catalogue entries that the model uses, with the published sources of their values.
class Used {
 public:
  template <class Entries>
  void take(const char* kind, const Entries& entries, const std::string& name) {
    const auto found = entries.find(name);
    if (found != entries.end()) sources_[{kind, name}] = found->second.source;
  }

  std::string table() const {
    HtmlTable out("Values taken from the catalogue, and where they are published",
                  {{"entry"}, {"kind"}, {"source"}});
    for (const auto& [entry, source] : sources_)
      out.add({html(entry.second), entry.first, source.empty() ? "not given" : html(source)});
    return out.empty() ? "" : scroll_box("Sources", out.text());
  }

 private:
  std::map<std::pair<std::string, std::string>, std::string> sources_;
};

Used used_by(const Building& building) {
  const auto& catalogue = building.catalogue;
  Used used;
  for (const auto& supply : building.supplies)
    used.take("supply system", catalogue.systems, supply.system.text);
  for (const auto& run : building.runs) used.take("raceway", catalogue.raceways, run.raceway.text);
  for (const auto& panel : building.panels) {
    if (!panel.feeder) continue;
    for (const auto& wire : panel.feeder->wires) used.take("wire", catalogue.wires, wire.type);
  }
  for (const auto& circuit : building.circuits) {
    if (circuit.cable) used.take("cable", catalogue.cables, circuit.cable->text);
    for (const auto& wire : circuit.wires) used.take("wire", catalogue.wires, wire.type);
    if (!circuit.loads) continue;
    for (const auto& load : *circuit.loads) used.take("load", catalogue.loads, load.kind);
  }
  return used;
}

std::string instruments(const Findings& findings) {
  HtmlTable table("Instruments of the model",
                  {{"name"}, {"what"}, {"resistance", true}, {"capacitance", true}, {"source"}});
  for (const auto& instrument : findings.instruments) {
    std::string resistance = ohms_text(instrument.resistance);
    if (!instrument.ranges.empty()) {
      resistance.clear();
      for (const auto& range : instrument.ranges)
        resistance += fmt::format("{}{} on {}", resistance.empty() ? "" : ", ", ohms_text(range.resistance),
                                  volts_text(range.full_scale));
    }
    table.add({html(instrument.name), html(instrument.label), resistance,
               fmt::format("{:.3g} pF", instrument.capacitance * 1e12), html(instrument.source)});
  }
  return table.empty() ? "" : scroll_box("Instruments", table.text());
}

// Method and sources in short; engine/README.md and netlists/README.md have them in full.
constexpr const char* k_method =
    "<h3>Method</h3>\n"
    "<p>Every wire, metal raceway and armour is a conductor of one coupled network. Each run is laid out at "
    "random as "
    "pulling leaves it, from a seed, as often as its length holds a stretch between changes of place, at "
    "most 16 times; "
    "its matrices are the mean.</p>\n"
    "<ul><li><b>Capacitance</b> of a section, insulation included: outgoing and incoming circular harmonics "
    "on every "
    "circle, images in planes and round metal walls, to a stated tolerance (Clements, Paul and Adams, IEEE "
    "Trans. "
    "Electromagnetic Compatibility, 1975; Paul, Analysis of Multiconductor Transmission Lines, 2007).\n"
    "<li><b>Series impedance</b>: Bessel functions inside a wire, geometric mean distances outside, "
    "Schelkunoff's tube, "
    "Carson's earth return (Bell System Technical Journal, 1926).\n"
    "<li><b>The network</b>: runs become pi sections of full coupled matrices; what hangs together by metal "
    "is an "
    "island with one unknown level, so that nanosiemens of coupling and kilosiemens of copper never meet in "
    "one sum; "
    "solved by sparse factors and refined.\n"
    "<li><b>Readings</b>: the open-circuit voltage behind the source impedance between two points "
    "(Thevenin), loaded by "
    "each instrument's resistance and capacitance, of the range a person settles on.\n"
    "<li><b>Who puts it there</b>: each fed or grounded conductor is held at its solved voltages and "
    "currents alone, all "
    "others at nothing; the contributions sum to the voltage.\n"
    "<li><b>Condition</b>: decided by wires, closed contacts, bonds, windings and loads, never by coupling. "
    "<b>Misleading</b>: an instrument's reading to ground or to the own neutral contradicts the condition.\n"
    "<li><b>What settles it</b>: the weakest source a person feels is U behind U / 0.5 mA (IEC 60479-1); an "
    "instrument of "
    "resistance R shows U R / (R + U / 0.5 mA) of it. Coupling must lie well below that.\n"
    "<li><b>Currents through people</b>: the body network of IEC 60990, figure 3; zones of IEC "
    "60479-1.</ul>\n";

std::string recompute(const Findings& findings, const Building& building) {
  return fmt::format(
      "<h3>How to recompute</h3>\n<p>This page is of the model file with the SHA-256 <code "
      "class=hash>{}</code>, stage "
      "{}, seed {}, by idlewire {}. Whoever has the model gets the same figures with</p>\n<pre>idlewire "
      "predict {} "
      "--stage '{}' --seed {} --html report.html --json findings.json\nidlewire network {} --stage '{}' "
      "--seed {} --json "
      "network.json</pre>\n<p>The second command writes the whole network that was solved, in SI units: "
      "every line with "
      "its matrices a metre, every element and source, and the solution. Anyone can solve it anew, with any "
      "solver of "
      "linear equations, and needs nothing of this program: each line is a chain of equal pi sections, each "
      "source a "
      "voltage behind its impedance. Here currents balance at every node within {:.1e} of what flows "
      "there.</p>\n",
      html(findings.model_sha256), html(findings.stage.empty() ? "as drawn" : findings.stage), findings.seed,
      html(findings.program_version), html(building.file), html(findings.stage), findings.seed,
      html(building.file), html(findings.stage), findings.seed, findings.residual);
}

/// Effects that hurt people, or all others that happen or come near it.
std::vector<std::string> effect_lines(const Findings& findings, bool hurting) {
  constexpr std::size_t k_most = 60;
  std::vector<std::string> lines;
  for (const auto& effect : findings.effects) {
    const bool hurts = effect.what == "person_feels" && effect.happens;
    const bool near = effect.happens || effect.value >= 0.2 * effect.threshold;
    if (hurts == hurting && near && lines.size() < k_most)
      lines.push_back(effect_in_words(effect) + ". Threshold: " + effect.source + ".");
  }
  return lines;
}

std::string listed(const char* title, const std::vector<std::string>& lines) {
  return lines.empty() ? "" : std::string("<h3>") + title + "</h3>\n" + html_list(lines);
}

}  // namespace

std::string page_hurting(const Findings& findings) {
  const std::vector<std::string> lines = effect_lines(findings, true);
  if (lines.empty()) return "";
  return "<section id=hurts aria-labelledby=hurts-h><h2 id=hurts-h>Current that can hurt</h2>\n" +
         html_list(lines) + "</section>\n";
}

std::string page_effects(const Findings& findings) {
  const std::vector<std::string> others = effect_lines(findings, false);
  std::vector<std::string> patterns;
  for (const auto& pattern : findings.patterns)
    patterns.push_back(fmt::format("{} at {}, {}: lit {}: {}. L-N {}, L-G {}, N-G {}.", pattern.instrument,
                                   pattern.place, pattern.circuit, pattern.lit, pattern.meaning,
                                   volts_text(pattern.hot_neutral), volts_text(pattern.hot_ground),
                                   volts_text(pattern.neutral_ground)));
  if (others.empty() && patterns.empty()) return "";
  return "<section id=currents aria-labelledby=currents-h><h2 id=currents-h>What coupled current "
         "does</h2>\n" +
         listed("Loads, devices and touch", others) +
         listed("Lamps of receptacle testers; no pattern proves anything dead", patterns) + "</section>\n";
}

std::string page_appendix(const PageModel& model) {
  const Findings& findings = model.findings;
  std::string out = "<section id=appendix aria-labelledby=appendix-h><h2 id=appendix-h>Appendix</h2>\n";
  out += listed("Warnings", findings.warnings);
  out += "<h3 id=states>Breakers and switches as assumed</h3>\n<p>" + html(states_in_words(findings)) +
         ".</p>\n";
  out += listed("Assumptions and defaults in force", findings.assumptions);
  out += "<h3>Instruments and sources</h3>\n" + instruments(findings) + used_by(model.building).table();
  return out + k_method + recompute(findings, model.building) + "</section>\n";
}

}  // namespace io
