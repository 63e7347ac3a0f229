#include "cli/command_line.h"

#include <fmt/format.h>

#include <CLI/CLI.hpp>
#include <algorithm>
#include <memory>
#include <span>
#include <string_view>

#include "cli/help.h"
#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/io/library.h"
#include "lagscape/pipeline/run.h"
#include "lagscape/version.h"

namespace lagscape {
namespace {

constexpr int kMostThreads = 1024;

std::string version_text() {
  return fmt::format("lagscape {}\n  compiler  {}, build type {}\n  netCDF    {}\n  threads   {} can be used here\n",
                     LAGSCAPE_VERSION, LAGSCAPE_COMPILER, LAGSCAPE_BUILD_TYPE, netcdf_library_version(),
                     usable_cores());
}

/// Options as texts; they are checked after parsing, so that messages are our own.
struct RawOptions {
  std::string threads, memory;
};

/// Declares the commands; the parsed values land in `line` and `raw`.
class Commands {
 public:
  Commands(CommandLine& line, RawOptions& raw) : line_(line), raw_(raw) {
    app_.name("lagscape");
    app_.formatter(std::make_shared<HelpFormatter>());
    app_.description("Maps of memory, effective sample size and trend from archives of time series.");
    app_.set_help_flag("-h,--help", "show this help");
    app_.add_flag("--version", version_, "show version, compiler, netCDF library and usable threads");
    app_.allow_extras();
    app_.require_subcommand(0, 1);  // later words are arguments, even if a command has the same name
    app_.footer(
        "Examples:\n"
        "  lagscape survey sample_grids/harrow_soil_wetness_*.nc\n"
        "  lagscape run jobs/harrow_soil_wetness.toml --replace\n\n"
        "'lagscape COMMAND --help' tells more about a command, 'lagscape explain' about\n"
        "maps, job keys and methods.\n");
    survey();
    plan();
    run();
    explain();
    forge();
  }
  CLI::App& app() { return app_; }
  [[nodiscard]] bool version() const { return version_; }

 private:
  CLI::App* command(const std::string& name, const std::string& description, const std::string& examples) {
    CLI::App* sub = app_.add_subcommand(name, description);
    sub->set_help_flag("-h,--help", "show this help")->group("General");
    sub->footer("Examples:\n" + examples);
    sub->allow_extras();
    return sub;
  }
  void arguments(CLI::App* sub, const std::string& label, const std::string& help, bool several, bool required = true) {
    CLI::Option* option = sub->add_option(label, line_.arguments, help);
    option->expected(required ? 1 : 0, several ? 1 << 20 : 1);
    if (required) option->required();
  }
  void set_option(CLI::App* sub, const std::string& what, const std::string& example) {
    sub->add_option(
           "--set", line_.overrides,
           fmt::format("override a key of the {}, such as {}; may be repeated; paths are relative to the shell", what,
                       example))
        ->type_name("KEY=VALUE")
        ->expected(1)
        ->allow_extra_args(false)
        ->multi_option_policy(CLI::MultiOptionPolicy::TakeAll)
        ->group("Job");
  }
  void resources(CLI::App* sub) {
    sub->add_option("--threads", raw_.threads,
                    fmt::format("threads to use, 1 to {} (default: every core allowed)", kMostThreads))
        ->type_name("N")
        ->group("Resources");
    sub->add_option("--memory", raw_.memory,
                    "most memory to use, such as 500MB or 4GiB (default: 60 % of what is free)")
        ->type_name("SIZE")
        ->group("Resources");
  }
  void replace(CLI::App* sub, const std::string& what) {
    sub->add_flag("--replace", line_.replace, fmt::format("allow {} to be replaced (default: refuse)", what))
        ->group("Output");
  }
  void quiet(CLI::App* sub, const std::string& what) {
    sub->add_flag("--quiet", line_.quiet, fmt::format("no {} on stderr, only warnings and errors", what))
        ->group("Output");
  }
  void json(CLI::App* sub, const std::string& what) {
    sub->add_flag("--json", line_.json,
                  fmt::format("print the {} as JSON (default: text); errors stay text on stderr", what))
        ->group("Output");
  }
  void survey();
  void plan();
  void run();
  void explain();
  void forge();

