#pragma once
#include <memory>
#include <vector>

#include "lagscape/grid/time_axis.h"
#include "lagscape/job/job_spec.h"
#include "lagscape/measures/analysis.h"
#include "lagscape/measures/measure.h"
#include "lagscape/pipeline/run.h"

namespace lagscape {

/// A job's settings once the time axis is known: every "auto" decided, every duration in steps.
struct ResolvedSettings {
  SeasonRule season = SeasonRule::none;        ///< of the preparation
  SeasonRule trend_season = SeasonRule::none;  ///< of the trend's own fit, which sees the series before any filter
  int harmonics = 0;                           ///< per year, where a season is harmonics
  int daily_harmonics = 0;                     ///< per day, for steps shorter than a day
  std::size_t filter_length = 1;
  std::size_t max_lag = 0;             ///< of the cubes
  std::vector<EffectiveSetting> told;  ///< for people, in the order of the job file
  std::vector<std::string> notes;
};

/// Throws Error{job} for settings that the time axis makes impossible.
[[nodiscard]] ResolvedSettings resolve_settings(const JobSpec& job, const TimeAxis& axis);

/// What the stages need, from the settings. wanted_cubes: names.
[[nodiscard]] std::unique_ptr<AnalysisSettings> analysis_settings(const JobSpec& job, const ResolvedSettings& resolved,
                                                                  const TimeAxis& axis,
                                                                  const std::vector<std::string>& cubes);

}  // namespace lagscape
