#include "io/time_decode.h"

#include <fmt/format.h>
#include <algorithm>
#include <array>
#include <cctype>
#include <cmath>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

enum class UnitKind { seconds, fraction, months, years, written_day };

/// What one unit of a time value is.
struct TimeUnit {
  UnitKind kind = UnitKind::seconds;
  std::int64_t size = 1;  ///< seconds in a unit; `fraction`: units in a second
};

struct UnitName {
  TimeUnit unit;
  std::array<const char*, 6> names;  ///< plurals in -s are understood
};
constexpr UnitName kUnitNames[] = {
    {{UnitKind::seconds, 1}, {"second", "sec", "s"}},
    {{UnitKind::seconds, 60}, {"minute", "min"}},
    {{UnitKind::seconds, 3600}, {"hour", "hr", "h"}},
    {{UnitKind::seconds, kDay}, {"day", "d"}},
    {{UnitKind::seconds, 7 * kDay}, {"week"}},
    {{UnitKind::seconds, 365 * kDay}, {"common_year"}},
    {{UnitKind::fraction, 1000}, {"millisecond", "millisec", "msec", "ms"}},
    {{UnitKind::fraction, 1000000}, {"microsecond", "microsec", "us"}},
    {{UnitKind::months, 1}, {"month", "mon"}},
    {{UnitKind::years, 1}, {"year", "yr"}},
};

constexpr std::string_view kMendWithCalendar =
    "check the file's time unit and calendar; the job can overrule them: "
    "[input] time = { unit = \"days since 1981-01-01\", calendar = \"standard\" }";
// No CF calendar is used outside these years; values beyond them are fill values or read with the wrong unit.
constexpr int kMaxYear = 999999;

std::optional<TimeUnit> find_unit(std::string_view word) {
  for (const UnitName& entry : kUnitNames)
    for (const char* name : entry.names) {
      if (name == nullptr) break;
      if (word == name || (word.size() > 2 && word.substr(0, word.size() - 1) == name && word.back() == 's'))
        return entry.unit;
    }
  return std::nullopt;
}

// The advice for a time unit without a date: what the values themselves tell, else what a unit has to look like.
std::string mend_for(std::string_view units, std::span<const double> values) {
  if (const auto written = written_dates(units, values))
    return fmt::format("the values look like dates themselves ({} ...): [input] {}", number_text(values.front()),
                       mend_line(*written));
  const std::string word = units.empty() ? "days" : std::string(units);
  return fmt::format("[input] time = {{ unit = \"{} since 1981-01-01\" }} with the date that zero stands for", word);
}

std::string unit_with_suggestion(std::string_view word) {
  std::vector<std::string> names;
  for (const UnitName& entry : kUnitNames) names.push_back(std::string(entry.names[0]) + "s");
  return fmt::format("'{}' is not a unit of time{}", word, did_you_mean(word, names));
}

/// Reads "UNIT since DATE [TIME] [ZONE]"; every failure throws with the whole text quoted.
class ReferenceParser {
 public:
  /// values: those counted in this unit, for advice only.
  ReferenceParser(std::string_view text, Calendar calendar, std::span<const double> values, const std::string& where)
      : whole_(trim(text)),
        lowered_(lower(whole_)),
        rest_(lowered_),
        calendar_(calendar),
        values_(values),
        where_(where) {}

  TimeUnit unit;
  Seconds reference = 0;
  std::vector<std::string> notes;

  void parse() {
    if (rest_.empty())
      throw Error(ErrorKind::input, "the time variable has no unit", where_, mend_for(whole_, values_));
    if (parse_written_day()) return;
    parse_unit();
    parse_connector();
    const Date date = parse_date();
    reference = seconds_of(calendar_, date) + parse_clock() - parse_zone();
    skip_blanks();
    if (!rest_.empty()) fail(fmt::format("'{}' after the reference date is not understood", rest_));
  }

 private:
  [[noreturn]] void fail(const std::string& what) const {
    throw Error(ErrorKind::input, fmt::format("time unit '{}': {}", whole_, what), where_,
                std::string(kMendWithCalendar));
  }