  CLI::App app_;
  CommandLine& line_;
  RawOptions& raw_;
  bool version_ = false;
};

void Commands::survey() {
  CLI::App* sub =
      command("survey", "Says what is in files: variables, time axis, grid or sites, gaps, storage, quirks.",
              "  lagscape survey sample_grids/harrow_soil_wetness_*.nc\n"
              "  lagscape survey sample_grids/harrow_soil_wetness_*.nc --write-job wet.toml\n");
  arguments(sub, "FILE", "files of one archive (NetCDF or CSV), together", true);
  sub->add_option("--sites", line_.sites, "CSV file with names and coordinates of the sites of a CSV panel")
      ->type_name("FILE")
      ->group("Input");
  sub->add_option("--write-job", line_.write_job, "also write a commented job to start from")
      ->type_name("JOB.toml")
      ->group("Output");
  replace(sub, "an existing job file");
  quiet(sub, "notes");
  json(sub, "survey");
}

void Commands::plan() {
  CLI::App* sub = command("plan", "Says everything a run would do, without reading the data.",
                          "  lagscape plan jobs/harrow_soil_wetness.toml\n"
                          "  lagscape plan jobs/harrow_soil_wetness.toml --set memory.max_lag=P5Y --json\n");
  arguments(sub, "JOB.toml", "job files", true);
  set_option(sub, "job", "field.rate=0.05");
  resources(sub);
  replace(sub, "an existing result");
  quiet(sub, "notes");
  json(sub, "plan");
}

void Commands::run() {
  CLI::App* sub = command("run", "Runs jobs: reads the archive, writes the maps to NetCDF, prints a summary.",
                          "  lagscape run jobs/harrow_soil_wetness.toml --replace\n"
                          "  lagscape run jobs/harrow_soil_wetness.toml --set field.rate=0.05 \\\n"
                          "      --set output.file=strict.nc --threads 2 --quiet\n");
  arguments(sub, "JOB.toml", "job files; all are checked before the first is run", true);
  set_option(sub, "job", "field.rate=0.05");
  resources(sub);
  replace(sub, "an existing result");
  quiet(sub, "progress or notes");
  json(sub, "summary");
}

void Commands::explain() {
  CLI::App* sub = command("explain", "Says what a map, status, job key, trend test or method means, with its source.",
                          "  lagscape explain\n"
                          "  lagscape explain decorrelation_time\n"
                          "  lagscape explain prepare.min_share field.rate\n"
                          "  lagscape explain plan\n");
  arguments(sub, "WORD", "what to explain; a command shows its help (default: list all words)", true, false);
}

void Commands::forge() {
  CLI::App* sub = command("forge", "Makes a grid or panel whose memory and trend are known, and maps of that truth.",
                          "  lagscape forge jobs/forge_harrow_soil_wetness.toml --set output.folder=forged\n");
  arguments(sub, "RECIPE.toml", "recipe to follow", false);
  set_option(sub, "recipe", "seed=2 or 'patch[0].ar=[0.7]'");
  replace(sub, "existing files");
  quiet(sub, "notes");
}

/// What is said about a number of arguments or values that does not fit; CLI11 has noticed, we look up what it was.
std::string mismatch_words(const CLI::App& sub, const std::string& noticed) {
  for (const CLI::Option* option : sub.get_options()) {
    const std::string name = option->get_name();
    const auto most = static_cast<std::size_t>(option->get_expected_max());
    if (option->get_positional() && option->get_required() && option->count() == 0) {
      return fmt::format("{}: {} is missing", sub.get_name(), name);
    }
    if (option->get_positional() && option->count() > most) {
      return fmt::format("{}: '{}' is one argument too many", sub.get_name(), option->results()[most]);
    }
    if (!option->get_positional() && option->count() > most && name != "--set") {
      return fmt::format("{}: {} is given more than once", sub.get_name(), name);
    }
  }
  return fmt::format("{}: {} needs a value", sub.get_name(), noticed.substr(0, noticed.find(':')));
}

/// What does not belong on the command line: the first such word, with the nearest name.
[[noreturn]] void refuse_extra(const CLI::App& top, const CLI::App* sub, const std::string& word) {
  const std::string help =
      fmt::format("'lagscape {}--help' lists what there is", sub != nullptr ? sub->get_name() + " " : "");
  const CLI::App& app = sub != nullptr ? *sub : top;
  if (word.size() > 1 && word.front() == '-') {
    std::vector<std::string> names;
    for (const CLI::Option* option : app.get_options()) {
      for (const std::string& name : option->get_lnames()) names.push_back("--" + name);
    }
    const std::string name = word.substr(0, word.find('='));
    throw Error(ErrorKind::usage, fmt::format("unknown option '{}'{}", name, did_you_mean(name, names)), "", help);
  }
  if (sub == nullptr) {
    throw Error(ErrorKind::usage, fmt::format("unknown command '{}'{}", word, did_you_mean(word, command_names())), "",
                help);
  }
  throw Error(ErrorKind::usage, fmt::format("'{}' is one argument too many for {}", word, sub->get_name()), "", help);
}

void check(const RawOptions& raw, CommandLine& line) {
  if (!raw.threads.empty()) {
    const auto value = to_number(raw.threads);
    if (!value || *value < 1 || *value > kMostThreads || *value != static_cast<int>(*value)) {
      throw Error(ErrorKind::usage,
                  fmt::format("--threads: found '{}', expected a whole number from 1 to {}", raw.threads, kMostThreads),
                  "", "leave --threads out to use every core");
    }
    line.threads = static_cast<int>(*value);
  }
  if (!raw.memory.empty()) {
    const auto bytes = parse_bytes(raw.memory);
    if (!bytes) {
      throw Error(ErrorKind::usage,
                  fmt::format("--memory: found '{}', expected a size such as 500MB or 4GiB", raw.memory), "",
                  "leave --memory out to use 60 % of what is free");
    }
    line.memory_bytes = *bytes;
  }
  for (const std::string& option : line.overrides) {
    const std::size_t equals = option.find('=');
    if (equals == std::string::npos || trim(option.substr(0, equals)).empty()) {
      throw Error(ErrorKind::usage, fmt::format("--set: found '{}', expected KEY=VALUE", option), "",
                  "write it like --set field.rate=0.05");
    }
  }
}

}  // namespace

std::vector<std::string> command_names() {
  CommandLine line;
  RawOptions raw;
  Commands commands(line, raw);
  std::vector<std::string> names;
  for (const CLI::App* sub : commands.app().get_subcommands({})) names.push_back(sub->get_name());
  return names;
}

std::optional<std::string> command_help(const std::string& name) {
  CommandLine line;
  RawOptions raw;
  Commands commands(line, raw);
  for (const CLI::App* sub : commands.app().get_subcommands({})) {
    if (sub->get_name() == name) return sub->help();
  }
  return std::nullopt;
}

CommandLine parse_command_line(int argc, const char* const* argv) {
  CommandLine line;
  RawOptions raw;
  Commands commands(line, raw);
  CLI::App& app = commands.app();
  std::optional<std::string> wrong;
  try {
    app.parse(argc, argv);
  } catch (const CLI::CallForHelp&) {
    const auto chosen = app.get_subcommands();
    line.output = chosen.empty() ? app.help() : chosen.front()->help();
    return line;
  } catch (const CLI::ParseError& error) {
    wrong = error.what();
  }
  if (commands.version()) {
    line.output = version_text();
    return line;
  }
  const auto chosen = app.get_subcommands();
  if (const auto extra = app.remaining(); !extra.empty() && chosen.empty()) refuse_extra(app, nullptr, extra.front());
  if (chosen.empty()) {
    throw Error(ErrorKind::usage, fmt::format("a command is missing, expected one of: {}", join(command_names(), ", ")),
                "", "'lagscape --help' tells what each does");
  }
  const CLI::App* sub = chosen.front();
  if (const auto extra = sub->remaining(); !extra.empty()) refuse_extra(app, sub, extra.front());
  if (wrong) {
    throw Error(ErrorKind::usage, mismatch_words(*sub, *wrong), "",
                fmt::format("'lagscape {} --help' shows how to call it", sub->get_name()));
  }
  line.command = sub->get_name();
  check(raw, line);
  return line;
}

}  // namespace lagscape
