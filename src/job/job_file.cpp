#include "lagscape/job/job_file.h"

#include <fmt/format.h>
#include <glob.h>

#include <algorithm>
#include <cmath>
#include <filesystem>

#include "lagscape/base/text.h"
#include "lagscape/grid/calendar.h"
#include "lagscape/grid/time_axis.h"
#include "lagscape/job/options.h"
#include "lagscape/job/toml_reader.h"
#include "lagscape/measures/measure.h"
#include "lagscape/measures/trend_test.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

constexpr std::string_view kVariableMark = "{variable}";

std::string name_of(std::string_view key) { return std::string(key.substr(key.rfind('.') + 1)); }

bool contains(std::span<const std::string> words, const std::string& word) {
  return std::find(words.begin(), words.end(), word) != words.end();
}

bool inside(double value, const NumberBounds& bounds) {
  return bounds.open ? value > bounds.low && value < bounds.high : value >= bounds.low && value <= bounds.high;
}

std::string escape_glob(const std::string& text) {
  std::string out;
  for (const char c : text) {
    if (c == '*' || c == '?' || c == '[' || c == '\\') out += '\\';
    out += c;
  }
  return out;
}

/// Files that a pattern stands for, without folders.
std::vector<std::string> matches(const std::string& pattern) {
  std::vector<std::string> files;
  glob_t found{};
  if (glob(pattern.c_str(), 0, nullptr, &found) == 0) {
    for (std::size_t i = 0; i < found.gl_pathc; ++i) {
      if (!fs::is_directory(found.gl_pathv[i])) files.emplace_back(found.gl_pathv[i]);
    }
  }
  globfree(&found);
  return files;
}

bool same_file(const std::string& a, const std::string& b) {
  std::error_code ignored;
  return fs::weakly_canonical(a, ignored) == fs::weakly_canonical(b, ignored);
}

/// Turns a TOML document into a JobSpec; every problem goes to the reader, which tells them together.
class JobReader {
 public:
  JobReader(TomlReader& toml, std::string folder) : toml_(toml), folder_(std::move(folder)) {}

  JobSpec read() {
    refuse_unknown();
    if (auto title = toml_.text("title")) job_.title = *title;
    read_files();
    read_cells();
    read_values();
    read_time();
    read_prepare();
    read_memory();
    read_trend();
    read_output();
    check_output_is_no_input();
    return std::move(job_);
  }

 private:
  void refuse_unknown();
  void read_files();
  void read_cells();
  void read_mask();
  void read_period();
  void read_box();
  void read_values();
  void read_time();
  void read_prepare();
  void read_memory();
  void read_order();
  void read_trend();
  void read_output();
  void check_output_is_no_input();

  /// Notes what was found and what the option table says is expected.
  void refuse(const std::string& key, const std::string& found, const std::string& expected) {
    toml_.problem(key, fmt::format("{}: found {}, expected {}", name_of(key), found, expected));
  }
  void out_of_range(const std::string& key, double value) {
    refuse(key, number_text(value), range_text(*find_option(key)));
  }

  void number(const std::string& key, double& target) {
    const auto value = toml_.number(key);
    if (value && !inside(*value, find_option(key)->bounds)) return out_of_range(key, *value);
    target = value.value_or(target);
  }
  template <class Integer>
  void whole_number(const std::string& key, Integer& target) {
    const auto value = toml_.integer(key);
    if (!value) return;
    if (!inside(static_cast<double>(*value), find_option(key)->bounds))
      return out_of_range(key, static_cast<double>(*value));
    target = static_cast<Integer>(*value);
  }
  template <class Enum>
  void choice(const std::string& key, Enum& target) {
    const std::vector<std::string> words = choice_words(key);
    if (const auto word = toml_.choice(key, words)) {
      target = static_cast<Enum>(std::find(words.begin(), words.end(), *word) - words.begin());
    }
  }
  [[nodiscard]] std::optional<StepsOrDuration> steps_or_duration(const std::string& key);
  /// An existing file beside the job, or nothing.
  [[nodiscard]] std::optional<std::string> existing_file(const std::string& key);
  /// Paths are relative to the job file, those of --set to the shell.
  [[nodiscard]] std::string resolve(const std::string& key, const std::string& path, bool pattern = false) const {
    const std::string folder = toml_.overridden(key) ? std::string() : pattern ? escape_glob(folder_) : folder_;
    return (fs::path(folder) / path).lexically_normal().string();
  }