  void skip_blanks() {
    while (!rest_.empty() && (std::isspace(static_cast<unsigned char>(rest_.front())) != 0 || rest_.front() == '\0'))
      rest_.remove_prefix(1);
  }

  bool take(char wanted) {
    if (rest_.empty() || rest_.front() != wanted) return false;
    rest_.remove_prefix(1);
    return true;
  }

  std::string_view take_word() {
    skip_blanks();
    std::size_t size = 0;
    while (size < rest_.size() && (std::isalpha(static_cast<unsigned char>(rest_[size])) != 0 || rest_[size] == '_'))
      ++size;
    const std::string_view word = rest_.substr(0, size);
    rest_.remove_prefix(size);
    return word;
  }

  std::string_view take_digits() {
    std::size_t size = 0;
    while (size < rest_.size() && std::isdigit(static_cast<unsigned char>(rest_[size])) != 0) ++size;
    const std::string_view digits = rest_.substr(0, size);
    rest_.remove_prefix(size);
    return digits;
  }

  static int to_int(std::string_view digits) {
    int value = 0;
    for (const char digit : digits) value = value * 10 + (digit - '0');
    return value;
  }

  // "day as %Y%m%d.%f": the digits of the value are the date, its fraction that of the day.
  bool parse_written_day() {
    std::string squeezed;
    for (const char c : lowered_)
      if (std::isspace(static_cast<unsigned char>(c)) == 0) squeezed += c;
    if (squeezed != "dayas%y%m%d.%f" && squeezed != "dayas%y%m%d") return false;
    unit = {UnitKind::written_day, 1};
    return true;
  }

  void parse_unit() {
    const std::string_view word = take_word();
    if (word.empty()) fail("it does not begin with a unit such as 'days'");
    const auto found = find_unit(word);
    if (!found) fail(unit_with_suggestion(word));
    unit = *found;
  }

  void parse_connector() {
    skip_blanks();
    if (rest_.empty())
      throw Error(ErrorKind::input,
                  fmt::format("time unit '{}' has no reference date, expected '{} since DATE'", whole_, whole_), where_,
                  mend_for(whole_, values_));
    if (take('@')) return;
    const std::string_view word = take_word();
    if (word != "since" && word != "after" && word != "from" && word != "ref")
      fail("expected 'since' and a date after the unit");
  }

  Date parse_date() {
    skip_blanks();
    const bool negative = take('-');
    if (!negative) take('+');
    const std::string_view year = take_digits();
    if (year.empty()) fail("expected a date after 'since'");
    if (year.size() > 8) fail(fmt::format("'{}' is not a year", year));
    Date date;
    if (year.size() == 8) {
      date = {to_int(year.substr(0, 4)), to_int(year.substr(4, 2)), to_int(year.substr(6, 2))};
    } else {
      date.year = to_int(year);
      if (take('-')) {
        date.month = date_part("month");
        if (take('-')) date.day = date_part("day");
      }
    }
    if (!rest_.empty() && std::string_view("./,").find(rest_.front()) != std::string_view::npos)
      fail("the reference date is not written as YEAR-MONTH-DAY");
    if (negative) date.year = -date.year;
    check_date(date, year.size());
    return date;
  }

  int date_part(const char* name) {
    const std::string_view digits = take_digits();
    if (digits.empty() || digits.size() > 2)
      fail(fmt::format("expected a {} of one or two digits, found '{}'", name, digits));
    return to_int(digits);
  }

