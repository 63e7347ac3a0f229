#pragma once
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

namespace lagscape {

/// CF-1.10 section 4.4.1. `standard` is mixed Julian/Gregorian (switch on 1582-10-15).
enum class Calendar { standard, proleptic_gregorian, julian, noleap, all_leap, day360 };

struct Date {
  int year = 1, month = 1, day = 1;
  friend bool operator==(const Date&, const Date&) = default;
};

/// Any case; "gregorian", "365_day", "366_day", "360_day" and "360" are understood. Nothing for unknown names.
[[nodiscard]] std::optional<Calendar> parse_calendar(std::string_view name);
/// The CF name written to files: "standard", "proleptic_gregorian", "julian", "noleap", "all_leap", "360_day".
[[nodiscard]] std::string_view calendar_name(Calendar calendar);
[[nodiscard]] int days_in_month(Calendar calendar, int year, int month);
[[nodiscard]] int days_in_year(Calendar calendar, int year);
/// True if such a day exists in the calendar (1582-10-05..14 do not exist in `standard`, year 0 neither in `standard`
/// nor `julian`, where year -1 is followed by year 1).
[[nodiscard]] bool valid_date(Calendar calendar, Date date);
/// Days since 1970-01-01 of the same calendar (negative before). Requires a valid date.
[[nodiscard]] std::int64_t day_number(Calendar calendar, Date date);
[[nodiscard]] Date date_of(Calendar calendar, std::int64_t day);
/// Mean length of a year in days: 365.2425 (standard, proleptic), 365.25 (julian), 365, 366, 360.
[[nodiscard]] double mean_year_days(Calendar calendar);

/// Whole seconds since 1970-01-01T00:00:00 of the calendar in use: the only form in which we carry time.
using Seconds = std::int64_t;
constexpr Seconds kDay = 86400;
[[nodiscard]] Seconds seconds_of(Calendar calendar, Date date, Seconds time_of_day = 0);
/// A time taken apart: the day it falls on and the seconds since that day's midnight, 0 .. 86399.
struct Moment {
  Date date;
  Seconds clock = 0;
};
[[nodiscard]] Moment moment_of(Calendar calendar, Seconds time);
/// Consecutive number of a calendar month (year * 12 + month - 1, with no year left out where the calendar has no year
/// 0), and the first day of such a month.
[[nodiscard]] std::int64_t month_number(Calendar calendar, const Date& date);
[[nodiscard]] Date month_start(Calendar calendar, std::int64_t month);
/// The same time of day `months` calendar months later (negative: earlier), on the same day of the month, or on
/// `day_of_month` if given, clamped to the length of the month.
[[nodiscard]] Seconds add_months(Calendar calendar, Seconds time, std::int64_t months, int day_of_month = 0);
/// Division rounded towards minus infinity, so that times before the epoch fall on the right day.
constexpr std::int64_t floor_div(std::int64_t a, std::int64_t b) {
  return a / b - (a % b != 0 && (a < 0) != (b < 0) ? 1 : 0);
}

/// "1981-01-15" or, when the time of day is not midnight, "1981-01-15T12:00:00".
[[nodiscard]] std::string iso_text(Calendar calendar, Seconds time);
/// ISO 8601 date or date-time ("1981", "1981-01", "1981-01-31", "19810131", "1981-01-31T06:00", a blank for the T, with
/// optional Z, fractions of a second rounded; years of 4 to 6 digits, negative ones too); nothing if malformed or not a
/// date of the calendar. `end_of`: the last second of the named year, month or day instead of the first.
[[nodiscard]] std::optional<Seconds> parse_iso(Calendar calendar, std::string_view text, bool end_of = false);

}  // namespace lagscape
