#pragma once
#include <array>
#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "lagscape/base/log.h"
#include "lagscape/grid/panel.h"
#include "lagscape/grid/tile_io.h"
#include "lagscape/job/job_spec.h"

namespace lagscape {

/// What does not change a result: how much of the machine to use and what may be overwritten.
struct RunOptions {
  int threads = 0;               ///< 0: all cores the process may use
  std::size_t memory_bytes = 0;  ///< 0: 60 % of what is free
  std::size_t block_cells = 0;   ///< cells handed to a thread at a time; 0: chosen from the record's length
  bool replace = false;
  std::string command;  ///< for `history`
};

/// One setting as the run will use it.
struct EffectiveSetting {
  std::string key, value, reason;  ///< reason: "" when the job said so, else why ("auto: monthly steps")
};

/// Everything a run of one variable would do; made without reading data values.
struct JobPlan {
  JobSpec job;  ///< with this variable's output.file
  Panel panel;
  std::string output;
  std::vector<std::string> output_files;
  std::vector<EffectiveSetting> settings;
  std::vector<std::string> maps, cubes;  ///< names in order
  std::size_t max_lag = 0;               ///< of the cubes, steps
  std::size_t cells = 0, excluded_cells = 0;
  std::size_t tests = 0;  ///< trend tests over the map at most
  std::vector<CellRange> bands;
  std::size_t band_bytes = 0, peak_bytes = 0, budget_bytes = 0;
  std::size_t file_reads = 0;  ///< how often each file is read through
  int threads = 1;
  std::vector<std::string> notes;
};

/// 5 %, median and 95 % over the cells that have a value.
struct Spread {
  std::size_t count = 0;
  double low = 0, median = 0, high = 0;
};

/// What a run found: the summary is made from this.
struct RunReport {
  JobPlan plan;
  std::size_t cells_analysed = 0;  ///< cells with estimates
  std::vector<std::pair<std::string, std::size_t>>
      status_counts;  ///< words of each status bit that occurs; "fine" first
  std::size_t cells_masked = 0;
  ValueCounts values;                                      ///< set aside while decoding
  std::size_t values_in_short_seasons = 0;                 ///< dropped: season with fewer than two values
  std::size_t order_uncorrected = 0;                       ///< cells whose AR order is above 3: no bias correction
  Spread decorrelation_time, effective_sample_size, lag1;  ///< time in lag units
  std::string lag_unit;
  double decorrelation_years_median = 0;
  struct TrendCounts {
    std::string test;
    std::size_t tested = 0, independent = 0, local = 0, standing = 0, rising = 0, falling = 0;
    std::size_t beyond_order = 0;  ///< standing where the fitted memory is of higher order than the test assumes
    double expected_false = 0;     ///< standing * rate: what the rate allows
  } trend;
  double wall_seconds = 0, cpu_seconds = 0, read_seconds = 0, compute_seconds = 0, write_seconds = 0;
  std::size_t peak_rss_bytes = 0;
  std::vector<std::string> files;  ///< written, final names
};

/// Called on the main thread as cells are finished.
using Progress = std::function<void(std::size_t cells_done, std::size_t cells_total, double seconds)>;

/// Cores this process may run on.
[[nodiscard]] int usable_cores();
/// Plans of a job: one per variable, in order. Throws Error.
[[nodiscard]] std::vector<JobPlan> plan_job(const JobSpec& job, const RunOptions& options, const Log& log);
/// Runs a job: one report per variable, in order. Throws Error; then no result under a final name is left of the
/// variable that failed (those finished before stay).
[[nodiscard]] std::vector<RunReport> run_job(const JobSpec& job, const RunOptions& options, const Log& log,
                                             const Progress& progress);

}  // namespace lagscape
