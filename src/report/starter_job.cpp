#include <fmt/format.h>

#include <algorithm>
#include <filesystem>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/job/options.h"
#include "lagscape/job/toml_reader.h"
#include "lagscape/report/layout.h"
#include "lagscape/report/render.h"
#include "report/starting_point.h"
#include "report/words.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

constexpr std::size_t kMostListedFiles = 3;

/// The path as seen from the folder of the job file.
std::string seen_from(const fs::path& folder, const std::string& path) {
  std::error_code ignored;
  const fs::path absolute = fs::absolute(path, ignored).lexically_normal();
  const fs::path relative = absolute.lexically_relative(folder);
  return relative.empty() ? absolute.string() : relative.string();
}

fs::path folder_of(const std::string& path) {
  std::error_code ignored;
  return fs::absolute(path, ignored).lexically_normal().parent_path();
}

bool has_glob_characters(const std::string& text) { return text.find_first_of("*?[\\") != std::string::npos; }

/// One glob that matches exactly these files (so that a longer archive needs no other job), or nothing.
std::optional<std::string> common_glob(const std::vector<std::string>& files) {
  const fs::path folder = folder_of(files.front());
  std::vector<std::string> names;
  for (const std::string& file : files) {
    if (folder_of(file) != folder) return std::nullopt;
    names.push_back(fs::path(file).filename().string());
  }
  std::sort(names.begin(), names.end());
  names.erase(std::unique(names.begin(), names.end()), names.end());
  const std::string &a = names.front(), &b = names.back();
  const auto shortest = std::min_element(names.begin(), names.end(), [](const auto& x, const auto& y) {
                          return x.size() < y.size();
                        })->size();
  std::size_t head = 0, tail = 0;
  while (head < shortest && a[head] == b[head]) ++head;
  const auto same_end = [&](std::size_t back) {
    return std::all_of(names.begin(), names.end(),
                       [&](const auto& name) { return name[name.size() - back] == a[a.size() - back]; });
  };
  while (head + tail < shortest && same_end(tail + 1)) ++tail;
  const std::string begin = a.substr(0, head), end = a.substr(a.size() - tail);
  if (head == 0 || has_glob_characters(folder.string() + begin + end)) return std::nullopt;
  std::size_t matching = 0;
  std::error_code problem;
  for (fs::directory_iterator entry(folder, problem); !problem && entry != fs::directory_iterator();
       entry.increment(problem)) {
    const std::string name = entry->path().filename().string();
    if (name.size() >= head + tail && name.starts_with(begin) && name.ends_with(end)) ++matching;
  }
  if (matching != names.size()) return std::nullopt;
  return (folder / (begin + "*" + end)).string();
}

std::string files_value(const std::vector<std::string>& files, const fs::path& folder) {
  if (files.size() > kMostListedFiles) {
    if (const auto glob = common_glob(files)) return fmt::format("[{}]", toml_text(seen_from(folder, *glob)));
  }
  if (files.size() == 1) return fmt::format("[{}]", toml_text(seen_from(folder, files.front())));
  std::string out = "[\n";
  for (const std::string& file : files) out += fmt::format("  {},\n", toml_text(seen_from(folder, file)));
  return out + "]";
}

/// A folder for results that holds none of the input, so that a glob never takes a result for input.
std::string result_folder(const std::vector<std::string>& files, const fs::path& folder) {
  std::string name = "results";
  const auto holds_input = [&] {
    return std::any_of(files.begin(), files.end(),
                       [&](const std::string& file) { return folder_of(file) == folder / name; });
  };
  while (holds_input()) name += "_lagscape";
  return name;
}

std::string comment(std::string_view text) {
  const std::string lines = wrapped(text, kReportWidth - 2);
  std::string out = "# ";
  for (const char c : lines) out += c == '\n' ? std::string("\n# ") : std::string(1, c);
  return out + "\n";
}

/// "key = default", with what it means and takes, all from the option table.
std::string setting(std::string_view key) {
  const JobOption& option = *find_option(key);
  const std::string range = range_text(option);
  std::string out = comment(range.empty() ? std::string(option.help) : fmt::format("{} ({})", option.help, range));
  const std::string name(key.substr(key.rfind('.') + 1));
  const std::string value(option.default_text);
  const bool bare = to_number(value).has_value() || value == "true" || value == "false";
  const std::string text = option.type.starts_with("list") ? fmt::format("[{}]", toml_text(value))
                           : bare                          ? value
                                                           : toml_text(value);
  return out + fmt::format("{} = {}\n", name, text);
}

std::string table(std::string_view name, std::initializer_list<std::string_view> keys) {
  std::string out = fmt::format("\n[{}]\n", name);
  for (const std::string_view key : keys) out += setting(fmt::format("{}.{}", name, key));
  return out;
}

