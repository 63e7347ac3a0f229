#include "lagscape/grid/calendar.h"

#include <fmt/format.h>
#include <algorithm>
#include <array>
#include <charconv>

#include "lagscape/base/text.h"

namespace lagscape {
namespace {

// Days before the first of each month, counted from 1 March, so that a leap day comes last in its year.
constexpr int march_day(int month, int day) { return (153 * ((month + 9) % 12) + 2) / 5 + day - 1; }

constexpr std::array<int, 12> kMonthDays{31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};

// From 1 March of year 0 to 1970-01-01, in the calendar itself.
constexpr std::int64_t kGregorianEpoch = 719468;
constexpr std::int64_t kJulianEpoch = 719483;
// 1970-01-01 of the Julian calendar is 1970-01-14 of the Gregorian one.
constexpr std::int64_t kJulianDelay = 13;
// First Gregorian day of the mixed calendar, 1582-10-15; the day before is 1582-10-04.
constexpr std::int64_t kSwitchDay = -141427;
constexpr Date kSwitchDate{1582, 10, 15};

constexpr bool before(const Date& a, const Date& b) {
  return a.year != b.year ? a.year < b.year : a.month != b.month ? a.month < b.month : a.day < b.day;
}

// The calendars that count BC years have no year 0: -1 is followed by 1.
constexpr bool has_year_zero(Calendar calendar) {
  return calendar != Calendar::standard && calendar != Calendar::julian;
}
// With a year 0 put in.
constexpr int astronomical_year(Calendar calendar, int year) {
  return year < 0 && !has_year_zero(calendar) ? year + 1 : year;
}
constexpr int written_year(Calendar calendar, std::int64_t astronomical) {
  return static_cast<int>(astronomical <= 0 && !has_year_zero(calendar) ? astronomical - 1 : astronomical);
}

std::int64_t gregorian_day(std::int64_t year, int month, int day) {
  const std::int64_t y = month <= 2 ? year - 1 : year;
  return 365 * y + floor_div(y, 4) - floor_div(y, 100) + floor_div(y, 400) + march_day(month, day) - kGregorianEpoch;
}

std::int64_t julian_day(std::int64_t year, int month, int day) {
  const std::int64_t y = month <= 2 ? year - 1 : year;
  return 365 * y + floor_div(y, 4) + march_day(month, day) - kJulianEpoch;
}

// Month and day from days since 1 March of `march_year`.
Date from_march(Calendar calendar, std::int64_t march_year, int day_of_year) {
  const int march_month = (5 * day_of_year + 2) / 153;
  const int month = march_month < 10 ? march_month + 3 : march_month - 9;
  const int day = day_of_year - (153 * march_month + 2) / 5 + 1;
  return {written_year(calendar, march_year + (month <= 2 ? 1 : 0)), month, day};
}

Date gregorian_date(Calendar calendar, std::int64_t day) {
  const std::int64_t shifted = day + kGregorianEpoch;
  const std::int64_t era = floor_div(shifted, 146097);
  const std::int64_t in_era = shifted - era * 146097;
  const std::int64_t year = (in_era - in_era / 1460 + in_era / 36524 - in_era / 146096) / 365;
  return from_march(calendar, era * 400 + year, static_cast<int>(in_era - (365 * year + year / 4 - year / 100)));
}

Date julian_date(Calendar calendar, std::int64_t day) {
  const std::int64_t shifted = day + kJulianEpoch;
  const std::int64_t era = floor_div(shifted, 1461);
  const std::int64_t in_era = shifted - era * 1461;
  const std::int64_t year = (in_era - in_era / 1460) / 365;
  return from_march(calendar, era * 4 + year, static_cast<int>(in_era - 365 * year));
}

// The calendars whose years are all alike.
int fixed_year_days(Calendar calendar) {
  return calendar == Calendar::noleap ? 365 : calendar == Calendar::all_leap ? 366 : 360;
}

int fixed_month_days(Calendar calendar, int month) {
  if (calendar == Calendar::day360) return 30;
  return month == 2 && calendar == Calendar::all_leap ? 29 : kMonthDays[static_cast<std::size_t>(month - 1)];
}

bool is_leap(Calendar calendar, int year) {
  const int y = astronomical_year(calendar, year);
  const bool julian_rule = calendar == Calendar::julian || (calendar == Calendar::standard && year < kSwitchDate.year);
  return y % 4 == 0 && (julian_rule || y % 100 != 0 || y % 400 == 0);
}

bool is_fixed(Calendar calendar) {
  return calendar == Calendar::noleap || calendar == Calendar::all_leap || calendar == Calendar::day360;
}

}  // namespace

std::optional<Calendar> parse_calendar(std::string_view name) {
  const std::string word = lower(trim(name));
  if (word == "standard" || word == "gregorian") return Calendar::standard;
  if (word == "proleptic_gregorian") return Calendar::proleptic_gregorian;
  if (word == "julian") return Calendar::julian;
  if (word == "noleap" || word == "365_day") return Calendar::noleap;
  if (word == "all_leap" || word == "366_day") return Calendar::all_leap;
  if (word == "360_day" || word == "360") return Calendar::day360;
  return std::nullopt;
}

std::string_view calendar_name(Calendar calendar) {
  switch (calendar) {
    case Calendar::standard:
      return "standard";
    case Calendar::proleptic_gregorian:
      return "proleptic_gregorian";
    case Calendar::julian:
      return "julian";
    case Calendar::noleap:
      return "noleap";
    case Calendar::all_leap:
      return "all_leap";
    case Calendar::day360:
      break;
  }
  return "360_day";
}

int days_in_month(Calendar calendar, int year, int month) {
  if (is_fixed(calendar)) return fixed_month_days(calendar, month);
  return month == 2 && is_leap(calendar, year) ? 29 : kMonthDays[static_cast<std::size_t>(month - 1)];
}

int days_in_year(Calendar calendar, int year) {
  if (is_fixed(calendar)) return fixed_year_days(calendar);
  if (calendar == Calendar::standard && year == kSwitchDate.year) return 355;  // ten days left out
  return is_leap(calendar, year) ? 366 : 365;
}

bool valid_date(Calendar calendar, Date date) {
  if (date.month < 1 || date.month > 12 || date.day < 1) return false;
  if (date.year == 0 && !has_year_zero(calendar)) return false;
  if (date.day > days_in_month(calendar, date.year, date.month)) return false;
  return calendar != Calendar::standard || date.year != 1582 || date.month != 10 || date.day <= 4 || date.day >= 15;
}

std::int64_t day_number(Calendar calendar, Date date) {
  if (is_fixed(calendar)) {
    std::int64_t day = (std::int64_t{date.year} - 1970) * fixed_year_days(calendar) + date.day - 1;
    for (int month = 1; month < date.month; ++month) day += fixed_month_days(calendar, month);
    return day;
  }
  const int year = astronomical_year(calendar, date.year);
  if (calendar == Calendar::julian) return julian_day(year, date.month, date.day);
  if (calendar == Calendar::standard && before(date, kSwitchDate))
    return julian_day(year, date.month, date.day) + kJulianDelay;
  return gregorian_day(year, date.month, date.day);
}

Date date_of(Calendar calendar, std::int64_t day) {
  if (is_fixed(calendar)) {
    const std::int64_t years = floor_div(day, fixed_year_days(calendar));
    int rest = static_cast<int>(day - years * fixed_year_days(calendar));
    int month = 1;
    while (rest >= fixed_month_days(calendar, month)) rest -= fixed_month_days(calendar, month++);
    return {static_cast<int>(years + 1970), month, rest + 1};
  }
  if (calendar == Calendar::julian) return julian_date(calendar, day);
  if (calendar == Calendar::standard && day < kSwitchDay) return julian_date(calendar, day - kJulianDelay);
  return gregorian_date(calendar, day);
}

double mean_year_days(Calendar calendar) {
  if (is_fixed(calendar)) return fixed_year_days(calendar);
  return calendar == Calendar::julian ? 365.25 : 365.2425;
}

Seconds seconds_of(Calendar calendar, Date date, Seconds time_of_day) {
  return day_number(calendar, date) * kDay + time_of_day;
}

Moment moment_of(Calendar calendar, Seconds time) {
  const std::int64_t day = floor_div(time, kDay);
  return {date_of(calendar, day), time - day * kDay};
}

std::int64_t month_number(Calendar calendar, const Date& date) {
  return std::int64_t{astronomical_year(calendar, date.year)} * 12 + date.month - 1;
}

Date month_start(Calendar calendar, std::int64_t month) {
  const std::int64_t year = floor_div(month, 12);
  return {written_year(calendar, year), static_cast<int>(month - year * 12) + 1, 1};
}

Seconds add_months(Calendar calendar, Seconds time, std::int64_t months, int day_of_month) {
  const auto [from, clock] = moment_of(calendar, time);
  Date date = month_start(calendar, month_number(calendar, from) + months);
  date.day = std::min(day_of_month > 0 ? day_of_month : from.day, days_in_month(calendar, date.year, date.month));
  while (!valid_date(calendar, date)) --date.day;  // the ten days of 1582 that the standard calendar left out
  return seconds_of(calendar, date, clock);
}

std::string iso_text(Calendar calendar, Seconds time) {
  const auto [date, clock] = moment_of(calendar, time);
  std::string text = date.year < 0 ? fmt::format("-{:04}-{:02}-{:02}", -date.year, date.month, date.day)
                                   : fmt::format("{:04}-{:02}-{:02}", date.year, date.month, date.day);
  if (clock == 0) return text;
  return text + fmt::format("T{:02}:{:02}:{:02}", clock / 3600, clock / 60 % 60, clock % 60);
}

namespace {

// Takes `low` to `high` digits off the front of the text.
std::optional<int> take_digits(std::string_view& text, std::size_t low, std::size_t high) {
  std::size_t count = 0;
  while (count < text.size() && text[count] >= '0' && text[count] <= '9') ++count;
  if (count < low || count > high) return std::nullopt;
  int value = 0;
  std::from_chars(text.data(), text.data() + count, value);
  text.remove_prefix(count);
  return value;
}

bool take_char(std::string_view& text, char wanted) {
  if (text.empty() || text.front() != wanted) return false;
  text.remove_prefix(1);
  return true;
}

struct IsoDate {
  Date date;
  enum class Names { year, month, day } names = Names::year;
};

// "1981", "1981-01", "1981-01-31" or "19810131"; years have four to six digits and may be negative.
std::optional<IsoDate> take_iso_date(std::string_view& text) {
  const bool negative = take_char(text, '-');
  const auto first = take_digits(text, 4, 8);
  if (!first) return std::nullopt;
  IsoDate out;
  const bool separated = take_char(text, '-');
  if (*first > 999999) {
    if (separated || *first < 10000000) return std::nullopt;
    out.date = {*first / 10000, *first / 100 % 100, *first % 100};
    out.names = IsoDate::Names::day;
  } else {
    out.date.year = *first;
    if (separated) {
      const auto month = take_digits(text, 1, 2);
      if (!month) return std::nullopt;
      out.date.month = *month;
      out.names = IsoDate::Names::month;
      if (take_char(text, '-')) {
        const auto day = take_digits(text, 1, 2);
        if (!day) return std::nullopt;
        out.date.day = *day;
        out.names = IsoDate::Names::day;
      }
    }
  }
  if (negative) out.date.year = -out.date.year;
  return out;
}

// "06", "06:00", "06:00:30", "06:00:30.0" after the T; fractions are rounded to whole seconds.
std::optional<Seconds> take_iso_clock(std::string_view& text) {
  const auto hour = take_digits(text, 1, 2);
  if (!hour || *hour > 23) return std::nullopt;
  Seconds clock = *hour * Seconds{3600};
  if (!take_char(text, ':')) return clock;
  const auto minute = take_digits(text, 1, 2);
  if (!minute || *minute > 59) return std::nullopt;
  clock += *minute * Seconds{60};
  if (!take_char(text, ':')) return clock;
  const auto second = take_digits(text, 1, 2);
  if (!second || *second > 59) return std::nullopt;
  clock += *second;
  if (take_char(text, '.')) {
    if (text.empty() || text.front() < '0' || text.front() > '9') return std::nullopt;
    if (text.front() >= '5') ++clock;
    while (!text.empty() && text.front() >= '0' && text.front() <= '9') text.remove_prefix(1);
  }
  return clock;
}

}  // namespace

std::optional<Seconds> parse_iso(Calendar calendar, std::string_view text, bool end_of) {
  text = trim(text);
  const auto parsed = take_iso_date(text);
  if (!parsed || !valid_date(calendar, parsed->date)) return std::nullopt;
  Date date = parsed->date;
  if (!text.empty()) {
    if (parsed->names != IsoDate::Names::day) return std::nullopt;
    if (!take_char(text, 'T') && !take_char(text, 't') && !take_char(text, ' ')) return std::nullopt;
    const auto clock = take_iso_clock(text);
    if (!clock) return std::nullopt;
    if (!take_char(text, 'Z')) take_char(text, 'z');
    if (!text.empty()) return std::nullopt;
    return seconds_of(calendar, date, *clock);
  }
  if (!end_of) return seconds_of(calendar, date);
  if (parsed->names == IsoDate::Names::year) date.month = 12;
  if (parsed->names != IsoDate::Names::day) date.day = days_in_month(calendar, date.year, date.month);
  return seconds_of(calendar, date, kDay - 1);
}

}  // namespace lagscape
