// The command line: what the user asked for, done, with an exit status.
#pragma once

#include <vector>

namespace io {

/// Runs one command. Results go to standard output, messages and warnings to standard error.
/// 0: done. 1: done, but a limit given with --gate is broken. 2: the input or the command line is
/// wrong. 3: the computation failed, or its result could not be written.
int run_command_line(int argc, const char* const* argv);

}  // namespace io