std::string select_value(const std::vector<std::pair<std::string, double>>& select) {
  std::vector<std::string> parts;
  for (const auto& [dimension, value] : select)
    parts.push_back(fmt::format("{} = {}", toml_text(dimension), number_text(value)));
  return fmt::format("{{ {} }}", join(parts, ", "));
}

std::string variable_lines(const SurveyReport& report, const SurveyedVariable& variable) {
  std::vector<std::string> others;
  for (const SurveyedVariable& other : report.variables) {
    if (other.usable && other.name != variable.name) others.push_back(other.name);
  }
  std::string out =
      others.empty() ? "" : comment(fmt::format("There are also: {}. A list stands for several.", join(others, ", ")));
  return out + fmt::format("variable = {}\n", toml_text(variable.name));
}

/// Lines that narrow the input down, switched off, filled in with what the record holds.
std::string narrowing_lines(const Panel& panel) {
  std::string out;
  if (panel.axis.size() > 0) {
    const std::string first = panel.axis.label(0).substr(0, panel.axis.label(0).find('T'));
    const std::string last = panel.axis.label(panel.axis.size() - 1);
    out += comment("The whole record is used; to use a part of it:");
    out += fmt::format("# period = [\"{}\", \"{}\"]\n", first, last.substr(0, last.find('T')));
  }
  const Geometry& place = panel.geometry;
  if (place.kind == GeometryKind::latlon && !place.x.values.empty() && !place.y.values.empty()) {
    const auto [south, north] = std::minmax(place.y.values.front(), place.y.values.back());
    out += fmt::format("# box = [{}, {}, {}, {}]   # west, south, east, north\n", number_text(place.x.values.front()),
                       number_text(south), number_text(place.x.values.back()), number_text(north));
  }
  return out;
}

std::string input_table(const SurveyReport& report, const SurveyedVariable& variable, const fs::path& folder,
                        const std::string& sites) {
  std::string out =
      "[input]\n" + comment("Files, relative to this job file; a glob such as \"data/*.nc\" may stand for many.");
  out += fmt::format("files = {}\n", files_value(report.files, folder)) + variable_lines(report, variable);
  if (!variable.select.empty()) {
    out += comment("Another dimension is longer than 1; this entry of it is used:") +
           fmt::format("select = {}\n", select_value(variable.select));
  }
  if (!sites.empty()) out += fmt::format("sites = {}\n", toml_text(seen_from(folder, sites)));
  if (!report.mend_time.empty())
    out += comment("The files' own time axis cannot be read as it is:") + report.mend_time + "\n";
  return out + (variable.usable ? narrowing_lines(variable.panel) : std::string());
}

}  // namespace

std::string starter_job(const SurveyReport& report, const std::string& path, const std::string& sites) {
  const SurveyedVariable* variable = starting_variable(report);
  if (variable == nullptr) {
    std::vector<std::string> reasons;
    for (const SurveyedVariable& one : report.variables) {
      reasons.push_back(
          fmt::format("{}: {}{}{}", one.name, one.why_not, one.to_do.empty() ? "" : "; to do: ", one.to_do));
    }
    throw Error(ErrorKind::input, "there is no variable to write a job for",
                report.files.empty() ? "" : report.files.front(),
                reasons.empty() ? "give files that hold a variable over time" : join(reasons, "\n         "));
  }
  const fs::path folder = folder_of(path);
  const std::string name = variable->long_name.empty() ? variable->name : variable->long_name;
  std::string out =
      comment("A job to start from. Paths are relative to this file. What a key means: lagscape explain KEY");
  out += fmt::format("title = {}\n\n", toml_text(fmt::format("Memory and trend of {}", name)));
  out += input_table(report, *variable, folder, sites);
  out += table("prepare", {"season", "remove", "min_share", "min_count"});
  out += table("memory", {"max_lag", "confidence", "order"});
  out += table("trend", {"tests", "alpha", "per"});
  out += table("field", {"control", "rate"});
  const bool others = std::count_if(report.variables.begin(), report.variables.end(),
                                    [](const SurveyedVariable& one) { return one.usable; }) > 1;
  out += "\n[output]\n" + comment(fmt::format("The result; its folder is made when needed.{}",
                                              others ? " For a list of variables, put {variable} into the name." : ""));
  const std::string result =
      fmt::format("{}/{}.nc", result_folder(report.files, folder), fs::path(path).stem().string());
  out += fmt::format("file = {}\n", toml_text(result));
  out += setting("output.maps") + comment(std::string(find_option("output.cubes")->help));
  return out + "# cubes = [\"autocorrelation\", \"partial_autocorrelation\"]\n";
}

}  // namespace lagscape