  TomlReader& toml_;
  std::string folder_;
  JobSpec job_;
};

void JobReader::refuse_unknown() {
  std::vector<std::string> known;
  for (const JobOption& option : job_options()) known.emplace_back(option.key);
  toml_.refuse_unknown(known, {later_options().begin(), later_options().end()});
}

std::optional<std::string> JobReader::existing_file(const std::string& key) {
  const auto path = toml_.text(key);
  if (!path) return std::nullopt;
  std::string resolved = resolve(key, *path);
  std::error_code ignored;
  if (fs::is_regular_file(resolved, ignored)) return resolved;
  refuse(key, fmt::format("\"{}\"", *path), fmt::format("a file that exists; there is no {}", resolved));
  return std::nullopt;
}

void JobReader::read_files() {
  const auto patterns = toml_.texts("input.files");
  if (!toml_.has("input.files"))
    toml_.problem("input.files", "input.files is missing: give paths or globs of the files to read");
  if (patterns && patterns->empty()) refuse("input.files", "an empty list", "paths or globs of the files to read");
  std::vector<std::string>& files = job_.input.files;
  for (const std::string& pattern : patterns.value_or(std::vector<std::string>{})) {
    std::error_code ignored;
    std::vector<std::string> found;
    const std::string literal = resolve("input.files", pattern);
    if (fs::is_regular_file(literal, ignored))
      found = {literal};
    else
      found = matches(resolve("input.files", pattern, true));
    if (found.empty())
      refuse("input.files", fmt::format("\"{}\"", pattern), fmt::format("files; nothing matches {}", literal));
    files.insert(files.end(), found.begin(), found.end());
  }
  std::sort(files.begin(), files.end());
  files.erase(std::unique(files.begin(), files.end()), files.end());

  const auto variables = toml_.texts("input.variable");
  if (!toml_.has("input.variable")) {
    toml_.problem("input.variable",
                  "input.variable is missing: name the variable to analyse; 'lagscape survey FILE' lists them");
  }
  if (variables && (variables->empty() || contains(*variables, "")))
    refuse("input.variable", "an empty name or list", "a variable's name");
  for (const std::string& name : variables.value_or(std::vector<std::string>{})) {
    if (contains(job_.input.variables, name))
      refuse("input.variable", fmt::format("\"{}\" twice", name), "each variable once");
    job_.input.variables.push_back(name);
  }
}

void JobReader::read_cells() {
  if (toml_.has("input.select") && !toml_.is_table("input.select")) {
    refuse("input.select", "no table", "a table such as { level = 850 }");
  }
  for (const std::string& dimension : toml_.keys("input.select")) {
    if (const auto value = toml_.number("input.select." + dimension)) job_.input.select.emplace_back(dimension, *value);
  }
  read_period();
  read_box();
  read_mask();
}

void JobReader::read_period() {
  const auto dates = toml_.texts("input.period");
  if (!dates) return;
  if (dates->size() != 2)
    return refuse("input.period", fmt::format("{} dates", dates->size()), "two: the first and the last to use");
  // Which dates exist is known only with the file's calendar; here it is enough that some calendar has them.
  for (const Calendar calendar : {Calendar::standard, Calendar::all_leap, Calendar::day360}) {
    const auto first = parse_iso(calendar, dates->front());
    const auto last = parse_iso(calendar, dates->back(), true);
    if (!first || !last) continue;
    if (*first > *last)
      return refuse("input.period", fmt::format("{} after {}", dates->front(), dates->back()),
                    "the earlier date first");
    job_.input.period = {dates->front(), dates->back()};
    return;
  }
  refuse("input.period", fmt::format("\"{}\" and \"{}\"", dates->front(), dates->back()),
         "ISO 8601 dates such as \"1981-01-31\"");
}

