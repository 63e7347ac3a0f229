#pragma once

namespace lagscape {

/// The whole program: parses the command line, runs the command, prints errors; returns the exit code.
/// Results go to stdout, progress and messages to stderr.
int run_app(int argc, char** argv);

}  // namespace lagscape
