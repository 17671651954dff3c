#include "io/command_line.h"

#include <fmt/format.h>

#include <CLI/CLI.hpp>
#include <functional>
#include <new>

#include "io/commands.h"
#include "io/text_layout.h"
#include "io/writers.h"
#include "netlists/fault.h"

namespace io {
namespace {

constexpr int k_most_draws = 100000;

struct Command {
  CLI::App* app = nullptr;
  std::function<int(const CommandOptions&)> run;
};

void add_quiet(CLI::App* app, CommandOptions& options) {
  app->add_flag("-q,--quiet", options.quiet, "No warnings on standard error");
}

void add_stage_and_seed(CLI::App* app, CommandOptions& options) {
  app->add_option("--stage", options.stage, "Stage of the works; the first if not given")->type_name("NAME");
  app->add_option("--seed", options.seed, "Of the layouts drawn; 1 if not given")->type_name("N");
}

/// A number of draws, or auto. Returns what is wrong, "" if nothing.
std::string draws_fault(const std::string& text) {
  const bool digits = !text.empty() && text.find_first_not_of("0123456789") == std::string::npos;
  if (text == "auto" || (digits && text.size() <= 6 && std::stoi(text) <= k_most_draws)) return "";
  return fmt::format("'{}' is not a number of draws; write a number up to {}, or auto", text, k_most_draws);
}

void add_draws(CLI::App* app, CommandOptions& options) {
  app->add_option(
         "--draws", options.draws,
         "Samples of all that is uncertain; auto: until the first twenty ranks stand; 200 if not given")
      ->check(draws_fault)
      ->type_name("N|auto");
  app->add_option("--threads", options.threads, "At work at once; as many as the machine has if not given")
      ->check(CLI::Range(1, 256))
      ->type_name("N");
}

void add_model(CLI::App* app, CommandOptions& options) {
  app->add_option("MODEL", options.file, "Model file, format idlewire/1")->required()->type_name("");
}

void add_json(CLI::App* app, CommandOptions& options, const char* what) {
  app->add_option("--json", options.json, what)->type_name("FILE");
}

/// The commands that are built, each with its options.
std::vector<Command> add_commands(CLI::App& app, CommandOptions& options) {
  CLI::App* check = app.add_subcommand("check", "Validate a model; list every problem and every default");
  add_model(check, options);

  CLI::App* predict = app.add_subcommand("predict", "Rank the conductors whose readings will mislead");
  add_model(predict, options);
  add_json(predict, options, "Also write the findings as JSON; - is standard output, without the table");
  predict
      ->add_option("--csv", options.csv,
                   "Also write one row a reading; - is standard output, without the table")
      ->type_name("FILE");
  predict
      ->add_option(
          "--html", options.html,
          "Also write the report, one page with all pictures; - is standard output, without the table")
      ->type_name("FILE");
  predict
      ->add_option("--xlsx", options.xlsx,
                   "Also write a workbook with the list and the test sheets; - is standard output")
      ->type_name("FILE");
  predict->add_option("--gate", options.gate, "Exit with 1 if such a conductor is ranked")
      ->check(CLI::IsMember({"false_dead", "misleading"}))
      ->type_name("KIND");

  CLI::App* explain = app.add_subcommand("explain", "Show one conductor in full");
  add_model(explain, options);
  explain->add_option("CONDUCTOR", options.conductor, "As in the table: CIRCUIT.wire or RUN.raceway")
      ->required()
      ->type_name("");

  CLI::App* section = app.add_subcommand("section", "The matrices and a drawing of one cross-section");
  section->add_option("FILE", options.file, "Section file, format idlewire-section/1; a model with --run")
      ->required()
      ->type_name("");
  section->add_option("--run", options.run, "Run of a model whose section to take")->type_name("RUN");
  section->add_option("--seed", options.seed, "Of the layout drawn, with --run; 1 if not given")
      ->type_name("N");
  add_json(section, options, "Also write the matrices as JSON; - is standard output, without the text");
  section->add_option("--svg", options.svg, "Also write a drawing to scale; - is standard output")
      ->type_name("FILE");

  CLI::App* network = app.add_subcommand("network", "Write the network that was solved, to solve it anew");
  add_model(network, options);
  add_json(network, options, "Where to; standard output if not given");

  CLI::App* catalogue = app.add_subcommand("catalogue", "What is known of cables, raceways, instruments");
  catalogue->add_option("NAME", options.entry, "An entry to show in full")->type_name("");

  for (CLI::App* one : {predict, explain, network}) add_stage_and_seed(one, options);
  for (CLI::App* one : {predict, explain}) add_draws(one, options);
  for (CLI::App* one : {check, predict, explain, section, network}) add_quiet(one, options);
  return {{check, check_command},     {predict, predict_command}, {explain, explain_command},
          {section, section_command}, {network, network_command}, {catalogue, catalogue_command}};
}

/// The first argument that is not an option, if it names no command: said with the nearest that is.
void require_known_command(int argc, const char* const* argv, const std::vector<Command>& commands) {
  std::vector<std::string> names;
  std::string list;
  for (const Command& command : commands) {
    names.push_back(command.app->get_name());
    list += (list.empty() ? "" : ", ") + names.back();
  }
  for (int k = 1; k < argc; ++k) {
    const std::string word = argv[k];
    if (word == "-h" || word == "--help" || word == "--version") return;
    if (!word.empty() && word[0] == '-')
      throw InputError(fmt::format("'{}' stands before a command; options follow the command", word));
    if (std::find(names.begin(), names.end(), word) != names.end()) return;
    const std::string near = netlists::nearest(word, names);
    throw InputError(near.empty() ? fmt::format("there is no command '{}'; the commands are {}", word, list)
                                  : fmt::format("there is no command '{}'; the nearest is '{}'", word, near));
  }
  throw InputError("a command is needed: " + list);
}

/// An argument that no command takes.
std::string unexpected(const CLI::App& app, const std::vector<Command>& commands) {
  const CLI::App* at = &app;
  for (const Command& command : commands)
    if (command.app->parsed()) at = command.app;
  std::string word = "?";
  for (const std::string& one : app.remaining(true)) word = word == "?" ? one : word;
  const std::string plain = word.substr(0, word.find('='));
  std::vector<std::string> known;
  for (const CLI::Option* option : at->get_options())
    for (const std::string& name : option->get_lnames()) known.push_back("--" + name);
  if (word.empty() || word[0] != '-') return fmt::format("'{}' is one argument too many", word);
  const std::string near = netlists::nearest(plain, known);
  std::string list;
  for (const std::string& name : known) list += (list.empty() ? "" : ", ") + name;
  return near.empty() ? fmt::format("there is no option '{}'; the options are {}", plain, list)
                      : fmt::format("there is no option '{}'; the nearest is '{}'", plain, near);
}

/// Parses and runs; what is wrong is thrown.
int parse_and_run(int argc, const char* const* argv) {
  CLI::App app("Predicts the voltages on de-energised building wiring, and says which readings will mislead.",
               "idlewire");
  app.set_version_flag("--version", "idlewire " IDLEWIRE_VERSION);
  app.require_subcommand(0, 1);
  app.footer(
      "Exit status: 0 done; 1 done, but a limit given with --gate is broken; 2 the input or the\n"
      "command line is wrong; 3 the computation failed.\n\n" +
      paragraph("", netlists::caution(), 90));
  CommandOptions options;
  const std::vector<Command> commands = add_commands(app, options);
  require_known_command(argc, argv, commands);
  try {
    app.parse(argc, argv);
  } catch (const CLI::CallForHelp&) {
    write_whole("-", app.help());
    return 0;
  } catch (const CLI::CallForVersion& version) {
    write_whole("-", std::string(version.what()) + "\n");
    return 0;
  } catch (const CLI::ExtrasError&) {
    throw InputError(unexpected(app, commands));
  } catch (const CLI::ParseError& error) {
    throw InputError(error.what());
  }
  if (app.got_subcommand("network") && options.json.empty()) options.json = "-";
  for (const Command& command : commands)
    if (command.app->parsed()) return command.run(options);
  throw InputError("a command is needed; see idlewire --help");
}

/// A message of one line gets the program's name; a list of faults speaks for itself.
void complain(const std::string& text) {
  if (text.find('\n') == std::string::npos)
    fmt::print(stderr, "idlewire: {}\n", text);
  else
    fmt::print(stderr, "{}", text);
}

}  // namespace

int run_command_line(int argc, const char* const* argv) {
  try {
    return parse_and_run(argc, argv);
  } catch (const InputError& error) {
    complain(error.what());
    return 2;
  } catch (const std::bad_alloc&) {
    complain("out of memory");
    return 3;
  } catch (const std::exception& error) {
    complain(error.what());
    return 3;
  }
}

}  // namespace io