void JobReader::read_box() {
  const auto edges = toml_.numbers("input.box");
  if (!edges) return;
  const std::string key = "input.box";
  if (edges->size() != 4)
    return refuse(key, fmt::format("{} numbers", edges->size()), "four: west, south, east, north");
  const double west = edges->at(0), south = edges->at(1), east = edges->at(2), north = edges->at(3);
  if (!(std::abs(south) <= 90 && std::abs(north) <= 90)) {
    refuse(key, fmt::format("latitudes {} and {}", south, north),
           "-90 to 90 degrees; the order is west, south, east, north");
  } else if (south >= north) {
    refuse(key, fmt::format("south {} not below north {}", south, north), "the order west, south, east, north");
  }
  if (!(west >= -360 && west <= 360 && east >= -360 && east <= 360)) {
    refuse(key, fmt::format("longitudes {} and {}", west, east), "-360 to 360 degrees");
  } else if (west == east || east - west > 360) {
    refuse(key, fmt::format("longitudes {} to {}", west, east), "a box more than 0 and at most 360 degrees wide");
  }
  job_.input.box = {west, south, east, north};
}

void JobReader::read_mask() {
  if (!toml_.has("input.mask")) return;
  JobSpec::Input::Mask mask;
  for (const char* key : {"input.mask.file", "input.mask.variable"}) {
    if (toml_.is_table("input.mask") && !toml_.has(key)) toml_.problem(key, fmt::format("{} is missing", key));
  }
  mask.file = existing_file("input.mask.file").value_or("");
  mask.variable = toml_.text("input.mask.variable").value_or("");
  mask.min = toml_.number("input.mask.min");
  mask.max = toml_.number("input.mask.max");
  mask.values = toml_.numbers("input.mask.values").value_or(std::vector<double>{});
  const bool range = toml_.has("input.mask.min") || toml_.has("input.mask.max");
  if (range == toml_.has("input.mask.values")) {
    refuse("input.mask", range ? "both values and min or max" : "no criterion",
           "exactly one kind: min and/or max, or values = [...]");
  }
  if (mask.min && mask.max && *mask.min > *mask.max) {
    refuse("input.mask.min", fmt::format("{} above max {}", *mask.min, *mask.max), "min not above max");
  }
  job_.input.mask = std::move(mask);
}

void JobReader::read_values() {
  if (toml_.is_number("input.missing_values"))
    job_.input.missing_values = {*toml_.number("input.missing_values")};
  else
    job_.input.missing_values = toml_.numbers("input.missing_values").value_or(std::vector<double>{});
  if (const auto range = toml_.numbers("input.valid_range")) {
    if (range->size() != 2)
      refuse("input.valid_range", fmt::format("{} numbers", range->size()),
             "two: the smallest and the largest valid value");
    else if (!(range->front() < range->back())) {
      refuse("input.valid_range", fmt::format("{} to {}", range->front(), range->back()), "the smaller value first");
    } else
      job_.input.valid_range = {range->front(), range->back()};
  }
  job_.input.sites = existing_file("input.sites");
  job_.input.duplicates = toml_.choice("input.duplicates", choice_words("input.duplicates")).value_or("refuse");
  job_.input.longitude = toml_.choice("input.longitude", choice_words("input.longitude")).value_or("auto");
}

void JobReader::read_time() {
  if (!toml_.has("input.time")) return;
  JobSpec::Input::Time time{toml_.text("input.time.unit"), toml_.text("input.time.calendar"),
                            toml_.text("input.time.step")};
  if (time.unit && time.unit->find(" since ") == std::string::npos) {
    refuse("input.time.unit", fmt::format("\"{}\"", *time.unit), "a CF time unit such as \"days since 1981-01-01\"");
  }
  if (time.calendar && !parse_calendar(*time.calendar)) {
    std::vector<std::string> names;
    for (int i = 0; i <= static_cast<int>(Calendar::day360); ++i)
      names.emplace_back(calendar_name(static_cast<Calendar>(i)));
    refuse("input.time.calendar", fmt::format("\"{}\"", *time.calendar),
           join(names, " | ") + did_you_mean(*time.calendar, names));
  }
  if (time.step && !parse_duration(*time.step)) {
    refuse("input.time.step", fmt::format("\"{}\"", *time.step),
           "an ISO 8601 duration such as \"P1M\", \"P1D\" or \"PT6H\"");
  }
  job_.input.time = std::move(time);
}

