#pragma once
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

#include "lagscape/grid/calendar.h"

namespace lagscape {

enum class StepKind { seconds, months, years };

/// Length of a time step: `count` seconds, calendar months or calendar years.
struct TimeStep {
  StepKind kind = StepKind::seconds;
  std::int64_t count = 86400;
  friend bool operator==(const TimeStep&, const TimeStep&) = default;
};

/// ISO 8601 duration in whole units ("P1M", "P5Y", "P30D", "PT6H", "P1W"); nothing if malformed or mixed kinds.
[[nodiscard]] std::optional<TimeStep> parse_duration(std::string_view text);
/// "P1M", "P10D", "PT6H".
[[nodiscard]] std::string duration_text(TimeStep step);
/// For people: "monthly", "daily", "every 6 hours", "every 3 months", "yearly".
[[nodiscard]] std::string step_words(TimeStep step);

/// A complete, equally spaced axis t = 0 .. size-1 (equally spaced in calendar months or years where the step says so).
/// Cheap to copy, immutable, safe to share between threads.
class TimeAxis {
 public:
  TimeAxis() = default;
  /// origin: nominal time of step 0. day_of_month: nominal day of calendar-month and yearly steps where it is not the
  /// origin's own (31 = the last day of every month, also when the axis begins in February); 0 = the origin's.
  TimeAxis(Calendar calendar, TimeStep step, Seconds origin, std::size_t size, int day_of_month = 0);

  [[nodiscard]] Calendar calendar() const noexcept { return calendar_; }
  [[nodiscard]] TimeStep step() const noexcept { return step_; }
  [[nodiscard]] std::size_t size() const noexcept { return size_; }
  /// Nominal time of step t (monthly: same day of month and time of day as the origin, clamped to the month's length).
  [[nodiscard]] Seconds time(std::size_t t) const { return nominal(static_cast<std::int64_t>(t)); }
  /// Step whose slot holds this time: nearest step for fixed lengths, same month or year for calendar steps (a slot of
  /// k months begins with the month of its nominal time). May be negative or >= size(); off_seconds receives the
  /// distance from the nominal time when given.
  [[nodiscard]] std::int64_t index_of(Seconds time, Seconds* off_seconds = nullptr) const;
  /// Axis of steps [first, first + count).
  [[nodiscard]] TimeAxis slice(std::size_t first, std::size_t count) const;

  /// Calendar-month season of step t: 0..11 for steps of one month or shorter; for steps of k months (k divides 12)
  /// 0..12/k-1; always 0 for yearly steps and for k months where k does not divide 12.
  [[nodiscard]] int season_of(std::size_t t) const;
  [[nodiscard]] int seasons() const;
  /// Phase in the year, [0, 1): (day of year - 1 + day fraction) / length of that year.
  [[nodiscard]] double year_phase(std::size_t t) const;
  /// Phase in the day, [0, 1).
  [[nodiscard]] double day_phase(std::size_t t) const;
  /// Mean number of steps in a year of the calendar: 12 for monthly, 365.2425 for daily in the standard calendar.
  [[nodiscard]] double steps_per_year() const;
  /// Length of the record in years: size() / steps_per_year().
  [[nodiscard]] double years() const { return static_cast<double>(size_) / steps_per_year(); }

  /// Unit in which lags and memory times are given: "month", "year", "day", "hour", "minute", "second" ...
  [[nodiscard]] std::string lag_unit() const;
  /// ... and how many of them one step is (3-monthly: 3; 6-hourly: 6; daily: 1; steps of 2 days and more that are no
  /// whole number of hours are given in days and fractions).
  [[nodiscard]] double lag_unit_per_step() const;
  [[nodiscard]] std::string label(std::size_t t) const { return iso_text(calendar_, time(t)); }
  /// CF reference for times written to results: "days since 1970-01-01 00:00:00".
  [[nodiscard]] std::string cf_units() const { return "days since 1970-01-01 00:00:00"; }
  [[nodiscard]] double cf_value(Seconds time) const { return static_cast<double>(time) / static_cast<double>(kDay); }
  friend bool operator==(const TimeAxis&, const TimeAxis&) = default;

 private:
  [[nodiscard]] Seconds nominal(std::int64_t index) const;

  Calendar calendar_ = Calendar::standard;
  TimeStep step_;
  Seconds origin_ = 0;
  std::size_t size_ = 0;
  int day_of_month_ = 0;
};

}  // namespace lagscape
