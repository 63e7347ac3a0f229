#include "lagscape/io/survey.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <optional>
#include <regex>
#include <set>

#include "io/csv_panel.h"
#include "io/customary_fills.h"
#include "io/nc_archive.h"
#include "io/step_reader.h"
#include "io/time_decode.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr std::size_t kFewestSteps = 4, kMostSteps = 400;     // sampled
constexpr std::size_t kEnoughValues = 200'000;                // in the sampled steps together, where maps are small
constexpr std::size_t kSampleBytes = std::size_t{64} << 20U;  // decompressed for one sampled step, at most
constexpr double kAlmostAll = 0.99;

void add_quirk(SurveyReport& report, const std::string& quirk) {
  if (std::find(report.quirks.begin(), report.quirks.end(), quirk) == report.quirks.end())
    report.quirks.push_back(quirk);
}

// ---- which variables ------------------------------------------------------------------------------------------------

/// Names that other variables use as coordinates, bounds or mappings: no data of their own.
std::set<std::string> helpers(const NcFile& file, const std::vector<NcVariable>& variables) {
  std::set<std::string> names;
  for (const NcVariable& one : variables) {
    const Attributes attributes = file.attributes(one);
    for (const char* key : {"coordinates", "bounds", "climatology", "grid_mapping"})
      for (const std::string& word : split(text_attribute(attributes, key), ' '))
        names.insert(word.substr(0, word.find(':')));
  }
  return names;
}

std::vector<NcVariable> data_variables(const NcFile& file) {
  const std::vector<NcVariable> all = file.variables();
  const std::set<std::string> aside = helpers(file, all);
  std::vector<NcVariable> data;
  for (const NcVariable& one : all) {
    const bool own_axis = one.dims.size() == 1 && one.name() == one.dims[0].name;
    if (is_number_type(one.type) && !one.dims.empty() && !own_axis && aside.count(one.name()) == 0) data.push_back(one);
  }
  return data;
}

// ---- what to add to a job
// ---------------------------------------------------------------------------------------------

std::string selection_line(const Selection& select) {
  std::vector<std::string> parts;
  for (const auto& [name, value] : select) parts.push_back(fmt::format("{} = {}", name, number_text(value)));
  return fmt::format("select = {{ {} }}", join(parts, ", "));
}

std::string choices(const OpenDimension& dimension) {
  std::vector<std::string> values;
  for (const double value : dimension.values) values.push_back(number_text(value));
  return fmt::format("{} is one of {}{}", dimension.name, join(values, ", "),
                     dimension.units.empty() ? "" : " " + dimension.units);
}

/// A selection that works, and what it says to the user.
void choose(const NcFile& file, SurveyedVariable& variable) {
  try {
    static_cast<void>(find_layout(file, variable.name, {}));
  } catch (const NeedsSelection& open) {
    std::vector<std::string> parts;
    for (const OpenDimension& dimension : open.dimensions()) {
      variable.select.emplace_back(dimension.name, dimension.values.front());
      parts.push_back(choices(dimension));
    }
    variable.to_do = fmt::format("{} ({})", selection_line(variable.select), join(parts, "; "));
  }
}

/// "hours" with the date elsewhere ("ANALYSIS time from 20200101") becomes "hours since 2020-01-01".
std::optional<TimeText> described_date(const Attributes& attributes, const std::string& unit) {
  static const std::regex kUnit("(seconds?|minutes?|hours?|days?|weeks?|months?|years?)");
  static const std::regex kDate("(^|[^0-9])([12][0-9]{3})-?([01][0-9])-?([0-3][0-9])([^0-9]|$)");
  if (!std::regex_match(unit, kUnit)) return std::nullopt;
  for (const char* key : {"long_name", "description", "comment", "note"}) {
    const std::string text = text_attribute(attributes, key);
    std::smatch found;
    if (std::regex_search(text, found, kDate))
      return TimeText{fmt::format("{} since {}-{}-{}", unit, found[2].str(), found[3].str(), found[4].str()), ""};
  }
  return std::nullopt;
}

/// A time unit that would do, for a unit that names no date; nothing if none is found.
std::optional<TimeText> mended_time(const NcFile& file, const SurveyedVariable& variable) {
  const VariableLayout layout = find_layout(file, variable.name, variable.select);
  if (!layout.time || layout.time->type == NC_CHAR || layout.time->type == NC_STRING) return std::nullopt;
  const Attributes attributes = file.attributes(*layout.time);
  const std::string unit = lower(text_attribute(attributes, "units"));
  if (auto found = described_date(attributes, unit)) return found;
  return written_dates(unit, file.doubles(*layout.time));
}

