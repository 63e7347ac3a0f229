#include <fmt/format.h>

#include <algorithm>

#include "lagscape/base/text.h"
#include "lagscape/report/layout.h"
#include "lagscape/report/render.h"
#include "lagscape/version.h"
#include "report/json.h"
#include "report/starting_point.h"
#include "report/words.h"

namespace lagscape {
namespace {

constexpr std::size_t kColumn = 16;
constexpr std::size_t kMostFiles = 8;
constexpr std::size_t kMostFilesInCommand = 12;

std::string line(std::string_view label, std::string_view text) { return listed(label, text, kColumn, kReportWidth); }

std::string files_text(const SurveyReport& report) {
  std::string out = fmt::format("{}, looked at together\n", counted(report.files.size(), "file"));
  const std::size_t shown = report.files.size() <= kMostFiles ? report.files.size() : kMostFiles - 1;
  for (std::size_t i = 0; i < shown; ++i) {
    const std::string kind =
        i < report.kinds.size() && !report.kinds[i].empty() ? fmt::format("   {}", report.kinds[i]) : "";
    out += fmt::format("  {}{}\n", report.files[i], kind);
  }
  if (shown < report.files.size()) out += fmt::format("  ... and {} more\n", grouped(report.files.size() - shown));
  return out;
}

std::string missing_words(const SurveyedVariable& variable) {
  if (variable.missing_share < 0) return "not looked at";
  return fmt::format("{} of the values in {}", percent(variable.missing_share),
                     counted(variable.sampled_steps, "sampled step"));
}

std::string usable_text(const SurveyedVariable& variable) {
  const Panel& panel = variable.panel;
  const std::string long_name = variable.long_name.empty() ? "no long name" : variable.long_name;
  std::string out = "  " +
                    wrapped(fmt::format("{}: {}, {}", variable.name, long_name,
                                        variable.units.empty() ? "no unit given" : "unit " + variable.units),
                            kReportWidth, 4, 2) +
                    "\n";
  const auto detail = [&](std::string_view label, std::string_view text) {
    out += line(fmt::format("  {}", label), text);
  };
  detail("time", time_words(panel));
  detail("place", panel.geometry.describe());
  detail("missing", missing_words(variable));
  if (!panel.storage.empty()) detail("storage", panel.storage);
  if (!variable.to_do.empty()) detail("in the job", variable.to_do);
  return out;
}

std::string variables_text(const SurveyReport& report) {
  std::string usable, other;
  for (const SurveyedVariable& variable : report.variables) {
    if (variable.usable) {
      usable += usable_text(variable);
      continue;
    }
    other += "  " + wrapped(fmt::format("{}: {}", variable.name, variable.why_not), kReportWidth, 4, 2) + "\n";
    if (!variable.to_do.empty()) other += line("  to do", variable.to_do);
  }
  std::string out =
      usable.empty() ? "\nNo variable can be analysed as it is.\n" : "\nVariables that can be analysed\n" + usable;
  if (!other.empty()) out += "\nOther variables\n" + other;
  return out;
}

std::string quirks_text(const SurveyReport& report) {
  std::string out;
  for (const std::string& quirk : report.quirks) out += "  - " + wrapped(quirk, kReportWidth, 4, 4) + "\n";
  if (!report.mend_time.empty()) {
    out += "  - The time axis cannot be read as it is. In [input] of the job, say what it should be:\n      " +
           report.mend_time + "\n";
  }
  return out.empty() ? out : "\nWorth knowing\n" + out;
}

/// The command that looked at these files, with a job to be written.
std::string survey_command(const SurveyReport& report, const std::string& sites) {
  std::string command = "lagscape survey";
  for (std::size_t i = 0; i < std::min(report.files.size(), kMostFilesInCommand); ++i)
    command += " " + shell_word(report.files[i]);
  if (report.files.size() > kMostFilesInCommand) command = "lagscape survey FILE...";
  if (!sites.empty()) command += " --sites " + shell_word(sites);
  return command + " --write-job job.toml";
}

std::string next_text(const SurveyReport& report, const std::string& sites, const std::string& written_job) {
  if (!written_job.empty()) {
    const std::string job = shell_word(written_job);
    return fmt::format("\nNext: read {} and change what you like, then\n  lagscape plan {}\n  lagscape run {}\n",
                       written_job, job, job);
  }
  if (starting_variable(report) == nullptr) {
    return "\nNext: do what is said above: lines in brackets go into a job file, the rest into the files.\n";
  }
  const bool all = report.files.size() > kMostFilesInCommand;
  return fmt::format("\nNext: have a job written to start from{}\n  {}\n",
                     all ? " (FILE...: the same files again)" : "", survey_command(report, sites));
}

std::string json_variable(const SurveyedVariable& variable) {
  std::vector<std::pair<std::string_view, std::string>> members = {
      {"name", json::text(variable.name)},       {"long_name", json::text(variable.long_name)},
      {"unit", json::text(variable.units)},      {"usable", json::boolean(variable.usable)},
      {"why_not", json::text(variable.why_not)}, {"to_do", json::text(variable.to_do)}};
  if (!variable.usable) return json::object(members);
  const Panel& panel = variable.panel;
  const bool any = panel.axis.size() > 0;
  members.insert(members.end(),
                 {{"steps", json::number(panel.axis.size())},
                  {"steps_present", json::number(panel.steps_present)},
                  {"step", json::text(duration_text(panel.axis.step()))},
                  {"first", any ? json::text(panel.axis.label(0)) : "null"},
                  {"last", any ? json::text(panel.axis.label(panel.axis.size() - 1)) : "null"},
                  {"calendar", json::text(calendar_name(panel.axis.calendar()))},
                  {"cells", json::number(panel.geometry.cells())},
                  {"place", json::text(panel.geometry.describe())},
                  {"storage", json::text(panel.storage)},
                  {"missing_share", variable.missing_share < 0 ? "null" : json::number(variable.missing_share)},
                  {"sampled_steps", json::number(variable.sampled_steps)}});
  return json::object(members);
}

}  // namespace

const SurveyedVariable* starting_variable(const SurveyReport& report) {
  const auto& variables = report.variables;
  auto found = std::find_if(variables.begin(), variables.end(), [](const SurveyedVariable& v) { return v.usable; });
  if (found == variables.end() && !report.mend_time.empty()) {
    found =
        std::find_if(variables.begin(), variables.end(), [](const SurveyedVariable& v) { return !v.to_do.empty(); });
  }
  return found == variables.end() ? nullptr : &*found;
}

std::string survey_text(const SurveyReport& report, const std::string& sites, const std::string& written_job) {
  return files_text(report) + variables_text(report) + quirks_text(report) + next_text(report, sites, written_job);
}

std::string survey_json(const SurveyReport& report) {
  std::vector<std::string> files, variables;
  for (std::size_t i = 0; i < report.files.size(); ++i) {
    const std::string kind = i < report.kinds.size() ? report.kinds[i] : "";
    files.push_back(json::object({{"name", json::text(report.files[i])}, {"kind", json::text(kind)}}));
  }
  for (const SurveyedVariable& variable : report.variables) variables.push_back(json_variable(variable));
  return json::object({{"lagscape", json::text(LAGSCAPE_VERSION)},
                       {"files", json::list(files)},
                       {"variables", json::list(variables)},
                       {"worth_knowing", json::texts(report.quirks)},
                       {"mend_time", json::text(report.mend_time)}}) +
         "\n";
}

}  // namespace lagscape
