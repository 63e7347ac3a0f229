#pragma once
#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "lagscape/measures/cell_result.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/stats/ar_model.h"
#include "lagscape/stats/design.h"

namespace lagscape {

/// Fewest values of a cell that is analysed, whatever the job allows: an autoregression of order 1 needs 20 usable
/// terms, a trend 20 values.
inline constexpr std::size_t kFewestValues = 21;

/// Filters that replace the series before the season is fitted.
enum class Filter { none, difference, running_mean };

/// What the stages need to know; made once per job, shared by all threads.
struct AnalysisSettings {
  explicit AnalysisSettings(const DesignColumns& prepare, const DesignColumns& trend, double confidence, double alpha);

  Design prepare_design;
  /// Mean, season and straight line: the trend's own fit. The same as prepare_design when the job removes a linear
  /// trend.
  Design trend_design;
  bool separate_trend_fit = false;
  Filter filter = Filter::none;
  std::size_t filter_length = 1;  ///< steps: of the difference, or the (odd) window of the running mean

  double min_share = 0.8;
  bool share_of_period = false;
  double min_count = 30;

  bool bartlett_limits = true;
  OrderCriterion criterion = OrderCriterion::bic;
  int fixed_order = 1, max_order = 10;

  std::size_t cube_lags = 0;  ///< max_lag + 1 of the cubes, 0 without cubes
  bool want_partial = false;  ///< of the cubes, the one that costs a recursion

  std::vector<const TrendTest*> tests;  ///< the first one decides
  std::optional<double> target;         ///< trend to be detected, per year or decade
  double steps_per_rate = 12;           ///< steps in the year or decade of rates
  double steps_per_year = 12;
  double lag_units_per_step = 1;
  std::vector<double> step_times;  ///< CF value of each step

  double normal_quantile;           ///< two-sided, at the confidence
  StudentQuantile limits_quantile;  ///< of confidence limits
  StudentQuantile test_quantile;    ///< at 1 - alpha/2
};

/// Runs the stages of one thread on tiles of kLanes cells: summary, preparation, autoregression, autocorrelation,
/// effective sizes, trend. Each stage is computed once and shared by all measures. Allocates only when made.
class Analysis {
 public:
  explicit Analysis(const AnalysisSettings& settings);
  ~Analysis();
  Analysis(Analysis&&) noexcept;

  /// tile: time-major, kLanes cells, missing = NaN, 64-byte aligned; the first `cells` lanes are cells, the rest is
  /// ignored. The results (and the lag columns they point to) stay valid until the next call.
  [[nodiscard]] std::span<const CellResult> analyse(const double* tile, std::size_t cells) noexcept;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace lagscape