std::optional<StepsOrDuration> JobReader::steps_or_duration(const std::string& key) {
  if (!toml_.has(key)) return std::nullopt;
  if (toml_.is_number(key)) {
    std::int64_t steps = 0;
    whole_number(key, steps);
    return steps > 0 ? std::optional<StepsOrDuration>(steps) : std::nullopt;
  }
  const auto text = toml_.text(key);
  if (!text) return std::nullopt;
  if (parse_duration(*text)) return StepsOrDuration(*text);
  refuse(key, fmt::format("\"{}\"", *text),
         "an ISO 8601 duration such as \"P5Y\" or \"P30D\", or a whole number of steps");
  return std::nullopt;
}

void JobReader::read_prepare() {
  JobSpec::Prepare& prepare = job_.prepare;
  choice("prepare.season", prepare.season);
  whole_number("prepare.harmonics", prepare.harmonics);
  choice("prepare.remove", prepare.remove);
  prepare.window = steps_or_duration("prepare.window");
  if (prepare.remove == RemoveRule::running_mean && !toml_.has("prepare.window")) {
    toml_.problem("prepare.remove", "remove = \"running-mean\" needs a window, such as window = \"P11Y\"");
  }
  if (prepare.remove != RemoveRule::running_mean && toml_.has("prepare.window")) {
    toml_.problem("prepare.window", "window: only used with remove = \"running-mean\"; take it out or change remove");
  }
  number("prepare.min_share", prepare.min_share);
  choice("prepare.share_of", prepare.share_of_period);
  whole_number("prepare.min_count", prepare.min_count);
}

void JobReader::read_memory() {
  JobSpec::Memory& memory = job_.memory;
  const bool automatic = toml_.is_text("memory.max_lag") && toml_.text("memory.max_lag") == "auto";
  if (!automatic) memory.max_lag = steps_or_duration("memory.max_lag");
  number("memory.confidence", memory.confidence);
  choice("memory.limits", memory.limits);
  whole_number("memory.max_order", memory.max_order);
  read_order();
}

void JobReader::read_order() {
  const std::string key = "memory.order";
  JobSpec::Memory& memory = job_.memory;
  if (!toml_.is_number(key)) return choice(key, memory.order);
  const auto order = toml_.integer(key);
  if (!order) return;
  if (*order < 1 || *order > memory.max_order) {
    return refuse(key, fmt::format("{}", *order), fmt::format("1 to memory.max_order, which is {}", memory.max_order));
  }
  memory.order = OrderRule::fixed;
  memory.fixed_order = static_cast<int>(*order);
}

void JobReader::read_trend() {
  JobSpec::Trend& trend = job_.trend;
  if (const auto tests = toml_.texts("trend.tests")) {
    const std::vector<std::string> known = trend_test_names();
    const auto later = later_trend_tests();
    if (tests->empty()) refuse("trend.tests", "an empty list", join(known, " | "));
    trend.tests.clear();
    for (const std::string& test : *tests) {
      if (contains(trend.tests, test))
        refuse("trend.tests", fmt::format("\"{}\" twice", test), "each test once");
      else if (contains(known, test))
        trend.tests.push_back(test);
      else if (std::find(later.begin(), later.end(), test) != later.end()) {
        toml_.problem("trend.tests", fmt::format("tests: \"{}\" will come with a later version; there are {}", test,
                                                 join(known, " | ")));
      } else
        refuse("trend.tests", fmt::format("\"{}\"", test), join(known, " | ") + did_you_mean(test, known));
    }
  }
  number("trend.alpha", trend.alpha);
  choice("trend.per", trend.per);
  if (toml_.has("trend.target")) number("trend.target", trend.target.emplace(1));
  choice("field.control", job_.field.control);
  number("field.rate", job_.field.rate);
}

