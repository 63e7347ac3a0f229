#include "lagscape/stats/lag_scan.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

double crossing(double lag, double before, double now, double level) {
  return (lag - 1) + (before - level) / (before - now);
}

}  // namespace

void LagScan::feed(double r, double limit) noexcept {
  constexpr double kLevel = 1 / std::numbers::e, kSokal = 5;
  ++lag_;
  const auto lag = static_cast<double>(lag_);
  if (!e_folded_ && r <= kLevel) {
    e_folded_ = true;
    e_folding_ = crossing(lag, before_, r, kLevel);
  }
  if (!crossed_) {
    crossed_ = r <= 0;
    if (crossed_)
      zero_crossing_ = crossing(lag, before_, r, 0);
    else
      positive_sum_ += r;
  }
  if (!below_) {
    below_ = r < limit;
    if (!below_) above_sum_ += r;
  }
  if (!inside_limits_ && std::abs(r) <= limit) {
    inside_limits_ = true;
    first_inside_ = lag_;
  }
  if (!geyer_done_) {
    if (lag_ % 2 == 0) {
      pair_ = r;
    } else {
      const double pair = pair_ + r;
      const bool first = lag_ == 1;
      geyer_done_ = !(pair > 0);
      if (first || !geyer_done_) {
        smallest_pair_ = first ? pair : std::min(smallest_pair_, pair);
        pair_sum_ += pair;
        monotone_sum_ += smallest_pair_;
      }
    }
  }
  if (!sokal_done_) {
    window_sum_ += r;
    sokal_done_ = lag >= kSokal * (0.5 + window_sum_);
  }
  before_ = r;
}

double LagScan::e_folding() const noexcept { return e_folded_ ? e_folding_ : kNaN; }
double LagScan::zero_crossing() const noexcept { return crossed_ ? zero_crossing_ : kNaN; }

}  // namespace lagscape