// ---- sampling -------------------------------------------------------------------------------------------------------

std::size_t file_step(const ArchiveFile& file, std::size_t row) {
  for (const StepRun& run : file.runs)
    if (row < run.row + run.count) return run.file_step + row - run.row;
  return 0;
}

// Rows in the middle of the map if whole maps would cost too much: chunks that are long in time are decompressed whole.
CellRange sample_cells(const ArchivePlan& plan) {
  const Geometry& geometry = plan.panel.geometry;
  const ArchiveFile& part = plan.files.front();
  const NcFile file = NcFile::open(part.path);
  const VariableLayout layout = reopened(file, part.layout);
  std::vector<std::size_t> chunk(layout.variable.dims.size() + 1, 1);
  int storage = NC_CONTIGUOUS;
  const bool chunked =
      nc_inq_var_chunking(layout.variable.group, layout.variable.id, &storage, chunk.data()) == NC_NOERR &&
      storage == NC_CHUNKED;
  const auto time = layout.position(DimRole::time);
  const std::size_t steps = chunked && time ? chunk[*time] : 1;
  const std::size_t row_bytes = geometry.cols * steps * part.rules.bytes();
  const std::size_t rows =
      std::clamp<std::size_t>(kSampleBytes / std::max<std::size_t>(1, row_bytes), 1, geometry.rows);
  return {(geometry.rows - rows) / 2 * geometry.cols, rows * geometry.cols};
}

struct Sample {
  ValueCounts counts;
  std::size_t values = 0, steps = 0;
  double low = std::numeric_limits<double>::infinity(), high = -low;
  CustomaryFills fills;

  explicit Sample(const ValueRules& rules) : fills(rules.scale, rules.offset, rules.type == RawType::f32) {}
};

Sample take_sample(const ArchivePlan& plan) {
  const CellRange cells = sample_cells(plan);
  StepReader reader(plan);
  Sample sample(plan.files.front().rules);
  const std::size_t stored = plan.holders.size();
  const bool whole_maps = cells.count == plan.panel.geometry.cells();  // else each step is costly
  const std::size_t most = whole_maps ? kMostSteps : kFewestSteps;
  const std::size_t wanted = std::min(stored, std::clamp(kEnoughValues / cells.count, kFewestSteps, most));
  for (std::size_t i = 0; i < wanted; ++i) {
    const Holder& holder = plan.holders[wanted == 1 ? 0 : i * (stored - 1) / (wanted - 1)];
    for (const double value :
         reader.read(holder.file, file_step(plan.files[holder.file], holder.row), cells, sample.counts)) {
      sample.low = std::fmin(sample.low, value);
      sample.high = std::fmax(sample.high, value);
      sample.fills.add(value);
    }
    sample.values += cells.count;
    ++sample.steps;
  }
  return sample;
}

void note_fills(const std::string& name, const CustomaryFills& fills, SurveyReport& report) {
  const auto suspects = fills.suspects();
  if (suspects.empty()) return;
  std::vector<std::string> values, seen;
  for (const auto& [value, count] : suspects) {
    values.push_back(number_text(value));
    seen.push_back(fmt::format("{} ({} in the sample)", number_text(value), count));
  }
  const bool others = fills.low() <= fills.high();
  const std::string rest = others ? fmt::format("the other values lie between {} and {}", human_number(fills.low()),
                                                human_number(fills.high()))
                                  : "there are no other values";
  add_quirk(report, fmt::format("{}: {} looks like a mark of missing values that the file does not declare; {}. If it "
                                "is one, add to [input] of the job: missing_values = [{}]",
                                name, join(seen, ", "), rest, join(values, ", ")));
}

void note_all_missing(const std::string& name, std::size_t values, SurveyReport& report) {
  add_quirk(report, fmt::format("{}: all {} sampled values are missing; there is nothing to analyse in them", name,
                                grouped(values)));
}