void JobReader::read_output() {
  JobSpec::Output& output = job_.output;
  const auto words = [this](const std::string& key, const std::vector<std::string>& known,
                            const std::vector<std::string>& other, std::string_view other_key,
                            std::vector<std::string>& target) {
    const auto names = toml_.texts(key);
    if (!names) return;
    target.clear();
    for (const std::string& name : *names) {
      if (contains(known, name)) {
        if (!contains(target, name)) target.push_back(name);
      } else if (contains(other, name)) {
        toml_.problem(key, fmt::format("{}: '{}' belongs in {}", name_of(key), name, other_key));
      } else {
        const std::string near = did_you_mean(name, known);
        toml_.problem(key, fmt::format("{}: unknown name '{}'{}", name_of(key), name,
                                       near.empty() ? "; 'lagscape explain' lists them all" : near));
      }
    }
  };
  words("output.maps", map_words(), cube_words(), "output.cubes", output.maps);
  words("output.cubes", cube_words(), map_words(), "output.maps", output.cubes);
  if (toml_.has("output.maps") && toml_.array_size("output.maps") == 0 && !toml_.is_text("output.maps")) {
    refuse("output.maps", "no names", "at least one map or group");
  }
  whole_number("output.deflate", output.deflate);

  if (!toml_.has("output.file"))
    return toml_.problem("output.file", "output.file is missing: name the result, such as file = \"result.nc\"");
  const auto file = toml_.text("output.file");
  if (!file) return;
  const std::string key = "output.file";
  if (!file->ends_with(".nc") || fs::path(*file).stem().empty() || fs::path(*file).filename() == ".nc") {
    refuse(key, fmt::format("\"{}\"", *file), "a file name that ends in .nc");
  }
  std::string rest = *file;
  const std::size_t mark = rest.find(kVariableMark);
  if (mark != std::string::npos) rest.erase(mark, kVariableMark.size());
  if (rest.find_first_of("{}") != std::string::npos)
    refuse(key, fmt::format("\"{}\"", *file), "no braces but one {variable}");
  if (job_.input.variables.size() > 1 && mark == std::string::npos) {
    refuse(key, fmt::format("\"{}\"", *file), "{variable} in the name, because several variables are analysed");
  }
  output.file = resolve(key, *file);
}

/// A result (a panel of sites also gives NAME_cubes.nc and NAME.csv) must not be put in place of what is read.
void JobReader::check_output_is_no_input() {
  std::vector<std::string> inputs = job_.input.files;
  if (job_.input.mask) inputs.push_back(job_.input.mask->file);
  if (job_.input.sites) inputs.push_back(*job_.input.sites);
  for (const std::string& variable : job_.input.variables) {
    std::string path = job_.output.file;
    if (path.empty()) return;
    if (const std::size_t mark = path.find(kVariableMark); mark != std::string::npos)
      path.replace(mark, kVariableMark.size(), variable);
    const std::string stem = path.ends_with(".nc") ? path.substr(0, path.size() - 3) : path;
    for (const std::string& result : {path, stem + "_cubes.nc", stem + ".csv"}) {
      for (const std::string& input : inputs) {
        if (same_file(result, input)) {
          refuse("output.file", fmt::format("a result that would be written over the input {}", input), "another name");
        }
      }
    }
  }
}

std::string value_text(const std::string& text) { return toml_text(text); }
std::string value_text(double number) { return number_text(number); }
std::string value_text(const StepsOrDuration& length) {
  return std::holds_alternative<std::int64_t>(length) ? fmt::format("{}", std::get<std::int64_t>(length))
                                                      : toml_text(std::get<std::string>(length));
}

template <class Range>
std::string list_text(const Range& values) {
  std::vector<std::string> parts;
  for (const auto& value : values) parts.push_back(value_text(value));
  return "[" + join(parts, ", ") + "]";
}

std::string base_name(const std::string& path) { return fs::path(path).filename().string(); }

/// Collects "key = value" lines; a table's head is written before its first line.
class TomlLines {
 public:
  template <class Value>
  void add(std::string_view key, const Value& value) {
    line(key, value_text(value));
  }
  template <class Value>
  void add(std::string_view key, const std::optional<Value>& value) {
    if (value) add(key, *value);
  }
  template <class Value>
  void add_list(std::string_view key, const Value& values) {
    line(key, list_text(values));
  }
  template <class Enum>
  void add_choice(std::string_view key, Enum value) {
    line(key, toml_text(choice_word(key, value)));
  }
  void line(std::string_view key, const std::string& value) {
    const std::size_t dot = key.find('.');
    const std::string table(key.substr(0, dot == std::string_view::npos ? 0 : dot));
    if (table != table_) text_ += fmt::format("{}[{}]\n", text_.empty() ? "" : "\n", table);
    table_ = table;
    text_ += fmt::format("{} = {}\n", dot == std::string_view::npos ? key : key.substr(dot + 1), value);
  }
  [[nodiscard]] const std::string& text() const { return text_; }

