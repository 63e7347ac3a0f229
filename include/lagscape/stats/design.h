#pragma once
#include <cstddef>
#include <cstdint>
#include <vector>

#include "lagscape/base/aligned_buffer.h"
#include "lagscape/stats/kernels.h"

namespace lagscape {

/// How often a cosine-like design column of angular frequency `omega` (radians per step; 0 for linear and quadratic
/// terms) occurs: what the bias of autoregressive coefficients depends on (see ar_model.h).
struct DesignFrequency {
  double omega = 0;
  int columns = 1;
};

/// What a design is made from. Every step belongs to one group (a season of the calendar, or all to group 0), which has
/// a mean of its own; columns come on top.
struct DesignColumns {
  std::size_t steps = 0;
  std::vector<std::uint16_t> group;  ///< per step
  std::size_t groups = 1;
  std::vector<std::vector<double>> season;   ///< harmonics, each over all steps
  int trend_degree = 0;                      ///< 0 none, 1 linear, 2 quadratic in time
  std::vector<DesignFrequency> frequencies;  ///< of all columns but the mean
};

/// A least-squares design of one complete record, made once per job: dense columns are centred in each group and made
/// orthonormal, the linear (then quadratic) term last. Columns that depend on earlier ones (a sine at the Nyquist
/// frequency) are left out. A cell with gaps takes its missing rows off the complete normal equations (fit_lanes).
class Design {
 public:
  explicit Design(const DesignColumns& columns);

  [[nodiscard]] DesignView view() const noexcept {
    return {group_.size(), groups_, dense_, group_.data(), columns_.data()};
  }
  [[nodiscard]] std::size_t steps() const noexcept { return group_.size(); }
  [[nodiscard]] std::size_t groups() const noexcept { return groups_; }
  [[nodiscard]] std::size_t dense() const noexcept { return dense_; }
  [[nodiscard]] std::size_t trend_columns() const noexcept { return trend_columns_; }
  /// Raw trend terms, one after the other: time in steps from the middle of the record, and its square less its mean.
  [[nodiscard]] const double* trend_terms() const noexcept { return trend_terms_.data(); }
  /// Raw trend coefficients follow from the effects of the last orthonormal columns: upper triangle, trend_columns
  /// squared.
  [[nodiscard]] double triangle(std::size_t row, std::size_t col) const noexcept {
    return triangle_[row * trend_columns_ + col];
  }
  [[nodiscard]] const std::vector<DesignFrequency>& frequencies() const noexcept { return frequencies_; }

 private:
  std::vector<std::uint16_t> group_;
  std::size_t groups_ = 1, dense_ = 0, trend_columns_ = 0;
  AlignedVector<double> columns_;
  std::vector<double> trend_terms_, triangle_;
  std::vector<DesignFrequency> frequencies_;
};

/// Result of a fit, per lane.
struct alignas(64) LaneFit {
  double count[kLanes];          ///< values used (a season with a single value is left out)
  double dropped[kLanes];        ///< values in seasons with fewer than two values
  double parameters[kLanes];     ///< q: seasons with values + dense columns
  double mean[kLanes];           ///< of the values used
  double slope[kLanes];          ///< per step; 0 without a trend term
  double slope_factor[kLanes];   ///< [(X'X)^-1] of the linear term: variance of the slope / variance of white noise
  double sum_squares[kLanes];    ///< of the residuals
  double total_squares[kLanes];  ///< about the mean
  double share_trend[kLanes], share_season[kLanes];  ///< variance of the fitted component / variance of the values
  std::uint8_t incomplete = 0;  ///< lanes with fewer than two seasons left, or columns that the gaps make dependent
};

/// Scratch of fit_lanes, sized once per thread.
class FitScratch {
 public:
  explicit FitScratch(const Design& design);

 private:
  friend LaneFit fit_lanes(const KernelTable&, const Design&, const double*, std::uint8_t*, const LaneSummary&, double*,
                           FitScratch&) noexcept;
  friend struct FitSolver;
  AlignedVector<double> group_sums, group_counts, group_columns, cross, factor, dots, effect, group_effect;
};

/// Joint least-squares fit of season and trend for the lanes of one tile, gaps and all; one step of iterative
/// refinement. x: raw tile (missing = NaN). bits: in, the values to use; out, without seasons of fewer than two values.
/// d: out, residuals, 0 where not valid. Lanes without bits give zeros. Never throws, allocates nothing. Season and
/// trend in one fit: fitting month means first attenuates slopes (ratio 144(y^2-1)/(144y^2-1) for y years).
LaneFit fit_lanes(const KernelTable& kernels, const Design& design, const double* x, std::uint8_t* bits,
                  const LaneSummary& summary, double* d, FitScratch& scratch) noexcept;

}  // namespace lagscape
