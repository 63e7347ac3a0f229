#pragma once
#include <array>
#include <cstddef>
#include <cstdint>
#include <limits>

#include "lagscape/stats/distributions.h"
#include "lagscape/stats/kernels.h"

namespace lagscape {

inline constexpr double kMissing = std::numeric_limits<double>::quiet_NaN();
/// Trend tests a build may declare.
inline constexpr std::size_t kMaxTrendTests = 12;

/// What a trend test may use: the least-squares trend of one cell (season and trend in one fit) and what its residuals
/// look like.
struct TrendInput {
  double slope = kMissing;                    ///< per step
  double slope_factor = kMissing;             ///< variance of the slope / variance of white residuals
  double sum_squares = kMissing;              ///< of the residuals
  double values = 0;                          ///< m
  double parameters = 0;                      ///< q
  double effective_size = kMissing;           ///< independent values for a trend under AR(1) noise, gaps allowed for
  const StudentQuantile* quantile = nullptr;  ///< of the two-sided confidence limits
};

/// What a trend test found. Slopes are per step.
struct TrendVerdict {
  double p = kMissing;
  double standard_error = kMissing;
  double half_width = kMissing;  ///< of the slope's confidence limits
};

/// One lag column of a tile: entry k is at data[k * kLanes]; NaN where there is no estimate.
struct LagColumn {
  const double* data = nullptr;
  std::size_t size = 0;
  [[nodiscard]] double operator[](std::size_t lag) const noexcept { return lag < size ? data[lag * kLanes] : kMissing; }
};

/// Everything the stages computed for one cell: what measures choose from. Times are in lag units, rates per year or
/// decade; NaN where there is no estimate.
struct CellResult {
  std::int16_t status = 0;
  // Record
  double valid_count = 0, valid_share = 0, first_time = kMissing, last_time = kMissing, longest_gap = kMissing;
  double mean = kMissing, mean_low = kMissing, mean_high = kMissing;
  double residual_sd = kMissing, share_season = kMissing, share_trend = kMissing;
  double dropped_values = 0;  ///< in seasons with a single value
  // Memory
  double lag1 = kMissing, lag1_corrected = kMissing, ljung_box_p = kMissing;
  int order = 0;                   ///< 0: no model
  bool order_uncorrected = false;  ///< order above 3: no bias correction exists
  std::array<double, kMaxOrder> coefficients{};
  double innovation_sd = kMissing;
  double time = kMissing, time_low = kMissing, time_high = kMissing;
  double e_folding = kMissing, zero_crossing = kMissing, integral = kMissing, geyer = kMissing, sokal = kMissing,
         ar1_time = kMissing, first_inside_limits = kMissing;
  // Effective sizes
  double effective_size = kMissing, effective_size_variance = kMissing, effective_size_trend = kMissing;
  // Trend
  double slope = kMissing, slope_low = kMissing, slope_high = kMissing, total = kMissing;
  double p = kMissing, p_independent = kMissing;
  std::array<double, kMaxTrendTests> p_of_test{};
  double detectable = kMissing, years_to_detect = kMissing;
  // Filled by the field step
  double p_field = kMissing;
  int trend_class = -1;
  // Cubes over lag 0 .. max_lag
  LagColumn autocorrelation, autocorrelation_limit, partial_autocorrelation, autocovariance, pair_count;
};

}  // namespace lagscape