 private:
  std::string text_, table_;
};

void write_input(const JobSpec::Input& input, TomlLines& lines) {
  std::vector<std::string> names;
  for (const std::string& file : input.files) names.push_back(base_name(file));
  lines.add_list("input.files", names);
  if (input.variables.size() == 1)
    lines.add("input.variable", input.variables.front());
  else
    lines.add_list("input.variable", input.variables);
  for (const auto& [dimension, value] : input.select) lines.add("input.select." + toml_text(dimension), value);
  if (input.period) lines.add_list("input.period", std::array{input.period->first, input.period->second});
  if (input.box) lines.add_list("input.box", *input.box);
  if (input.mask) {
    lines.add("input.mask.file", base_name(input.mask->file));
    lines.add("input.mask.variable", input.mask->variable);
    lines.add("input.mask.min", input.mask->min);
    lines.add("input.mask.max", input.mask->max);
    if (!input.mask->values.empty()) lines.add_list("input.mask.values", input.mask->values);
  }
  if (!input.missing_values.empty()) lines.add_list("input.missing_values", input.missing_values);
  if (input.valid_range) lines.add_list("input.valid_range", *input.valid_range);
  if (input.sites) lines.add("input.sites", base_name(*input.sites));
  lines.add("input.duplicates", input.duplicates);
  lines.add("input.longitude", input.longitude);
  if (input.time) {
    lines.add("input.time.unit", input.time->unit);
    lines.add("input.time.calendar", input.time->calendar);
    lines.add("input.time.step", input.time->step);
  }
}

void write_prepare_and_memory(const JobSpec& job, TomlLines& lines) {
  lines.add_choice("prepare.season", job.prepare.season);
  lines.add("prepare.harmonics", job.prepare.harmonics);
  lines.add_choice("prepare.remove", job.prepare.remove);
  lines.add("prepare.window", job.prepare.window);
  lines.add("prepare.min_share", job.prepare.min_share);
  lines.add_choice("prepare.share_of", job.prepare.share_of_period);
  lines.add("prepare.min_count", static_cast<double>(job.prepare.min_count));
  lines.add("memory.max_lag", job.memory.max_lag.value_or(StepsOrDuration("auto")));
  lines.add("memory.confidence", job.memory.confidence);
  lines.add_choice("memory.limits", job.memory.limits);
  if (job.memory.order == OrderRule::fixed)
    lines.add("memory.order", job.memory.fixed_order);
  else
    lines.add_choice("memory.order", job.memory.order);
  lines.add("memory.max_order", job.memory.max_order);
}

}  // namespace

JobSpec parse_job(const std::string& text, const std::string& name, const std::string& folder,
                  const std::vector<std::string>& overrides) {
  TomlReader toml = TomlReader::from_text(text, name, overrides);
  JobSpec job = JobReader(toml, folder).read();
  toml.finish();
  job.path = name;
  job.text = text;
  for (const std::string& option : overrides) job.text += fmt::format("# --set {}\n", option);
  return job;
}

JobSpec read_job(const std::string& path, const std::vector<std::string>& overrides) {
  const TomlReader toml = TomlReader::from_file(path);
  return parse_job(toml.source_text(), path, toml.folder(), overrides);
}

std::string job_text(const JobSpec& job) {
  TomlLines lines;
  if (!job.title.empty()) lines.add("title", job.title);
  write_input(job.input, lines);
  write_prepare_and_memory(job, lines);
  lines.add_list("trend.tests", job.trend.tests);
  lines.add("trend.alpha", job.trend.alpha);
  lines.add_choice("trend.per", job.trend.per);
  lines.add("trend.target", job.trend.target);
  lines.add_choice("field.control", job.field.control);
  lines.add("field.rate", job.field.rate);
  lines.add_list("output.maps", job.output.maps);
  lines.add_list("output.cubes", job.output.cubes);
  lines.add("output.deflate", job.output.deflate);
  return lines.text();
}

}  // namespace lagscape