  void check_date(const Date& date, std::size_t year_digits) {
    if (std::abs(date.year) > kMaxYear) fail(fmt::format("year {} is out of reach", date.year));
    if (date.year == 0 && !valid_date(calendar_, {0, 1, 1}) && unit.kind == UnitKind::years)
      throw Error(
          ErrorKind::input,
          fmt::format("time unit '{}': there is no year 0 in the {} calendar", whole_, calendar_name(calendar_)),
          where_, "read the values as years: [input] time = { calendar = \"proleptic_gregorian\" }");
    if (date.year == 0 && !valid_date(calendar_, {0, 1, 1}))
      throw Error(
          ErrorKind::input,
          fmt::format("time unit '{}': there is no year 0 in the {} calendar", whole_, calendar_name(calendar_)),
          where_,
          "if the file counts from year 0 of the proleptic Gregorian calendar say so in the job: [input] time = "
          "{ calendar = \"proleptic_gregorian\" }; else give the right date: time = { unit = \"days since 0001-01-01\" "
          "}");
    if (date.month < 1 || date.month > 12) fail(fmt::format("month {} does not exist, expected 1 to 12", date.month));
    if (!valid_date(calendar_, date))
      fail(fmt::format("day {} of month {} does not exist in year {} of the {} calendar", date.day, date.month,
                       date.year, calendar_name(calendar_)));
    if (year_digits == 2)
      notes.push_back(fmt::format("time unit '{}': the year is taken as written, {} AD", whole_, date.year));
  }

  // "T06:30:00.0", " 6", "0630", "063000"; nothing is midnight.
  Seconds parse_clock() {
    const std::string_view before = rest_;
    const bool marked = take('t');
    skip_blanks();
    if (rest_.empty() || std::isdigit(static_cast<unsigned char>(rest_.front())) == 0) {
      if (marked) fail("expected a time of day after the 'T'");
      rest_ = before;
      return 0;
    }
    const std::string_view digits = take_digits();
    int hour = 0, minute = 0, second = 0;
    if (digits.size() <= 2) {
      hour = to_int(digits);
      if (take(':')) {
        minute = clock_part("minute");
        if (take(':')) second = clock_part("second");
      }
    } else if (digits.size() == 4 || digits.size() == 6) {
      hour = to_int(digits.substr(0, 2));
      minute = to_int(digits.substr(2, 2));
      if (digits.size() == 6) second = to_int(digits.substr(4, 2));
    } else {
      fail(fmt::format("'{}' is not a time of day", digits));
    }
    return checked_clock(hour, minute, second, take_rounded_fraction());
  }

  int clock_part(const char* name) {
    const std::string_view digits = take_digits();
    if (digits.empty() || digits.size() > 2) fail(fmt::format("expected a {} of one or two digits", name));
    return to_int(digits);
  }

  // The fraction of a second, rounded to 0 or 1.
  Seconds take_rounded_fraction() {
    if (!take('.')) return 0;
    const std::string_view digits = take_digits();
    return !digits.empty() && digits.front() >= '5' ? 1 : 0;
  }

  Seconds checked_clock(int hour, int minute, int second, Seconds fraction) {
    if (hour == 24 && minute == 0 && second == 0) {
      notes.push_back(fmt::format("time unit '{}': 24:00:00 is taken as the next day", whole_));
      return kDay;
    }
    if (hour > 23 || minute > 59 || second > 59)
      fail(fmt::format("time of day {:02}:{:02}:{:02} does not exist", hour, minute, second));
    return hour * Seconds{3600} + minute * 60 + second + fraction;
  }

  // Seconds to take off to reach UTC: "Z", "UTC", "GMT", "+01:00", "-6", "+0530", "0:00".
  Seconds parse_zone() {
    skip_blanks();
    if (rest_.empty()) return 0;
    if (std::isalpha(static_cast<unsigned char>(rest_.front())) != 0) {
      const std::string_view word = take_word();
      if (word != "z" && word != "utc" && word != "gmt") fail(fmt::format("time zone '{}' is not understood", word));
      skip_blanks();
      if (rest_.empty()) return 0;
    }
    const bool west = take('-');
    const bool is_signed = west || take('+');
    const std::string_view digits = take_digits();
    if (digits.empty() || digits.size() > 4) fail("the time zone is not understood, expected for example +01:00");
    const bool packed = digits.size() > 2;
    const int hour = to_int(packed ? digits.substr(0, digits.size() - 2) : digits);
    const int minute = packed ? to_int(digits.substr(digits.size() - 2)) : take(':') ? clock_part("minute") : 0;
    if (hour > 14 || minute > 59) fail(fmt::format("time zone {:02}:{:02} does not exist", hour, minute));
    const Seconds shift = hour * Seconds{3600} + minute * 60;
    if (!is_signed && shift != 0) fail("a time zone needs a sign, for example +01:00");
    return west ? -shift : shift;
  }

