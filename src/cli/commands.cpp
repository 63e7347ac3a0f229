#include "cli/commands.h"

#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <csignal>
#include <cstdio>
#include <filesystem>
#include <fstream>
#include <memory>

#include "cli/progress.h"
#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/forge/forge.h"
#include "lagscape/io/part_file.h"
#include "lagscape/io/survey.h"
#include "lagscape/job/job_file.h"
#include "lagscape/pipeline/run.h"
#include "lagscape/report/layout.h"
#include "lagscape/report/render.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

volatile std::sig_atomic_t interrupted = 0;

constexpr std::array kStopSignals = {SIGINT, SIGTERM, SIGHUP};

/// The first signal asks the work to stop and tidy up; from then on any of them ends the program at once.
void note_interrupt(int /*signal*/) {
  interrupted = 1;
  struct sigaction at_once {};
  at_once.sa_handler = SIG_DFL;
  for (const int signal : kStopSignals) sigaction(signal, &at_once, nullptr);
}

/// Signals that whoever started the program has switched off (nohup) stay off.
void watch_for_interrupt() {
  struct sigaction action {};
  action.sa_handler = note_interrupt;
  action.sa_flags = SA_RESTART;
  for (const int signal : kStopSignals) {
    struct sigaction before {};
    sigaction(signal, nullptr, &before);
    if (before.sa_handler != SIG_IGN) sigaction(signal, &action, nullptr);
  }
}

void stop_if_interrupted() {
  if (interrupted != 0) throw Error(ErrorKind::interrupted, "interrupted; no unfinished result is left");
}

/// Warnings and notes on stderr; the progress line makes room for them.
Log log_to_stderr(bool quiet, ProgressLine& progress) {
  return {[quiet, &progress](Log::Level level, const std::string& text) {
    if (quiet && level == Log::Level::note) return;
    progress.clear();
    fmt::print(stderr, "{}: {}\n", level == Log::Level::warning ? "warning" : "note", text);
  }};
}

void print(const std::string& text) {
  if (std::fwrite(text.data(), 1, text.size(), stdout) != text.size() || std::fflush(stdout) != 0) {
    throw Error(ErrorKind::output, "the output could not be written", "standard output",
                "check where it is sent to and whether that disk is full");
  }
}

/// True if both would put a result under the same name, so that one run would undo the other.
bool same_result(const JobSpec& a, const JobSpec& b) {
  if (fs::path(a.output.file).lexically_normal() != fs::path(b.output.file).lexically_normal()) return false;
  if (a.output.file.find("{variable}") == std::string::npos) return true;
  return std::find_first_of(a.input.variables.begin(), a.input.variables.end(), b.input.variables.begin(),
                            b.input.variables.end()) != a.input.variables.end();
}

/// All jobs, read and checked before anything runs; the problems of all of them are told together.
std::vector<JobSpec> read_jobs(const CommandLine& line) {
  std::vector<JobSpec> jobs;
  std::string problems;
  for (const std::string& path : line.arguments) {
    try {
      jobs.push_back(read_job(path, line.overrides));
    } catch (const Error& error) {
      if (error.kind() != ErrorKind::job || line.arguments.size() == 1) throw;
      problems += fmt::format("\n{}", error.what());
    }
  }
  if (!problems.empty()) throw Error(ErrorKind::job, "not every job can be run, so none was" + problems);
  for (std::size_t later = 1; later < jobs.size(); ++later) {
    for (std::size_t job = 0; job < later; ++job) {
      if (!same_result(jobs[job], jobs[later])) continue;
      throw Error(ErrorKind::job, fmt::format("two jobs have the same result, {}", jobs[job].output.file),
                  fmt::format("{} and {}", jobs[job].path, jobs[later].path),
                  "give each its own output.file; none was run");
    }
  }
  return jobs;
}

/// The command for `history`: what was asked for, without what cannot change a result (resources, paths).
std::string history_command(const CommandLine& line, const std::string& job) {
  std::string command = fmt::format("lagscape {} {}", line.command, fs::path(job).filename().string());
  for (const std::string& option : line.overrides) {
    const std::string key(trim(option.substr(0, option.find('='))));
    const bool path =
        key == "output.file" || key == "input.files" || key == "input.sites" || key.starts_with("input.mask");
    if (!path) command += " --set " + shell_word(option);
  }
  return command;
}

RunOptions run_options(const CommandLine& line, const std::string& job) {
  RunOptions options;
  options.threads = line.threads;
  options.memory_bytes = line.memory_bytes;
  options.replace = line.replace;
  options.command = history_command(line, job);
  return options;
}

