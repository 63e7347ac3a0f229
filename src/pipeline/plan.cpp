#include <fmt/format.h>

#include <algorithm>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/io/archive.h"
#include "lagscape/io/result_writer.h"
#include "pipeline/describe.h"
#include "pipeline/prepared_job.h"
#include "pipeline/resources.h"

namespace lagscape {
namespace {

InputRequest request_of(const JobSpec& job, const std::string& variable) {
  InputRequest request;
  request.files = job.input.files;
  request.variable = variable;
  request.select = job.input.select;
  request.period = job.input.period;
  request.box = job.input.box;
  if (job.input.mask) {
    const JobSpec::Input::Mask& mask = *job.input.mask;
    request.mask = {mask.file, mask.variable, mask.min, mask.max, mask.values};
  }
  request.missing_values = job.input.missing_values;
  request.valid_range = job.input.valid_range;
  request.sites = job.input.sites;
  request.duplicates = job.input.duplicates == "first"  ? DuplicateRule::first
                       : job.input.duplicates == "mean" ? DuplicateRule::mean
                                                        : DuplicateRule::refuse;
  request.longitude = job.input.longitude == "as-input" ? LongitudeRule::as_input : LongitudeRule::automatic;
  if (job.input.time) request.time = {job.input.time->unit, job.input.time->calendar, job.input.time->step};
  return request;
}

/// The maps a job asks for, in the order of the catalogue, then its cubes.
std::vector<const Measure*> chosen_measures(const JobSpec& job) {
  const auto named = [](const std::vector<std::string>& words, std::string_view word) {
    return std::ranges::find(words, word) != words.end();
  };
  std::vector<const Measure*> chosen;
  for (const Measure& measure : measure_catalog()) {
    if (measure.axis != LayerAxis::none) {
      if (named(job.output.cubes, measure.name)) chosen.push_back(&measure);
      continue;
    }
    const bool by_target = measure.name == "years_to_detect";
    if (by_target && !job.trend.target) {
      if (!named(job.output.maps, measure.name)) continue;
      throw Error(ErrorKind::job, "the map years_to_detect needs a trend to be detected", job.path,
                  "add target = NUMBER to [trend], in the variable's unit per year (or decade)");
    }
    // Further tests of the job show their p-values beside the first one's.
    const bool further_test = std::any_of(job.trend.tests.begin() + 1, job.trend.tests.end(),
                                          [&](const std::string& test) { return measure.name == test_map_name(test); });
    const bool wanted = named(job.output.maps, measure.name) || named(job.output.maps, "all") ||
                        named(job.output.maps, group_name(measure.group)) ||
                        (measure.standard && named(job.output.maps, "standard"));
    if (wanted || by_target || further_test) chosen.push_back(&measure);
  }
  return chosen;
}

std::size_t layers_of(const MapSet& maps) {
  std::size_t layers = 0;
  for (const MapSpec& map : maps.maps) layers += maps.layers(map) * (map.type == MapType::f64 ? 2 : 1);
  return layers;
}

/// Memory one thread's stages and tile take.
std::size_t thread_bytes(const JobPlan& plan, std::size_t block_cells) {
  const std::size_t steps = plan.panel.axis.size();
  constexpr std::size_t kTilesOfStages = 8;  // residuals, Burg's two, lags and counts at most half a record each ...
  return steps * sizeof(double) * (block_cells + kTilesOfStages * kLanes);
}

/// Cells handed to a thread at a time: whole tiles of lanes that stay in the second-level cache.
std::size_t choose_block(std::size_t asked, std::size_t steps) {
  constexpr std::size_t kCacheBytes = std::size_t{1} << 19;
  constexpr std::size_t kMost = 8;
  if (asked > 0) return (asked + kLanes - 1) / kLanes * kLanes;
  return kLanes * std::clamp<std::size_t>(kCacheBytes / (steps * kLanes * sizeof(double)), 1, kMost);
}

void cut_into_bands(PreparedJob& job, const RunOptions& options) {
  JobPlan& plan = job.plan;
  const Geometry& geometry = plan.panel.geometry;
  const std::size_t unit = geometry.is_sites() ? 1 : geometry.cols;  // a band is whole rows, or any run of sites
  const std::size_t units = geometry.is_sites() ? geometry.cols : geometry.rows;
  const std::size_t cell_bytes =
      plan.panel.axis.size() * plan.panel.stored_bytes_per_value + layers_of(job.maps) * sizeof(float);
  constexpr std::size_t kFieldBytes = 40;  // kept of every cell until the field step
  constexpr std::size_t kProgramBytes = std::size_t{48} << 20;
  const std::size_t fixed = kProgramBytes + plan.cells * kFieldBytes +
                            static_cast<std::size_t>(plan.threads) * thread_bytes(plan, job.block_cells);
  plan.budget_bytes = options.memory_bytes > 0 ? options.memory_bytes : free_memory_bytes() / 10 * 6;
  const std::size_t left = plan.budget_bytes > fixed ? plan.budget_bytes - fixed : 0;
  const std::size_t fitting = left / (cell_bytes * unit);
  if (fitting == 0) {
    throw Error(ErrorKind::usage,
                fmt::format("memory of {} is too little: one {} of cells needs {}",
                            human_bytes(static_cast<double>(plan.budget_bytes)), geometry.is_sites() ? "site" : "row",
                            human_bytes(static_cast<double>(fixed + cell_bytes * unit))),
                plan.job.path, "give more with --memory, or fewer cubes or a shorter period in the job");
  }
  const std::size_t bands = (units + std::min(fitting, units) - 1) / std::min(fitting, units);
  for (std::size_t band = 0; band < bands; ++band) {
    const std::size_t first = units * band / bands, end = units * (band + 1) / bands;
    plan.bands.push_back({first * unit, (end - first) * unit});
    plan.band_bytes = std::max(plan.band_bytes, (end - first) * unit * cell_bytes);
  }
  plan.peak_bytes = fixed + plan.band_bytes;
  plan.file_reads = bands;
}

}  // namespace

JobSpec job_of_variable(const JobSpec& job, const std::string& variable) {
  JobSpec one = job;
  one.input.variables = {variable};
  constexpr std::string_view kPlace = "{variable}";
  for (std::size_t at = one.output.file.find(kPlace); at != std::string::npos;
       at = one.output.file.find(kPlace, at + variable.size())) {
    one.output.file.replace(at, kPlace.size(), variable);
  }
  return one;
}

PreparedJob prepare_job(const JobSpec& whole, const std::string& variable, const RunOptions& options, const Log& log) {
  PreparedJob prepared;
  JobPlan& plan = prepared.plan;
  plan.job = job_of_variable(whole, variable);
  const JobSpec& job = plan.job;
  prepared.source = open_archive(request_of(job, variable), log);
  plan.panel = prepared.source->panel();
  const TimeAxis& axis = plan.panel.axis;
  const std::size_t fewest = job.prepare.min_count;
  if (axis.size() < fewest) {
    throw Error(ErrorKind::input,
                fmt::format("the record has {} time steps; at least {} are needed", axis.size(), fewest),
                fmt::format("variable: {}, {} to {}", variable, axis.label(0), axis.label(axis.size() - 1)),
                "give more files or a longer period; prepare.min_count sets the smallest number of values");
  }
  prepared.resolved = resolve_settings(job, axis);
  prepared.measures = chosen_measures(job);
  for (const Measure* measure : prepared.measures) {
    (measure->axis == LayerAxis::none ? plan.maps : plan.cubes).emplace_back(measure->name);
  }
  plan.settings = prepared.resolved.told;
  plan.max_lag = prepared.resolved.max_lag;
  plan.notes = plan.panel.notes;
  plan.notes.insert(plan.notes.end(), prepared.resolved.notes.begin(), prepared.resolved.notes.end());
  plan.cells = plan.panel.geometry.cells();
  const std::span<const unsigned char> excluded = prepared.source->excluded();
  plan.excluded_cells = static_cast<std::size_t>(std::ranges::count(excluded, 1));
  plan.tests = plan.cells - plan.excluded_cells;
  plan.threads = options.threads > 0 ? options.threads : usable_cores();
  prepared.maps = describe_result(plan, prepared.measures, options.command);
  plan.output = job.output.file;
  plan.output_files = result_files(plan.output, prepared.maps);
  prepared.block_cells = choose_block(options.block_cells, axis.size());
  cut_into_bands(prepared, options);
  return prepared;
}

std::vector<JobPlan> plan_job(const JobSpec& job, const RunOptions& options, const Log& log) {
  std::vector<JobPlan> plans;
  for (const std::string& variable : job.input.variables)
    plans.push_back(prepare_job(job, variable, options, log).plan);
  return plans;
}

}  // namespace lagscape