  std::string_view whole_;
  std::string lowered_;
  std::string_view rest_;
  Calendar calendar_;
  std::span<const double> values_;
  const std::string& where_;
};

Calendar read_calendar(const std::string& name, const std::string& where, std::vector<std::string>& notes) {
  const std::string word = lower(trim(name));
  if (word.empty()) return Calendar::standard;
  if (word == "none") {
    notes.push_back(
        "calendar 'none': times are read as elapsed time in the standard calendar, their dates are mere labels");
    return Calendar::standard;
  }
  if (word == "360") notes.push_back("calendar '360' is taken as '360_day'");
  if (const auto calendar = parse_calendar(word)) return *calendar;
  const std::array<std::string, 8> known{"standard", "gregorian", "proleptic_gregorian", "julian", "noleap", "365_day",
                                         "all_leap", "360_day"};
  throw Error(ErrorKind::input, fmt::format("calendar '{}' is not one of CF{}", trim(name), did_you_mean(word, known)),
              where,
              fmt::format("name the calendar in the job: [input] time = {{ calendar = \"standard\" }} (known: {})",
                          join(known, ", ")));
}

/// Turns the values of one time variable into seconds, one by one.
class ValueDecoder {
 public:
  ValueDecoder(TimeUnit unit, Seconds reference, Calendar calendar, std::string units, const std::string& where)
      : unit_(unit), reference_(reference), calendar_(calendar), units_(std::move(units)), where_(where) {
    if (calendar == Calendar::day360 && (unit.kind == UnitKind::months || unit.kind == UnitKind::years))
      unit_ = {UnitKind::seconds, (unit.kind == UnitKind::months ? 30 : 360) * kDay};  // exact there, fractions and all
  }

  Seconds operator()(double value, std::size_t at, std::size_t count) const {
    if (std::isnan(value))
      throw Error(ErrorKind::input, fmt::format("time value {} of {} is missing (NaN)", at + 1, count), where_,
                  "correct the time in the file, or take this step out of it");
    if (!in_reach(value)) fail(value, at, count, fmt::format("in '{}' lies beyond any date", units_));
    switch (unit_.kind) {
      case UnitKind::seconds:
        return reference_ + scaled(value);
      case UnitKind::fraction:
        return reference_ + divided(value);
      case UnitKind::months:
        return calendar_months(value, 1, at, count);
      case UnitKind::years:
        return calendar_months(value, 12, at, count);
      case UnitKind::written_day:
        break;
    }
    return written_day(value, at, count);
  }

 private:
  [[noreturn]] void fail(double value, std::size_t at, std::size_t count, const std::string& what) const {
    throw Error(ErrorKind::input, fmt::format("time value {} of {}: {} {}", at + 1, count, number_text(value), what),
                where_,
                "correct or drop this step, or tell the right unit in the job: [input] time = { unit = \"days since "
                "1981-01-01\" }");
  }

  bool in_reach(double value) const {
    const double years = kMaxYear;
    switch (unit_.kind) {
      case UnitKind::seconds:
        return std::fabs(value) * static_cast<double>(unit_.size) < years * 360 * static_cast<double>(kDay);
      case UnitKind::fraction:
        return std::fabs(value) / static_cast<double>(unit_.size) < years * 360 * static_cast<double>(kDay);
      case UnitKind::months:
        return std::fabs(value) < years * 12;
      case UnitKind::years:
        return std::fabs(value) < years;
      case UnitKind::written_day:
        break;
    }
    return std::fabs(value) < (years + 1) * 10000;
  }

  // Integer and fraction apart, so that a large day number costs the fraction no digits it still has.
  Seconds scaled(double value) const {
    const double whole = std::floor(value);
    return static_cast<Seconds>(whole) * unit_.size + std::llround((value - whole) * static_cast<double>(unit_.size));
  }

