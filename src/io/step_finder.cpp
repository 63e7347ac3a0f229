#include "io/step_finder.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numeric>

namespace lagscape {
namespace {

// Times nearer than this are one time with rounding noise: a share of a fixed step, and a length for calendar steps.
constexpr double kTogether = 0.02;
constexpr Seconds kTogetherInMonth = kDay / 2;
constexpr Seconds kShortestMonth = 27 * kDay;  // a day less than February, for jitter

double as_double(std::int64_t value) { return static_cast<double>(value); }

template <typename T>
T median(std::vector<T> values) {
  const auto middle = values.begin() + std::ssize(values) / 2;
  std::nth_element(values.begin(), middle, values.end());
  return *middle;
}

std::vector<Seconds> gaps_between(std::span<const Seconds> times) {
  std::vector<Seconds> gaps;
  gaps.reserve(times.size());
  for (std::size_t i = 1; i < times.size(); ++i) gaps.push_back(times[i] - times[i - 1]);
  return gaps;
}

// True if two times share a slot although they are clearly two times.
bool slots_clash(std::span<const Seconds> times, std::span<const std::int64_t> slots, double together) {
  for (std::size_t i = 1; i < times.size(); ++i)
    if (slots[i] == slots[i - 1] && as_double(times[i] - times[i - 1]) > together) return true;
  return false;
}

void count_from_zero(std::vector<std::int64_t>& slots) {
  const std::int64_t first = slots.front();
  for (std::int64_t& slot : slots) slot -= first;
}

// ---- fixed steps ----------------------------------------------------------------------------------------------------

// The roundest whole number of days, hours, minutes or seconds within `tolerance` of a length.
Seconds roundest(double length, double tolerance) {
  for (const Seconds unit : {kDay, Seconds{3600}, Seconds{60}}) {
    const double rounded = std::round(length / as_double(unit)) * as_double(unit);
    if (rounded > 0 && std::fabs(rounded - length) <= tolerance) return std::llround(rounded);
  }
  return std::max<Seconds>(1, std::llround(length));
}

StepFit lay_on_fixed(std::span<const Seconds> times, Seconds step) {
  const auto offset = [&](Seconds time, Seconds origin) {
    return time - origin - floor_div(time - origin + step / 2, step) * step;
  };
  std::vector<Seconds> offsets;
  offsets.reserve(times.size());
  for (const Seconds time : times) offsets.push_back(offset(time, times.front()));
  StepFit fit{{StepKind::seconds, step}, times.front() + median(offsets), 0, {}, 0};
  const auto worst = [&](Seconds origin) {
    Seconds largest = 0;
    for (const Seconds time : times) largest = std::max(largest, std::abs(offset(time, origin)));
    return largest;
  };
  // With jitter the median is itself off by a little: take the roundest origin within the jitter.
  const Seconds jitter = worst(fit.origin);
  for (const Seconds unit : {kDay, Seconds{3600}, Seconds{60}}) {
    const Seconds rounded = floor_div(fit.origin + unit / 2, unit) * unit;
    if (jitter > 0 && std::abs(rounded - fit.origin) <= jitter && std::abs(rounded - fit.origin) * 20 <= step) {
      fit.origin = rounded;
      break;
    }
  }
  fit.largest_shift = as_double(worst(fit.origin)) / as_double(step);
  fit.slots.reserve(times.size());
  for (const Seconds time : times) fit.slots.push_back(floor_div(time - fit.origin + step / 2, step));
  fit.origin += fit.slots.front() * step;
  count_from_zero(fit.slots);
  return fit;
}

std::optional<StepFit> try_fixed(std::span<const Seconds> times, Seconds step, double share) {
  StepFit fit = lay_on_fixed(times, step);
  if (fit.largest_shift > share || slots_clash(times, fit.slots, kTogether * as_double(step))) return std::nullopt;
  return fit;
}

// Sharpens a rough step by the mean of the gaps of about one step, rounded as far as their scatter allows.
std::optional<StepFit> sharpen_fixed(std::span<const Seconds> times, std::span<const Seconds> gaps, double rough,
                                     double share) {
  double sum = 0, largest = 0, singles = 0;
  for (const Seconds gap : gaps) {
    const double off = std::fabs(as_double(gap) - rough);
    if (off > 0.5 * rough) continue;
    sum += as_double(gap);
    ++singles;
    largest = std::max(largest, off);
  }
  const double mean = singles > 0 ? sum / singles : rough;
  const double tolerance = std::min((1 + 2 * largest) / std::max(1.0, singles), 0.05 * mean);
  return try_fixed(times, roundest(mean, tolerance), share);
}

// The step by which the whole span is so many of the rough one: for stamps that are even on average (36 a year).
std::optional<StepFit> average_fixed(std::span<const Seconds> times, std::span<const Seconds> gaps, double rough) {
  double steps = 0;
  for (const Seconds gap : gaps) steps += std::round(as_double(gap) / rough);
  if (steps < 1) return std::nullopt;
  return try_fixed(times, std::max<Seconds>(1, std::llround(as_double(times.back() - times.front()) / steps)),
                   kSnapShare);
}

std::optional<StepFit> find_fixed(std::span<const Seconds> times) {
  const std::vector<Seconds> all = gaps_between(times);
  const Seconds typical = median(all);
  std::vector<Seconds> distinct{times.front()};  // without the noisy copies of a time
  for (const Seconds time : times)
    if (as_double(time - distinct.back()) > kTogether * as_double(typical)) distinct.push_back(time);
  const std::vector<Seconds> gaps = gaps_between(distinct);
  const auto shortest = as_double(*std::min_element(gaps.begin(), gaps.end()));
  std::vector<Seconds> sorted = gaps;
  std::sort(sorted.begin(), sorted.end());
  constexpr double kClear = 0.1, kFiner = 0.05;
  auto fit = sharpen_fixed(times, gaps, as_double(typical), kSnapShare);
  if (!fit) fit = average_fixed(times, gaps, as_double(typical));
  if (fit && fit->largest_shift <= kClear) return fit;
  // More gaps than steps (the typical gap is several steps long), or no gap of one step at all (2, 3, 2 days): a finer
  // step may hold, but must then explain the times well, since a fine enough one explains anything.
  for (const double rough : {as_double(sorted[sorted.size() / 4]), shortest, shortest / 2, shortest / 3, shortest / 4})
    if (auto finer = sharpen_fixed(times, gaps, rough, kFiner)) return finer;
  return fit;
}

// ---- calendar steps -------------------------------------------------------------------------------------------------

// Months since year 0 with the share of the month gone, so that calendar months are all of length 1.
double month_position(Calendar calendar, Seconds time) {
  const Moment moment = moment_of(calendar, time);
  const double days = moment.date.day - 1 + as_double(moment.clock) / as_double(kDay);
  return as_double(month_number(calendar, moment.date)) +
         days / days_in_month(calendar, moment.date.year, moment.date.month);
}

TimeStep calendar_step(std::int64_t months) {
  return months % 12 == 0 ? TimeStep{StepKind::years, months / 12} : TimeStep{StepKind::months, months};
}

std::int64_t months_of(TimeStep step) { return step.kind == StepKind::years ? 12 * step.count : step.count; }

bool last_of_month(Calendar calendar, Seconds time) {
  const Date date = moment_of(calendar, time).date;
  return date.day == days_in_month(calendar, date.year, date.month);
}

// Nominal time of a month: that of the first stamp if it lies in it, else its start.
void set_calendar_origin(Calendar calendar, std::span<const Seconds> times, std::int64_t month, bool straddles,
                         StepFit& fit) {
  const Moment first = moment_of(calendar, times.front());
  if (straddles || month_number(calendar, first.date) != month) {
    fit.origin = seconds_of(calendar, month_start(calendar, month));
    return;
  }
  fit.origin = times.front();
  const bool ends =
      std::all_of(times.begin(), times.end(), [&](Seconds time) { return last_of_month(calendar, time); });
  if (ends) fit.day_of_month = 31;
}

// Slots of `months` calendar months around the phase that the stamps share.
std::optional<StepFit> try_months(Calendar calendar, std::span<const Seconds> times, std::span<const double> at,
                                  std::int64_t months) {
  const double length = as_double(months);
  std::vector<double> offsets;
  offsets.reserve(at.size());
  for (const double position : at) offsets.push_back(std::remainder(position - at.front(), length));
  const double phase = at.front() + median(offsets);
  StepFit fit{calendar_step(months), 0, 0, {}, 0};
  bool straddles = false;
  for (const double position : at) {
    const double steps = std::round((position - phase) / length);
    fit.slots.push_back(std::llround(steps));
    fit.largest_shift = std::max(fit.largest_shift, std::fabs(position - phase - steps * length) / length);
    straddles = straddles || std::floor(position - steps * length) != std::floor(phase);
  }
  if (fit.largest_shift > kSnapShare || slots_clash(times, fit.slots, as_double(kTogetherInMonth))) return std::nullopt;
  const double first = phase + as_double(fit.slots.front()) * length;
  // Stamps on both sides of a month's beginning by rounding noise mean that beginning.
  straddles = straddles && fit.largest_shift * length <= kSnapShare;
  const std::int64_t month = straddles ? std::llround(first) : static_cast<std::int64_t>(std::floor(first));
  set_calendar_origin(calendar, times, month, straddles, fit);
  count_from_zero(fit.slots);
  return fit;
}

// One slot for each calendar month (or each `step` of months from the first stamp's), wherever in it the stamp is.
StepFit lay_on_months(Calendar calendar, std::span<const Seconds> times, TimeStep step) {
  StepFit fit{step, times.front(), 0, {}, 0};
  const TimeAxis axis(calendar, step, times.front(), 1);
  for (const Seconds time : times) fit.slots.push_back(axis.index_of(time));
  return fit;
}

std::optional<StepFit> find_months(Calendar calendar, std::span<const Seconds> times) {
  const Seconds typical = median(gaps_between(times));
  if (typical < kShortestMonth) return std::nullopt;
  std::vector<double> at;
  at.reserve(times.size());
  for (const Seconds time : times) at.push_back(month_position(calendar, time));
  std::vector<double> gaps;
  std::int64_t divisor = 0;
  for (std::size_t i = 1; i < at.size(); ++i) {
    gaps.push_back(at[i] - at[i - 1]);
    divisor = std::gcd(divisor, std::llround(gaps.back()));
  }
  const std::int64_t common = std::llround(median(gaps));
  for (const std::int64_t months : {common, divisor})
    if (months > 0)
      if (auto fit = try_months(calendar, times, at, months)) return fit;
  // Stamps that wander (the 1st in one file, the 16th in the next) still name their month, if there is one in each.
  if (typical > 32 * kDay) return std::nullopt;
  StepFit fit = lay_on_months(calendar, times, {StepKind::months, 1});
  if (slots_clash(times, fit.slots, as_double(kTogetherInMonth))) return std::nullopt;
  return fit;
}

// True for equal fixed steps that calendar months explain less well: every 30 days over more than half a year, or with
// two of them in one calendar month.
bool fixed_is_better(Calendar calendar, std::span<const Seconds> times, const StepFit& fixed, const StepFit& months) {
  constexpr double kExact = 1e-4;
  if (fixed.largest_shift > kExact) return false;
  const double month_shift = months.largest_shift * as_double(months_of(months.step));
  if (month_shift > 0.01 && times.size() >= 7) return true;
  const auto month = [&](Seconds time) { return month_number(calendar, moment_of(calendar, time).date); };
  const auto same_month = [&](Seconds a, Seconds b) { return month(a) == month(b); };
  return std::adjacent_find(times.begin(), times.end(), same_month) != times.end();
}

}  // namespace

std::optional<StepFit> find_step(Calendar calendar, std::span<const Seconds> times) {
  auto months = find_months(calendar, times);
  if (months && months->largest_shift == 0) return months;
  auto fixed = find_fixed(times);
  if (months && fixed && fixed_is_better(calendar, times, *fixed, *months)) return fixed;
  return months ? months : fixed;
}

std::optional<StepFit> fit_step(Calendar calendar, std::span<const Seconds> times, TimeStep step) {
  if (step.kind == StepKind::seconds) {
    StepFit fit = lay_on_fixed(times, step.count);
    if (fit.largest_shift > kSnapShare) return std::nullopt;
    return fit;
  }
  std::vector<double> at;
  for (const Seconds time : times) at.push_back(month_position(calendar, time));
  if (auto fit = try_months(calendar, times, at, months_of(step))) {
    fit->step = step;
    return fit;
  }
  return lay_on_months(calendar, times, step);
}

}  // namespace lagscape
