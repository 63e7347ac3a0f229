#include <fmt/format.h>

#include <algorithm>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/job/options.h"
#include "lagscape/measures/measure.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/report/layout.h"
#include "lagscape/report/render.h"
#include "report/methods.h"
#include "report/words.h"

namespace lagscape {
namespace {

constexpr std::size_t kIndexColumn = 38;
constexpr MapGroup kGroups[] = {MapGroup::record, MapGroup::memory, MapGroup::effective_size, MapGroup::trend,
                                MapGroup::cubes};

/// Spelling does not matter: case, and - or _.
std::string plain(std::string_view word) {
  std::string out = lower(trim(word));
  std::replace(out.begin(), out.end(), '-', '_');
  return out;
}

std::string_view last_part(std::string_view key) { return key.substr(key.rfind('.') + 1); }
std::string_view table_of(std::string_view key) {
  return key.substr(0, key.find('.') == std::string_view::npos ? 0 : key.find('.'));
}

std::string index_line(std::string_view name, std::string_view text) {
  return listed(name, text, kIndexColumn, kReportWidth);
}

std::string group_heading(MapGroup group) {
  switch (group) {
    case MapGroup::record:
      return "Maps: what there was to work with, and what preparation left";
    case MapGroup::memory:
      return "Maps: memory";
    case MapGroup::effective_size:
      return "Maps: effective sample size";
    case MapGroup::trend:
      return "Maps: trend";
    case MapGroup::cubes:
      return "Cubes, one layer a lag or order";
  }
  return "";
}

std::string maps_of(MapGroup group) {
  std::string out;
  for (const Measure& measure : measure_catalog()) {
    if (measure.group == group) out += index_line(measure.name, measure.long_name);
  }
  return out;
}

std::string index() {
  std::string out = "lagscape explain WORD tells more about any of these words.\n";
  for (const MapGroup group : kGroups) {
    if (const std::string maps = maps_of(group); !maps.empty())
      out += fmt::format("\n{}\n{}", group_heading(group), maps);
  }
  out += "\nStatus of a cell (bits of the map status)\n";
  for (const StatusBit& bit : status_bits()) out += index_line(bit.name, fmt::format("{}: {}", bit.mask, bit.words));
  out += "\nTrend tests\n";
  for (const TrendTest& test : trend_tests()) out += index_line(test.name, test.summary);
  out += "\nMethods\n";
  for (const Method& method : methods()) out += index_line(method.name, method.title);
  out += "\nKeys of a job file\n";
  for (const JobOption& option : job_options()) {
    const std::string_view value = option.default_text;
    out += index_line(option.key,
                      fmt::format("{}{}", option.type, value.empty() ? "" : fmt::format(", default {}", value)));
  }
  return out;
}

std::string measure_text(const Measure& measure) {
  std::string out =
      fmt::format("{}: {}\n\n", measure.name, wrapped(measure.long_name, kReportWidth, 2, measure.name.size() + 2));
  out += wrapped(measure.meaning, kReportWidth) + "\n\n";
  out += fmt::format("Unit\n  {}\n", unit_words(measure.unit));
  out += paragraph("Formula", measure.formula) + paragraph("Source", measure.source) +
         paragraph("Cautions", measure.cautions);
  if (measure.group == MapGroup::cubes)
    return out + fmt::format("In a job\n  [output] cubes = [\"{}\"]\n", measure.name);
  out += fmt::format("In a job\n  [output] maps = [\"{}\"]\n", measure.name);
  return out + fmt::format("Group of maps\n  {}{}\n", group_name(measure.group), measure.standard ? ", standard" : "");
}

std::string group_text(std::string_view name) {
  std::string out;
  for (const Measure& measure : measure_catalog()) {
    if (name == "standard" ? measure.standard : name == plain(group_name(measure.group)))
      out += index_line(measure.name, measure.long_name);
  }
  return out.empty() ? out
                     : fmt::format("The group of maps {}\n{}", name == "effective_size" ? "effective-size" : name, out);
}

std::string status_text(const StatusBit& bit) {
  return fmt::format(
      "{}: bit {} of the map status, \"{}\"\n\n{}\n\n{}\n", bit.name, bit.mask, bit.words,
      wrapped(bit.meaning, kReportWidth),
      bit.fatal ? "Such a cell has no estimates." : "Such a cell keeps its estimates; look at them with care.");
}

std::string option_text(const JobOption& option) {
  std::string out = fmt::format("{}: a key of the job file\n\n{}\n\n", option.key, wrapped(option.help, kReportWidth));
  out += fmt::format("Value\n  {}\n", option.type);
  const std::string range = range_text(option);
  if (!range.empty()) out += paragraph("Range", range);
  if (!option.unit.empty()) out += paragraph("Unit", option.unit);
  out += fmt::format("Default\n  {}\n", option.default_text.empty() ? "none" : option.default_text);
  const std::string_view table = table_of(option.key);
  out += table.empty() ? "In a job\n  at the top of the file\n" : fmt::format("In a job\n  below [{}]\n", table);
  return out + fmt::format("In the shell\n  --set {}=VALUE\n", option.key);
}

std::string table_text(std::string_view table) {
  std::string out;
  for (const JobOption& option : job_options()) {
    if (table_of(option.key) == table) out += index_line(option.key, option.help);
  }
  return out.empty() ? out : fmt::format("Keys of the job file below [{}]\n{}", table, out);
}

std::string test_text(const TrendTest& test) {
  std::string out = fmt::format("{}: a trend test\n\n{}\n\n", test.name, wrapped(test.summary, kReportWidth));
  out += paragraph("What its p-value rests on", test.assumptions) + paragraph("Source", test.source) +
         paragraph("Cost", test.cost);
  return out + fmt::format("In a job\n  [trend] tests = [\"{}\"]\n", test.name);
}

std::string class_text(const TrendClass& trend_class) {
  return fmt::format("{}: value {} of the map trend_class, \"{}\"\n", trend_class.name, trend_class.value,
                     trend_class.words);
}

std::string method_text(const Method& method) {
  return fmt::format("{}: {}\n\n{}\n\n{}", method.name, method.title, wrapped(method.text, kReportWidth),
                     paragraph("Source", method.source));
}

bool names_method(const Method& method, const std::string& word) {
  const std::vector<std::string> others = split(method.also, ' ');
  return plain(method.name) == word || std::find(others.begin(), others.end(), word) != others.end();
}

std::string later_text(const std::string& word) {
  for (const std::string_view key : later_options()) {
    if (word == plain(key) || word == plain(last_part(key)))
      return fmt::format("{}: a key of the job file that a later version will read\n", key);
  }
  for (const std::string_view test : later_trend_tests()) {
    if (word == plain(test)) return fmt::format("{}: a trend test that a later version will have\n", test);
  }
  return "";
}

/// Everything the word may mean, in the order of the index.
std::vector<std::string> meanings(const std::string& word) {
  std::vector<std::string> found;
  const auto add = [&found](std::string text) {
    if (!text.empty()) found.push_back(std::move(text));
  };
  if (const Measure* measure = find_measure(word)) add(measure_text(*measure));
  add(group_text(word));
  for (const StatusBit& bit : status_bits()) {
    if (word == plain(bit.name) || word == lower(bit.words) || word == fmt::format("{}", bit.mask))
      add(status_text(bit));
  }
  for (const TrendClass& trend_class : trend_classes()) {
    if (word == plain(trend_class.name)) add(class_text(trend_class));
  }
  for (const TrendTest& test : trend_tests()) {
    if (word == plain(test.name)) add(test_text(test));
  }
  for (const Method& method : methods()) {
    if (names_method(method, word)) add(method_text(method));
  }
  add(table_text(word));
  for (const JobOption& option : job_options()) {
    if (word == plain(option.key) || word == plain(last_part(option.key))) add(option_text(option));
  }
  add(later_text(word));
  return found;
}

std::vector<std::string> all_words() {
  std::vector<std::string> words = {"standard"};
  for (const MapGroup group : kGroups) words.emplace_back(group_name(group));
  for (const Measure& measure : measure_catalog()) words.emplace_back(measure.name);
  for (const StatusBit& bit : status_bits()) words.emplace_back(bit.name);
  for (const TrendClass& trend_class : trend_classes()) words.emplace_back(trend_class.name);
  for (const TrendTest& test : trend_tests()) words.emplace_back(test.name);
  for (const Method& method : methods()) words.emplace_back(method.name);
  for (const JobOption& option : job_options()) {
    words.emplace_back(option.key);
    words.emplace_back(last_part(option.key));
  }
  return words;
}

std::string cell_of_table(std::string_view text) {
  std::string out;
  for (const char c : text) out += c == '|' ? std::string("\\|") : std::string(1, c);
  return out;
}

}  // namespace

std::string explain_text(const std::string& word, const std::vector<std::string>& others) {
  if (trim(word).empty()) return index();
  const std::vector<std::string> found = meanings(plain(word));
  if (found.empty()) {
    std::vector<std::string> known = all_words();
    known.insert(known.end(), others.begin(), others.end());
    throw Error(ErrorKind::usage,
                fmt::format("there is nothing to explain about '{}'{}", word, did_you_mean(word, known)), "",
                "'lagscape explain' lists all maps, statuses, job keys, trend tests and methods");
  }
  return join(found, "\n");
}

std::string catalogue_markdown() {
  std::string out = "| map | unit | meaning | source |\n|---|---|---|---|\n";
  for (const Measure& measure : measure_catalog()) {
    const std::string name = fmt::format("`{}`{}", measure.name,
                                         measure.group == MapGroup::cubes ? " (cube)"
                                         : measure.standard               ? ""
                                                                          : " *");
    out += fmt::format("| {} | {} | {} | {} |\n", name, cell_of_table(unit_words(measure.unit)),
                       cell_of_table(measure.long_name), cell_of_table(measure.source));
  }
  return out + "\n`*`: not in the group `standard`; ask for it by name, by its group, or with `\"all\"`.\n";
}

}  // namespace lagscape
