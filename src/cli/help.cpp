#include "cli/help.h"

#include <fmt/format.h>

#include "lagscape/base/text.h"
#include "lagscape/report/layout.h"

namespace lagscape {
namespace {

constexpr std::size_t kWidth = 80;
constexpr std::size_t kColumn = 24;

bool optional(const CLI::Option& option) { return option.get_expected_min() == 0; }
bool several(const CLI::Option& option) { return option.get_expected_max() > 1; }

std::string usage(const CLI::App& app) {
  std::string line = app.get_parent() == nullptr ? app.get_name() : "lagscape " + app.get_name();
  if (!app.get_subcommands({}).empty()) return line + " COMMAND [OPTIONS] ...";
  line += " [OPTIONS]";
  for (const CLI::Option* option : app.get_options([](const CLI::Option* o) { return o->get_positional(); })) {
    const std::string name = option->get_name(true) + (several(*option) ? "..." : "");
    line += optional(*option) ? fmt::format(" [{}]", name) : " " + name;
  }
  return line;
}

/// "-h, --help"
std::string names(const CLI::Option& option) {
  std::vector<std::string> all;
  for (const std::string& name : option.get_snames()) all.push_back("-" + name);
  for (const std::string& name : option.get_lnames()) all.push_back("--" + name);
  return join(all, ", ");
}

std::string group(const CLI::App& app, const std::string& name) {
  std::string out;
  for (const CLI::Option* option : app.get_options()) {
    if (option->get_positional() ? name != "Arguments" : option->get_group() != name) continue;
    std::string label = option->get_positional() ? option->get_name(true) : names(*option);
    if (!option->get_positional() && option->get_items_expected() > 0) label += " " + option->get_type_name();
    out += listed(label, option->get_description(), kColumn, kWidth);
  }
  return out.empty() ? out : fmt::format("\n{}:\n{}", name, out);
}

}  // namespace

std::string HelpFormatter::make_help(const CLI::App* app, std::string /*name*/, CLI::AppFormatMode /*mode*/) const {
  std::string out = fmt::format("{}\n\nUsage: {}\n", wrapped(app->get_description(), kWidth), usage(*app));
  const auto commands = app->get_subcommands({});
  if (!commands.empty()) out += "\nCommands:\n";
  for (const CLI::App* command : commands) out += listed(command->get_name(), command->get_description(), 12, kWidth);
  for (const char* name : {"Arguments", "Input", "Job", "Resources", "Output", "General", "Options"})
    out += group(*app, name);
  return out + "\n" + app->get_footer();
}

}  // namespace lagscape
