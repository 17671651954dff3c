// What each command does, its options read already.
#pragma once

#include <stdexcept>
#include <string>

namespace io {

/// What the user gave is wrong: reported as it stands, exit status 2.
struct InputError : std::runtime_error {
  using std::runtime_error::runtime_error;
};

struct CommandOptions {
  std::string file;       // model or section
  std::string conductor;  // of explain
  std::string run;        // of section, with a model
  std::string entry;      // of catalogue; "" lists all
  std::string stage;      // "": the first, or as drawn
  std::string json;       // file, "-" for standard output, "" for none
  std::string csv;        // likewise
  std::string html;       // likewise
  std::string xlsx;       // likewise
  std::string svg;        // likewise
  std::string gate;       // "", "false_dead" or "misleading"
  unsigned seed = 1;
  std::string draws = "200";  // or "auto"
  int threads = 0;            // 0: as many as the machine has
  bool quiet = false;
};

/// Each returns the exit status, 0 or 1. Throws InputError for what the user can mend, anything else
/// for what failed.
int check_command(const CommandOptions& options);
int predict_command(const CommandOptions& options);
int explain_command(const CommandOptions& options);
int section_command(const CommandOptions& options);
int network_command(const CommandOptions& options);
int catalogue_command(const CommandOptions& options);

}  // namespace io
