#pragma once
#include "cli/command_line.h"

namespace lagscape {

/// Runs the command of the line: results to stdout, progress and messages to stderr. Throws Error.
void run_command(const CommandLine& line);

}  // namespace lagscape
