#include <fmt/format.h>

#include <algorithm>

#include "lagscape/base/text.h"
#include "lagscape/report/layout.h"
#include "lagscape/report/render.h"
#include "lagscape/version.h"
#include "report/json.h"
#include "report/words.h"

namespace lagscape {
namespace {

constexpr std::size_t kColumn = 15;
constexpr std::size_t kMostFiles = 8;

std::string line(std::string_view label, std::string_view text) { return listed(label, text, kColumn, kReportWidth); }

std::string input_text(const JobPlan& plan) {
  const Panel& panel = plan.panel;
  std::string out = "\nInput\n" + line("variable", variable_words(panel)) + line("time", time_words(panel));
  out += line("place", panel.geometry.describe());
  if (plan.excluded_cells > 0)
    out += line("left out", fmt::format("{} outside the mask or box", counted(plan.excluded_cells, "cell")));
  if (!panel.storage.empty()) out += line("storage", panel.storage);
  out += line("files", counted(panel.sources.size(), "file") + ", in order of time:");
  const std::size_t shown = panel.sources.size() <= kMostFiles ? panel.sources.size() : kMostFiles - 1;
  for (std::size_t i = 0; i < shown; ++i) out += line("", panel.sources[i]);
  if (shown < panel.sources.size())
    out += line("", fmt::format("... and {} more", grouped(panel.sources.size() - shown)));
  return out;
}

std::string settings_text(const JobPlan& plan) {
  std::string out = "\nSettings\n";
  for (const EffectiveSetting& setting : plan.settings) {
    const std::string reason = setting.reason.empty() ? "" : fmt::format("   ({})", setting.reason);
    out += listed(setting.key, setting.value + reason, 24, kReportWidth);
  }
  return out;
}

std::string names(std::string_view heading, const std::vector<std::string>& words) {
  return words.empty() ? std::string()
                       : "\n" + paragraph(fmt::format("{} ({})", heading, words.size()), join(words, ", "));
}

std::string work_text(const JobPlan& plan) {
  std::string out = "\nWork\n";
  out += line("trend tests", fmt::format("{} at most, over the map", grouped(plan.tests)));
  out += line(
      "reading",
      fmt::format("each file {}, in {}", plan.file_reads == 1 ? "once" : counted(plan.file_reads, "time"),
                  plan.bands.size() == 1 ? "one piece" : fmt::format("{} bands of cells", grouped(plan.bands.size()))));
  out += line("memory",
              fmt::format("about {} of {} allowed ({} a band)", human_bytes(static_cast<double>(plan.peak_bytes)),
                          human_bytes(static_cast<double>(plan.budget_bytes)),
                          human_bytes(static_cast<double>(plan.band_bytes))));
  return out + line("threads", fmt::format("{}", plan.threads));
}

std::string json_setting(const EffectiveSetting& setting) {
  return json::object(
      {{"key", json::text(setting.key)}, {"value", json::text(setting.value)}, {"reason", json::text(setting.reason)}});
}

std::string json_plan(const JobPlan& plan) {
  const Panel& panel = plan.panel;
  const bool any = panel.axis.size() > 0;
  std::vector<std::string> settings;
  for (const EffectiveSetting& setting : plan.settings) settings.push_back(json_setting(setting));
  return json::object({{"job", json::text(plan.job.path)},
                       {"title", json::text(plan.job.title)},
                       {"variable", json::text(panel.variable)},
                       {"unit", json::text(panel.units)},
                       {"steps", json::number(panel.axis.size())},
                       {"steps_present", json::number(panel.steps_present)},
                       {"step", json::text(duration_text(panel.axis.step()))},
                       {"first", any ? json::text(panel.axis.label(0)) : "null"},
                       {"last", any ? json::text(panel.axis.label(panel.axis.size() - 1)) : "null"},
                       {"calendar", json::text(calendar_name(panel.axis.calendar()))},
                       {"cells", json::number(plan.cells)},
                       {"excluded_cells", json::number(plan.excluded_cells)},
                       {"sources", json::texts(panel.sources)},
                       {"settings", json::list(settings)},
                       {"maps", json::texts(plan.maps)},
                       {"cubes", json::texts(plan.cubes)},
                       {"max_lag_steps", json::number(plan.max_lag)},
                       {"tests", json::number(plan.tests)},
                       {"file_reads", json::number(plan.file_reads)},
                       {"bands", json::number(plan.bands.size())},
                       {"band_bytes", json::number(plan.band_bytes)},
                       {"peak_bytes", json::number(plan.peak_bytes)},
                       {"budget_bytes", json::number(plan.budget_bytes)},
                       {"threads", json::number(static_cast<std::size_t>(std::max(plan.threads, 0)))},
                       {"output_files", json::texts(plan.output_files)},
                       {"notes", json::texts(plan.notes)}});
}

}  // namespace

std::string plan_text(const JobPlan& plan) {
  const std::string title = plan.job.title.empty() ? "" : fmt::format(" - {}", plan.job.title);
  std::string out = wrapped(fmt::format("Plan of {}{}", plan.job.path, title), kReportWidth, 2) + "\n";
  out += input_text(plan) + settings_text(plan) + names("Maps", plan.maps);
  if (!plan.cubes.empty()) out += names("Cubes", plan.cubes) + fmt::format("  lags 0 to {} steps\n", plan.max_lag);
  out += work_text(plan) + "\nResult\n";
  for (const std::string& file : plan.output_files) out += "  " + file + "\n";
  if (!plan.notes.empty()) out += "\nWorth knowing\n";
  for (const std::string& note : plan.notes) out += "  - " + wrapped(note, kReportWidth, 4, 4) + "\n";
  return out;
}

std::string plan_json(const std::vector<JobPlan>& plans) {
  std::vector<std::string> values;
  for (const JobPlan& plan : plans) values.push_back(json_plan(plan));
  return json::object({{"lagscape", json::text(LAGSCAPE_VERSION)}, {"plans", json::list(values)}}) + "\n";
}

}  // namespace lagscape
