#include <csignal>

#include "io/command_line.h"

int main(int argc, char** argv) {
  // A reader that goes away is a failed write like any other, with a message and an exit status.
  std::signal(SIGPIPE, SIG_IGN);
  return io::run_command_line(argc, argv);
}
