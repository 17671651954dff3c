#include "io/commands.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <cstdio>

#include "engine/solve.h"
#include "io/catalogue_file.h"
#include "io/catalogue_text.h"
#include "io/check_report.h"
#include "io/findings_xlsx.h"
#include "io/page.h"
#include "io/progress.h"
#include "io/section_file.h"
#include "io/terminal.h"
#include "io/text_layout.h"
#include "io/writers.h"
#include "netlists/lower.h"
#include "netlists/predict.h"

namespace io {
namespace {
using netlists::Building;
using netlists::Findings;

void say(const std::string& text) {
  if (!text.empty()) fmt::print(stderr, "{}", text);
}

/// Where results go is looked at before anything is computed.
void require_writable(const CommandOptions& options) {
  int to_standard_output = 0;
  for (const std::string& path : {options.json, options.csv, options.html, options.xlsx, options.svg}) {
    const std::string why = path.empty() ? "" : unwritable(path);
    if (!why.empty()) throw InputError(why);
    if (path == "-") ++to_standard_output;
  }
  if (to_standard_output > 1) throw InputError("only one result can go to standard output");
}

/// The model, or all of its errors; its warnings are said aloud.
Building read_building(const CommandOptions& options) {
  ModelFile file = check_model(options.file);
  const std::string report = fault_report(file.faults);
  if (netlists::any_error(file.faults)) throw InputError(report);
  if (!options.quiet) say(report);
  return std::move(file.building);
}

std::string unknown(const std::string& what, const std::string& name, const std::vector<std::string>& there) {
  const std::string near = netlists::nearest(name, there);
  std::string list;
  for (const std::string& one : there) list += (list.empty() ? "'" : ", '") + one + "'";
  if (!near.empty()) return fmt::format("the model has no {} '{}'; the nearest is '{}'", what, name, near);
  return fmt::format("the model has no {} '{}'; it has {}", what, name, list.empty() ? "none" : list);
}

void require_stage(const Building& building, const std::string& stage) {
  std::vector<std::string> there;
  for (const auto& one : building.stages) there.push_back(one.name.text);
  if (!stage.empty() && std::find(there.begin(), there.end(), stage) == there.end())
    throw InputError(unknown("stage", stage, there));
}

/// What the engine refuses here was asked for by the model: too much in a raceway, things that overlap.
netlists::Lowered lowered(const Building& building, const CommandOptions& options) {
  require_stage(building, options.stage);
  try {
    return netlists::lower(building, options.stage, options.seed);
  } catch (const std::invalid_argument& error) {
    throw InputError(fmt::format("{}: error: {}", building.file, error.what()));
  }
}

engine::SolvedNetwork solved(const netlists::Lowered& lowered) {
  engine::SolvedNetwork network(lowered.network);
  netlists::require_solved(network.residual());
  return network;
}

/// The bar that shows how far slow work has come, while it lives.
Progress progress_of(const CommandOptions& options) {
  return Progress(messages_on_terminal() && !options.quiet, message_width());
}

netlists::PredictOptions predict_options(const CommandOptions& options) {
  netlists::PredictOptions out;
  out.stage = options.stage;
  out.seed = options.seed;
  out.until_stable = options.draws == "auto";
  out.draws = out.until_stable ? 0 : std::stoi(options.draws);
  out.threads = options.threads;
  out.explain = options.conductor;
  return out;
}

netlists::Predicted predicted(const CommandOptions& options) {
  const Building building = read_building(options);
  require_stage(building, options.stage);
  const Progress progress = progress_of(options);
  try {
    netlists::Predicted out = netlists::predict(building, predict_options(options));
    out.findings.program_version = IDLEWIRE_VERSION;
    return out;
  } catch (const std::invalid_argument& error) {
    throw InputError(fmt::format("{}: error: {}", building.file, error.what()));
  }
}

void say_warnings(const std::vector<std::string>& warnings, const CommandOptions& options) {
  if (options.quiet) return;
  for (const std::string& warning : warnings) say("warning: " + printable(warning) + "\n");
}

/// 1 where the gate is broken, with the conductors that break it.
int gate(const Findings& findings, const CommandOptions& options) {
  if (options.gate.empty()) return 0;
  std::string broken;
  for (const auto& conductor : findings.conductors) {
    const bool counts = conductor.misleads == netlists::Misleads::false_dead ||
                        (options.gate == "misleading" && conductor.misleads != netlists::Misleads::no);
    if (counts) broken += (broken.empty() ? "" : ", ") + printable(conductor.id);
  }
  if (broken.empty()) return 0;
  say(fmt::format("idlewire: gate {} is broken by {}\n", options.gate, broken));
  return 1;
}

struct SectionToShow {
  engine::CrossSection section;
  engine::ImpedanceConditions conditions;
  std::vector<std::string> names;  // by number
  std::string reference;
  std::vector<std::string> materials;
};

SectionToShow section_of_run(const CommandOptions& options) {
  const Building building = read_building(options);
  std::vector<std::string> runs;
  for (const auto& run : building.runs) runs.push_back(run.name.text);
  if (std::find(runs.begin(), runs.end(), options.run) == runs.end())
    throw InputError(unknown("run", options.run, runs));
  const netlists::RunSection run = netlists::run_section(building, options.run, options.seed);
  const bool plane = run.section.surroundings == engine::Surroundings::plane;
  return {run.section,
          {building.frequency, building.temperature, building.earth_resistivity},
          run.names,
          plane ? "plane" : "enclosure",
          {}};
}

SectionToShow section_of_file(const CommandOptions& options) {
  const SectionFile file = read_section(options.file, builtin_catalogue());
  for (const netlists::Fault& fault : file.faults)
    if (fault.what.find("'idlewire/1'") != std::string::npos)
      throw InputError(options.file + " is a model; name one of its runs with --run");
  const std::string report = fault_report(file.faults);
  if (netlists::any_error(file.faults)) throw InputError(report);
  if (!options.quiet) say(report);
  return {file.section, file.conditions, file.names, file.reference, file.materials};
}

/// The names of the matrices' rows: all but the reference of an open section.
std::vector<std::string> row_names(const SectionToShow& shown) {
  std::vector<std::string> names = shown.names;
  if (shown.section.surroundings == engine::Surroundings::open)
    names.erase(names.begin() + shown.section.reference);
  return names;
}

}  // namespace

int check_command(const CommandOptions& options) {
  const Building building = read_building(options);
  const netlists::Lowered network = lowered(building, options);
  say_warnings(network.warnings, options);
  std::vector<std::string> further;
  for (const std::string& line : network.assumptions)
    if (std::find(building.defaults.begin(), building.defaults.end(), line) == building.defaults.end())
      further.push_back(line);
  write_whole("-", check_report(building, further));
  return 0;
}

int predict_command(const CommandOptions& options) {
  require_writable(options);
  const netlists::Predicted all = predicted(options);
  const Findings& findings = all.findings;
  const PageModel page{findings, all.building, all.network, today()};
  if (!options.html.empty()) write_whole(options.html, report_page(page));
  if (!options.xlsx.empty()) write_whole(options.xlsx, findings_xlsx(page));
  if (!options.json.empty()) write_whole(options.json, findings_json(findings));
  if (!options.csv.empty()) write_whole(options.csv, findings_csv(findings));
  const bool table = options.json != "-" && options.csv != "-" && options.html != "-" && options.xlsx != "-";
  if (!table)
    say_warnings(findings.warnings, options);
  else
    write_whole("-", ranked_table(findings, output_width(), output_colour(), today()));
  return gate(findings, options);
}

int explain_command(const CommandOptions& options) {
  const Findings findings = predicted(options).findings;
  std::string text;
  try {
    text = explanation(findings, options.conductor, output_width(), today());
  } catch (const std::invalid_argument& error) {
    throw InputError(error.what());
  }
  write_whole("-", text);
  return 0;
}

int section_command(const CommandOptions& options) {
  require_writable(options);
  engine::FieldMatrices field;
  Eigen::MatrixXcd impedance;
  SectionToShow shown;
  try {
    shown = options.run.empty() ? section_of_file(options) : section_of_run(options);
    field = engine::field_matrices(shown.section);
    impedance = engine::series_impedance(shown.section, shown.conditions);
  } catch (const std::invalid_argument& error) {
    throw InputError(fmt::format("{}: error: {}", options.file, error.what()));
  }
  const double frequency = shown.conditions.frequency;
  const std::vector<std::string> names = row_names(shown);
  if (!options.svg.empty()) write_whole(options.svg, section_svg(shown.section, shown.names));
  if (!options.json.empty())
    write_whole(options.json,
                section_json(field, impedance, frequency, names, shown.reference, shown.materials));
  if (options.json != "-" && options.svg != "-")
    write_whole("-", section_text(field, impedance, frequency, names, shown.reference, shown.materials));
  return 0;
}

int network_command(const CommandOptions& options) {
  require_writable(options);
  const Building building = read_building(options);
  const netlists::Lowered network = lowered(building, options);
  const engine::SolvedNetwork solution = solved(network);
  say_warnings(network.warnings, options);
  write_whole(options.json, network_json(network, solution));
  return 0;
}

int catalogue_command(const CommandOptions& options) {
  std::string text;
  try {
    text = options.entry.empty() ? catalogue_list(builtin_catalogue(), output_width())
                                 : catalogue_entry(builtin_catalogue(), options.entry, output_width());
  } catch (const std::invalid_argument& error) {
    throw InputError(error.what());
  }
  write_whole("-", text);
  return 0;
}

}  // namespace io
