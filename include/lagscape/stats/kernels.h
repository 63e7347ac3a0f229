#pragma once
#include <cstddef>
#include <cstdint>
#include <string_view>

namespace lagscape {

/// Cells that a kernel works on side by side, one a vector lane. A tile is time-major: value of step t and lane l at
/// tile[t * kLanes + l], 64-byte aligned. "Lane arrays" have kLanes doubles per entry likewise.
/// A lane's result never depends on what the other lanes hold: every sum runs over time in one fixed order.
constexpr std::size_t kLanes = 8;
/// Rows of zeros a kernel may read past the last step.
constexpr std::size_t kPadRows = 16;
/// Largest order of an autoregression.
constexpr std::size_t kMaxOrder = 30;

/// What one pass over the raw values says about each lane. Counts are doubles so that lanes stay lanes.
struct alignas(64) LaneSummary {
  double count[kLanes], sum[kLanes], low[kLanes], high[kLanes];
  double first[kLanes], last[kLanes];  ///< steps of the first and last value; first is +inf and last -1 without values
  double longest_gap[kLanes];          ///< missing steps in a row between first and last value
  double candidate[kLanes];            ///< the only value that can make up more than half of all (majority vote)
};

/// The columns of a least-squares design, complete record: `dense` columns of `steps` doubles, column-major,
/// orthonormal and without their mean in each group; group[t] < groups.
struct DesignView {
  std::size_t steps, groups, dense;
  const std::uint16_t* group;
  const double* columns;
};

/// Kernels compiled for one instruction set. All are noexcept, allocate nothing, and know neither units nor files.
/// bits: one byte a step, bit l = lane l holds a value there.
struct KernelTable {
  std::string_view isa;

  /// Validity bits and summary of a raw tile (missing = NaN).
  void (*summarise)(const double* x, std::size_t steps, std::uint8_t* bits, LaneSummary* out) noexcept;
  /// How many values equal `value`, per lane.
  void (*count_equal)(const double* x, std::size_t steps, const double* value, double* out) noexcept;
  /// d = x - centre where valid, else 0, with the sum and the number of values in each group: lane arrays, group_counts
  /// likewise.
  void (*center)(const double* x, const std::uint8_t* bits, const DesignView& design, const double* centre, double* d,
                 double* group_sums, double* group_counts) noexcept;
  /// dots[j] = sum_t d[t] column_j[t], and the group sums of d. Missing steps must be 0 in d.
  void (*project)(const double* d, const DesignView& design, double* dots, double* group_sums) noexcept;
  /// What the missing steps take away from the normal equations of the complete design: cross (dense x dense lane
  /// arrays, lower triangle) and group_columns (groups x dense lane arrays), both sums over the *missing* steps.
  void (*missing_rows)(const std::uint8_t* bits, const DesignView& design, double* cross,
                       double* group_columns) noexcept;
  /// d -= group_effect[group[t]] + sum_j effect[j] column_j[t] where valid.
  void (*subtract_fit)(double* d, const std::uint8_t* bits, const DesignView& design, const double* group_effect,
                       const double* effect) noexcept;
  /// Sums over valid steps of the fitted trend, of its square, of the rest of the fit and of its square: four lane
  /// arrays. terms: `count` (0 to 2) trend terms of `steps` doubles, coefficients: a lane array each; x, d, mean as in
  /// the fit.
  void (*component_sums)(const double* x, const double* d, const std::uint8_t* bits, std::size_t steps,
                         const double* mean, const double* terms, std::size_t count, const double* coefficients,
                         double* sums) noexcept;
  /// sums[k - first] = sum_t d[t] d[t + k] for `count` lags. d has kPadRows rows of zeros after the last step.
  /// Time is cut into blocks of 504 rows whatever the lags asked for, so a lag's sum has one order of additions.
  void (*lag_products)(const double* d, std::size_t steps, std::size_t first, std::size_t count, double* sums) noexcept;
  /// Burg's recursion over gap-free stretches (all of x[t-p] .. x[t] valid); `work`: 2 * steps rows; `window`: steps
  /// bytes. partial, usable: `orders` (<= steps) lane arrays each; a lane without variance left
  /// gives 0.
  void (*burg)(const double* d, const std::uint8_t* bits, std::size_t steps, std::size_t orders, double* work,
               std::uint8_t* window, double* partial, double* usable) noexcept;
  /// Partial autocorrelations 1 .. lags from autocorrelations r[1] .. r[lags] (r[0] = 1 is not read), Durbin-Levinson;
  /// `work`: 2 * (lags + 1) lane arrays. NaN in gives NaN from there on.
  void (*durbin_levinson)(const double* r, std::size_t lags, double* work, double* partial) noexcept;
};

enum class Isa { baseline, avx2, avx512 };

/// The kernels of the best instruction set this processor has.
[[nodiscard]] const KernelTable& best_kernels() noexcept;
/// Those of a given set, or nullptr if the processor (or the build) lacks it.
[[nodiscard]] const KernelTable* kernels_for(Isa isa) noexcept;

}  // namespace lagscape