void note_values(const ArchivePlan& plan, const Sample& sample, SurveyReport& report) {
  const std::string& name = plan.panel.variable;
  const ValueRules& rules = plan.files.front().rules;
  const auto count = [](std::size_t n) { return static_cast<double>(n); };
  note_fills(name, sample.fills, report);
  if (sample.low > sample.high) note_all_missing(name, sample.values, report);
  if (sample.counts.infinite > 0)
    add_quirk(report, fmt::format("{}: infinite values, taken as missing ({} of {} sampled)", name,
                                  sample.counts.infinite, sample.values));
  if (count(sample.counts.out_of_range) > kAlmostAll * count(sample.values))
    add_quirk(report,
              fmt::format(
                  "{}: the valid range of the file rejects nearly all values; it was probably meant for unpacked ones",
                  name));
  else if (sample.counts.out_of_range > 0)
    add_quirk(report, fmt::format("{}: {} of {} sampled values lie outside the valid range of the file", name,
                                  sample.counts.out_of_range, sample.values));
  for (const double missing : rules.missing) {
    const double unpacked = missing * rules.scale + rules.offset;
    if (sample.low < unpacked && unpacked < sample.high && sample.counts.fill > 0)
      add_quirk(report,
                fmt::format("{}: the fill value {} lies among the values; only what equals it exactly is missing", name,
                            missing));
  }
}

void note_units(const SurveyedVariable& variable, SurveyReport& report) {
  if (variable.units.empty()) add_quirk(report, fmt::format("{}: has no unit", variable.name));
  if (variable.units == "C")
    add_quirk(report,
              fmt::format("{}: unit 'C' is the coulomb to unit libraries; it is carried as text (degC is meant?)",
                          variable.name));
}

void note_bounds(const NcFile& file, SurveyReport& report) {
  for (const NcVariable& one : file.variables()) {
    const std::string bounds = text_attribute(file.attributes(one), "bounds");
    if (!bounds.empty() && !file.find(bounds, one.group))
      add_quirk(report, fmt::format("{} names bounds '{}', which are not in the file", one.name(), bounds));
  }
}

// ---- one variable ---------------------------------------------------------------------------------------------------

InputRequest request_for(const SurveyReport& report, const SurveyedVariable& variable) {
  InputRequest request;
  request.files = report.files;
  request.variable = variable.name;
  request.select = variable.select;
  return request;
}

void fill_in(const ArchivePlan& plan, SurveyedVariable& variable, SurveyReport& report) {
  variable.usable = true;
  variable.panel = plan.panel;
  for (const std::string& note : plan.panel.notes) add_quirk(report, note);
  const Sample sample = take_sample(plan);
  const ValueCounts& counts = sample.counts;
  variable.missing_share =
      static_cast<double>(counts.fill + counts.infinite + counts.out_of_range) / static_cast<double>(sample.values);
  variable.sampled_steps = sample.steps;
  note_values(plan, sample, report);
}

// A time unit without its date stops every variable; if the date is found elsewhere, the survey goes on with it.
bool mend(const NcFile& file, SurveyedVariable& variable, SurveyReport& report) {
  const auto text = mended_time(file, variable);
  if (!text) return false;
  InputRequest request = request_for(report, variable);
  request.time = InputRequest::TimeMend{text->units, std::nullopt, std::nullopt};
  if (!text->calendar.empty()) request.time->calendar = text->calendar;
  const auto plan = plan_archive(request);
  report.mend_time = mend_line(*text);
  add_quirk(report, fmt::format("the time unit names no date; the times are read as '{}', as their description or "
                                "values suggest",
                                text->units));
  fill_in(*plan, variable, report);
  return true;
}

// Refuses files of which only some have the dimension of which the first one needs an entry to be chosen.
void require_dimensions(const SurveyReport& report, const SurveyedVariable& variable) {
  for (const std::string& path : report.files) {
    const NcFile file = NcFile::open(path);
    const auto held = file.find(variable.name);
    if (!held)
      throw Error(ErrorKind::input, fmt::format("{} has no such variable, {} has", path, report.files.front()), "",
                  "survey the files that hold it by themselves");
    for (const auto& [name, value] : variable.select) {
      const bool known = std::any_of(held->dims.begin(), held->dims.end(),
                                     [&wanted = name](const NcDim& d) { return d.name == wanted; });
      if (!known)
        throw Error(ErrorKind::input,
                    fmt::format("these files do not belong together: in {} it has a dimension '{}', in {} it has none",
                                report.files.front(), name, path),
                    "", "survey the files of each archive by themselves");
    }
  }
}

void examine(const NcFile& file, SurveyedVariable& variable, SurveyReport& report) {
  try {
    choose(file, variable);
    require_dimensions(report, variable);
    try {
      fill_in(*plan_archive(request_for(report, variable)), variable, report);
    } catch (const Error&) {
      if (!mend(file, variable, report)) throw;
    }
  } catch (const Error& problem) {
    variable.usable = false;
    // Of several files, which ones it is about.
    const bool several = report.files.size() > 1 && !problem.where().empty();
    variable.why_not = several ? fmt::format("{} ({})", problem.problem(), problem.where()) : problem.problem();
    variable.to_do = problem.fix();
  }
}

