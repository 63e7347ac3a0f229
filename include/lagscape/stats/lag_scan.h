#pragma once
#include <cstddef>

namespace lagscape {

/// Published definitions of a memory time, read off the sample autocorrelation r(1), r(2), ... as it is computed, so
/// that only as many lags are needed as the definitions ask for. All in steps; NaN where r did not reach what the
/// definition waits for. The r are the biased ones, which already contain the factor (1 - k/n): sums do not multiply by
/// it again.
class LagScan {
 public:
  /// The next lag. limit: the independence (or Bartlett) limit of |r| at this lag.
  void feed(double r, double limit) noexcept;
  /// No more lags: what is still open stays as it is and `complete()` tells so.
  [[nodiscard]] bool complete() const noexcept {
    return e_folded_ && crossed_ && geyer_done_ && sokal_done_ && inside_limits_;
  }

  /// First k with r <= 1/e, by linear interpolation. White noise gives about .63.
  [[nodiscard]] double e_folding() const noexcept;
  /// First k with r <= 0, by linear interpolation.
  [[nodiscard]] double zero_crossing() const noexcept;
  /// 1 + 2 sum r over the lags before the first r <= 0 (two-sided). Open: the sum so far.
  [[nodiscard]] double integral() const noexcept { return 1 + 2 * positive_sum_; }
  /// 1 + 2 sum r over the lags before the first r < the limit (two-sided). Open: the sum so far.
  [[nodiscard]] double integral_above_limit() const noexcept { return 1 + 2 * above_sum_; }
  /// Geyer's initial monotone sequence: -1 + 2 sum of the running minimum of G_j = r(2j) + r(2j+1) while positive.
  /// [Geyer 1992, Stat. Sci. 7:473; proven for reversible chains only]
  [[nodiscard]] double geyer_monotone() const noexcept { return -1 + 2 * monotone_sum_; }
  /// Geyer's initial positive sequence: the same without the running minimum.
  [[nodiscard]] double geyer_positive() const noexcept { return -1 + 2 * pair_sum_; }
  /// 2 tau_half(W) at the smallest W >= 5 tau_half(W), tau_half(W) = 1/2 + sum_{k<=W} r.
  /// [Madras & Sokal 1988, J. Stat. Phys. 50:109]. Open: the sum so far.
  [[nodiscard]] double sokal() const noexcept { return 1 + 2 * window_sum_; }
  /// First lag with |r| inside its limit; 0 if none yet.
  [[nodiscard]] std::size_t first_inside_limits() const noexcept { return inside_limits_ ? first_inside_ : 0; }

 private:
  std::size_t lag_ = 0, first_inside_ = 0;
  double before_ = 1, e_folding_ = 0, zero_crossing_ = 0;
  double positive_sum_ = 0, above_sum_ = 0, window_sum_ = 0;
  double pair_ = 1, smallest_pair_ = 0, pair_sum_ = 0, monotone_sum_ = 0;  // pair_ holds r(2j) until r(2j+1) comes
  bool e_folded_ = false, crossed_ = false, below_ = false, geyer_done_ = false, sokal_done_ = false,
       inside_limits_ = false;
};

}  // namespace lagscape
