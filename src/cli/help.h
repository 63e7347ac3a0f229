#pragma once
#include <CLI/CLI.hpp>
#include <string>

namespace lagscape {

/// Help of a command: purpose, usage, arguments, options by group, examples; at most 80 columns.
class HelpFormatter : public CLI::FormatterBase {
 public:
  [[nodiscard]] std::string make_help(const CLI::App* app, std::string name, CLI::AppFormatMode mode) const override;
};

}  // namespace lagscape