  Seconds divided(double value) const {
    const auto size = static_cast<double>(unit_.size);
    const double whole = std::floor(value / size);
    return static_cast<Seconds>(whole) + std::llround((value - whole * size) / size);
  }

  // Whole calendar months after the reference; .5 is the middle between two of them.
  Seconds calendar_months(double value, std::int64_t months, std::size_t at, std::size_t count) const {
    constexpr double kSlack = 1e-5;  // of a month, for values stored as float32
    const double doubled = std::round(value * 2);
    if (std::fabs(value * 2 - doubled) > kSlack * std::max(1.0, std::fabs(value)))
      fail(value, at, count,
           fmt::format(
               "in '{}' is neither a whole number nor a half: months and years differ in length, so it names no date",
               units_));
    const auto halves = static_cast<std::int64_t>(doubled);
    const Seconds from = add_months(calendar_, reference_, floor_div(halves, 2) * months);
    if (halves % 2 == 0) return from;
    return from + (add_months(calendar_, reference_, (floor_div(halves, 2) + 1) * months) - from) / 2;
  }

  Seconds written_day(double value, std::size_t at, std::size_t count) const {
    const double whole = std::floor(std::fabs(value));
    const auto digits = static_cast<std::int64_t>(whole);
    const int year = static_cast<int>(digits / 10000);
    const Date date{value < 0 ? -year : year, static_cast<int>(digits / 100 % 100), static_cast<int>(digits % 100)};
    if (!valid_date(calendar_, date))
      fail(value, at, count,
           fmt::format("read as '{}' is not a date of the {} calendar", units_, calendar_name(calendar_)));
    return seconds_of(calendar_, date, std::llround((std::fabs(value) - whole) * static_cast<double>(kDay)));
  }

  TimeUnit unit_;
  Seconds reference_;
  Calendar calendar_;
  std::string units_;
  const std::string& where_;
};

}  // namespace

std::optional<TimeText> written_dates(std::string_view units, std::span<const double> values) {
  const std::string unit = lower(trim(units));
  const auto all = [&](auto holds) { return !values.empty() && std::all_of(values.begin(), values.end(), holds); };
  const auto whole = [](double value) { return value == std::floor(value); };
  const bool no_date = std::all_of(unit.begin(), unit.end(), [](unsigned char c) { return std::isdigit(c) == 0; });
  const bool years = unit.empty() || unit == "1" || unit == "year" || unit == "years" || unit == "yr";
  if (years && all([&](double v) { return whole(v) && v >= 1000 && v <= 3000; }))
    return TimeText{"years since 0000-01-01", "proleptic_gregorian"};
  const auto is_day = [&](double v) {
    if (!whole(v) || v < 10000101 || v > 30001231) return false;
    const auto digits = static_cast<int>(v);
    return valid_date(Calendar::all_leap, {digits / 10000, digits / 100 % 100, digits % 100});
  };
  if ((no_date || unit == "1") && all(is_day)) return TimeText{"day as %Y%m%d.%f", ""};
  return std::nullopt;
}

std::string mend_line(const TimeText& text) {
  if (text.calendar.empty()) return fmt::format("time = {{ unit = \"{}\" }}", text.units);
  return fmt::format("time = {{ unit = \"{}\", calendar = \"{}\" }}", text.units, text.calendar);
}

FileTimes decode_times(const std::string& file, const std::string& variable, std::span<const double> values,
                       const TimeText& text, std::vector<std::string>& notes) {
  const std::string where = fmt::format("file: {}, variable: {}", file, variable);
  FileTimes out;
  out.file = file;
  out.calendar = read_calendar(text.calendar, where, notes);
  ReferenceParser parser(text.units, out.calendar, values, where);
  parser.parse();
  notes.insert(notes.end(), parser.notes.begin(), parser.notes.end());
  const ValueDecoder decode(parser.unit, parser.reference, out.calendar, std::string(trim(text.units)), where);
  out.times.reserve(values.size());
  for (std::size_t at = 0; at < values.size(); ++at) out.times.push_back(decode(values[at], at, values.size()));
  return out;
}

}  // namespace lagscape