std::vector<std::string> names_of(const std::vector<NcVariable>& variables) {
  std::vector<std::string> names;
  for (const NcVariable& one : variables) names.push_back(one.path);
  return names;
}

std::string some_of(const std::vector<std::string>& names) {
  constexpr std::size_t kMost = 4;
  if (names.empty()) return "no data";
  const std::size_t shown = std::min(names.size(), kMost);
  return join(std::span(names).first(shown), ", ") + (shown < names.size() ? ", ..." : "");
}

// Refuses files of different archives: those that share no variable with the first one.
void require_shared_variable(const NcFile& first, const std::vector<std::string>& names, const NcFile& other) {
  const auto held = [&](const std::string& name) { return other.find(name).has_value(); };
  if (names.empty() || std::any_of(names.begin(), names.end(), held)) return;
  throw Error(ErrorKind::input,
              fmt::format("these files do not belong together: {} has {}, {} has {}", first.path(), some_of(names),
                          other.path(), some_of(names_of(data_variables(other)))),
              "files: " + first.path() + " and " + other.path(), "survey the files of each archive by themselves");
}

void survey_netcdf(SurveyReport& report) {
  const NcFile first = NcFile::open(report.files.front());
  const std::vector<std::string> names = names_of(data_variables(first));
  for (const std::string& path : report.files) {
    const NcFile file = NcFile::open(path);
    report.kinds.push_back(file.kind());
    require_shared_variable(first, names, file);
  }
  note_bounds(first, report);
  for (const NcVariable& one : data_variables(first)) {
    SurveyedVariable variable;
    const Attributes attributes = first.attributes(one);
    variable.name = one.path;
    variable.long_name = text_attribute(attributes, "long_name");
    variable.units = text_attribute(attributes, "units");
    examine(first, variable, report);
    if (variable.usable) note_units(variable, report);
    report.variables.push_back(std::move(variable));
  }
}

void survey_panel(const std::string& sites, SurveyReport& report, const Log& log) {
  report.kinds.assign(report.files.size(), "CSV panel");
  InputRequest request;
  request.files = report.files;
  request.variable = "value";
  if (!sites.empty()) request.sites = sites;
  const auto source = open_csv_panel(request, log);
  SurveyedVariable variable;
  variable.name = source->panel().variable;
  variable.units = source->panel().units;
  variable.panel = source->panel();
  variable.usable = true;
  const std::size_t cells = variable.panel.geometry.cells(), steps = variable.panel.axis.size();
  std::vector<double> values(cells * steps);
  ValueCounts counts;
  source->read({0, cells})->gather(0, cells, 1, steps, values.data(), counts);
  const auto missing = std::count_if(values.begin(), values.end(), [](double v) { return std::isnan(v); });
  variable.missing_share = static_cast<double>(missing) / static_cast<double>(values.size());
  variable.sampled_steps = steps;
  for (const std::string& note : variable.panel.notes) add_quirk(report, note);
  CustomaryFills fills(1, 0, false);
  for (const double value : values) fills.add(value);
  note_fills(variable.name, fills, report);
  if (missing == std::ssize(values)) note_all_missing(variable.name, values.size(), report);
  if (sites.empty()) add_quirk(report, "the sites have no coordinates; name a file of them: sites = \"sites.csv\"");
  if (variable.units.empty()) add_quirk(report, "no unit is stated; add a line \"# unit: m3 s-1\" to the file");
  report.variables.push_back(std::move(variable));
}

}  // namespace

SurveyReport survey_files(const std::vector<std::string>& files, const std::string& sites, const Log& log) {
  if (files.empty()) throw Error(ErrorKind::usage, "no files are named", "", "name the files to look at");
  for (const std::string& path : files) {
    std::error_code unknown;  // told when the file is opened
    if (!std::filesystem::exists(path, unknown) && !unknown)
      throw Error(ErrorKind::input, "the file does not exist", "file: " + path, "correct its name");
  }
  SurveyReport report;
  report.files = files;
  const auto panels = std::count_if(files.begin(), files.end(), is_csv_name);
  if (panels == std::ssize(files)) {
    survey_panel(sites, report, log);
  } else if (panels == 0) {
    survey_netcdf(report);
  } else {
    throw Error(ErrorKind::input, "CSV panels and netCDF files cannot be one archive", "file: " + files.front(),
                "survey them apart");
  }
  return report;
}

}  // namespace lagscape
