#pragma once
#include <cstddef>
#include <optional>
#include <string>
#include <vector>

namespace lagscape {

/// A command line, understood and checked.
struct CommandLine {
  std::string command;                 ///< "survey", "plan", "run", "explain", "forge"; "" when only `output` is wanted
  std::vector<std::string> arguments;  ///< files, jobs, or the words to explain
  std::vector<std::string> overrides;  ///< --set KEY=VALUE
  std::string sites, write_job;        ///< of survey
  int threads = 0;                     ///< 0: all
  std::size_t memory_bytes = 0;        ///< 0: automatic
  bool replace = false, quiet = false, json = false;
  std::optional<std::string> output;  ///< help or version: to be printed instead of running anything
};

/// Throws Error{usage}; unknown commands and options with the nearest name.
[[nodiscard]] CommandLine parse_command_line(int argc, const char* const* argv);

/// Names of all commands, in the order of help.
[[nodiscard]] std::vector<std::string> command_names();

/// What `COMMAND --help` prints, or nothing if there is no such command.
[[nodiscard]] std::optional<std::string> command_help(const std::string& name);

}  // namespace lagscape
