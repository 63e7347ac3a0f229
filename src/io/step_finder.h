#pragma once
#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "lagscape/grid/time_axis.h"

namespace lagscape {

/// Times laid on an equally spaced axis.
struct StepFit {
  TimeStep step;
  Seconds origin = 0;               ///< nominal time of slot 0
  int day_of_month = 0;             ///< nominal day of calendar steps, 31 for month ends (see TimeAxis)
  std::vector<std::int64_t> slots;  ///< per time, ascending, the first is 0
  double largest_shift =
      0;  ///< of a time from its slot, in steps (calendar steps: after their common phase is taken off)
};

/// Share of a step by which a time may be off and still be snapped to it.
constexpr double kSnapShare = 0.25;

/// Finds the step of ascending, distinct times (two or more): calendar months, multiples of them, years, or fixed
/// seconds. Missing steps do not matter, jitter of up to kSnapShare of a step neither. Nothing if the times are uneven.
[[nodiscard]] std::optional<StepFit> find_step(Calendar calendar, std::span<const Seconds> times);

/// Lays ascending, distinct times on a step that is known; several may share a slot. Nothing if some time is off by
/// more than kSnapShare of a fixed step.
[[nodiscard]] std::optional<StepFit> fit_step(Calendar calendar, std::span<const Seconds> times, TimeStep step);

}  // namespace lagscape