/// A job file under its name is always complete, and its name is refused before the work.
std::unique_ptr<PartFiles> starter_file(const fs::path& path, bool replace) {
  if (path.empty()) return nullptr;
  return std::make_unique<PartFiles>(path.parent_path(), std::vector{path.filename().string()}, replace,
                                     "give another name with --write-job");
}

void survey(const CommandLine& line) {
  ProgressLine none(false);
  const fs::path job = line.write_job;
  const auto starter = starter_file(job, line.replace);
  const SurveyReport report = survey_files(line.arguments, line.sites, log_to_stderr(line.quiet, none));
  if (starter) {
    const std::string part = starter->part(job.filename().string());
    std::ofstream file(part, std::ios::binary);
    file << starter_job(report, line.write_job, line.sites);
    close_text(file, part);
    starter->commit();
  }
  print(line.json ? survey_json(report) : survey_text(report, line.sites, line.write_job));
}

/// The command that does what was planned.
std::string run_command_words(const CommandLine& line) {
  std::string command = "lagscape run";
  for (const std::string& job : line.arguments) command += " " + shell_word(job);
  for (const std::string& option : line.overrides) command += " --set " + shell_word(option);
  if (line.threads > 0) command += fmt::format(" --threads {}", line.threads);
  if (line.memory_bytes > 0) command += fmt::format(" --memory {}", line.memory_bytes);
  return command + (line.replace ? " --replace" : "");
}

/// A run would refuse a result that exists already: said before it is asked for.
void note_taken_names(JobPlan& plan, bool replace) {
  std::vector<std::string> taken;
  for (const std::string& file : plan.output_files) {
    std::error_code ignored;
    if (fs::exists(fs::symlink_status(file, ignored))) taken.push_back(file);
  }
  if (taken.empty()) return;
  plan.notes.push_back(fmt::format("{} already; {}",
                                   taken.size() == 1 ? "the result exists" : "these exist: " + join(taken, ", "),
                                   replace ? "with --replace it is replaced" : "run needs --replace"));
}

void plan(const CommandLine& line) {
  ProgressLine none(false);
  const Log log = log_to_stderr(line.quiet, none);
  std::vector<JobPlan> plans;
  for (const JobSpec& job : read_jobs(line)) {
    for (JobPlan& made : plan_job(job, run_options(line, job.path), log)) {
      note_taken_names(made, line.replace);
      if (!line.json) print((plans.empty() ? "" : "\n") + plan_text(made));
      plans.push_back(std::move(made));
    }
  }
  print(line.json ? plan_json(plans) : fmt::format("\nTo do this:\n  {}\n", run_command_words(line)));
}

void run(const CommandLine& line) {
  watch_for_interrupt();
  ProgressLine progress(!line.quiet && isatty(STDERR_FILENO) != 0);
  const Log log = log_to_stderr(line.quiet, progress);
  const auto show = [&](std::size_t done, std::size_t total, double seconds) {
    stop_if_interrupted();
    progress.update(done, total, seconds);
  };
  std::vector<RunReport> reports;
  const auto finish = [&] {
    if (line.json) print(summary_json(reports));
  };
  try {
    for (const JobSpec& job : read_jobs(line)) {
      stop_if_interrupted();
      for (RunReport& made : run_job(job, run_options(line, job.path), log, show)) {
        progress.clear();
        if (!line.json) print((reports.empty() ? "" : "\n") + summary_text(made));
        reports.push_back(std::move(made));
      }
    }
  } catch (const Error&) {
    if (!reports.empty()) finish();
    throw;
  }
  finish();
}

void forge(const CommandLine& line) {
  watch_for_interrupt();
  ProgressLine none(false);
  const ForgeReport report = forge_recipe(line.arguments.front(), line.overrides, line.replace,
                                          log_to_stderr(line.quiet, none), stop_if_interrupted);
  std::string text = report.description;
  if (!text.empty() && text.back() != '\n') text += '\n';
  for (const std::string& file : report.files) text += fmt::format("wrote {}\n", file);
  print(text);
}

std::string explained(const std::string& word) {
  if (auto help = command_help(word)) return *help;
  return explain_text(word, command_names());
}

/// All words or, if one of them is unknown, none.
void explain(const CommandLine& line) {
  if (line.arguments.empty()) return print(explain_text(""));
  std::vector<std::string> texts;
  for (const std::string& word : line.arguments) texts.push_back(explained(word));
  print(join(texts, "\n"));
}

}  // namespace

void run_command(const CommandLine& line) {
  if (line.output) return print(*line.output);
  if (line.command == "survey") return survey(line);
  if (line.command == "plan") return plan(line);
  if (line.command == "run") return run(line);
  if (line.command == "forge") return forge(line);
  explain(line);
}

}  // namespace lagscape
