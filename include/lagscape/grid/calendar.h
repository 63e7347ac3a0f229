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
/// True if such a day exists in the calendar (1582-10-05..14 do not exist in `standard`).
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
/// "1981-01-15" or, when the time of day is not midnight, "1981-01-15T12:00:00".
[[nodiscard]] std::string iso_text(Calendar calendar, Seconds time);
/// ISO 8601 date or date-time ("1981", "1981-01", "1981-01-31", "1981-01-31T06:00", with optional Z); nothing if malformed
/// or not a date of the calendar. `end_of`: the last second of the named year, month or day instead of the first.
[[nodiscard]] std::optional<Seconds> parse_iso(Calendar calendar, std::string_view text, bool end_of = false);

}  // namespace lagscape
