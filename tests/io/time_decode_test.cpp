#include "io/time_decode.h"

#include <gtest/gtest.h>
#include <algorithm>
#include <limits>
#include <random>

#include "lagscape/base/error.h"

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN(), kInfinity = std::numeric_limits<double>::infinity();

FileTimes decode(const std::vector<double>& values, const std::string& units, const std::string& calendar = "",
                 std::vector<std::string>* notes = nullptr) {
  std::vector<std::string> dropped;
  return decode_times("harrow.nc", "time", values, {units, calendar}, notes != nullptr ? *notes : dropped);
}

std::string decoded(double value, const std::string& units, const std::string& calendar = "") {
  const FileTimes times = decode({value}, units, calendar);
  return iso_text(times.calendar, times.times.at(0));
}

// The message of the error that the call throws; a test fails if it throws none.
template <typename Call>
std::string message_of(Call call) {
  try {
    call();
  } catch (const Error& error) {
    EXPECT_FALSE(error.fix().empty()) << error.what();
    return error.what();
  }
  ADD_FAILURE() << "no error was thrown";
  return {};
}

#define EXPECT_HAS(text, part) EXPECT_NE((text).find(part), std::string::npos) << (text)

// ---- units ----------------------------------------------------------------------------------------------------------

// Printed by Debian's python3-cftime 1.6.2 (year 0 of noleap and 360_day by its CF default):
//   /usr/bin/python3 -c "from cftime import num2date; print(num2date(VALUE, UNITS, CALENDAR))"
struct KnownTime {
  const char* units;
  const char* calendar;
  double value;
  const char* expected;
};
constexpr KnownTime kKnown[] = {
    {"Hour since 2001-12-31T23:00:00Z", "proleptic_gregorian", 0, "2001-12-31T23:00:00"},
    {"hours since 1900-01-01 00:00:00.0", "gregorian", 692496, "1979-01-01"},
    {"seconds since 1970-01-01 00:00:00 +00:00", "standard", 86400, "1970-01-02"},
    {"days since 1950-01-01 00:00:00 UTC", "standard", 11688.5, "1982-01-01T12:00:00"},
    {"days since 1850-1-1 0:0:0", "noleap", 54786.25, "2000-02-06T06:00:00"},
    {"days since 2000-01-01 00:00:00 +01:00", "standard", 10, "2000-01-10T23:00:00"},
    {"days since 2000-01-01 06:00 -05:30", "standard", 10, "2000-01-11T11:30:00"},
    {"days since 0001-01-01", "standard", 719163, "1969-12-31"},
    {"days since 0001-01-01", "proleptic_gregorian", 719163, "1970-01-02"},
    {"days since 0000-01-01", "noleap", 730000.5, "2000-01-01T12:00:00"},
    {"days since 0000-01-01", "360_day", 730000.5, "2027-10-11T12:00:00"},
    {"milliseconds since 1970-01-01", "standard", 1500000000123.0, "2017-07-14T02:40:00"},
    {"minutes since 1980-02-29", "all_leap", 1000000, "1982-01-22T10:40:00"},
    {"days since 2000-03-01", "julian", -1000.25, "1997-06-04T18:00:00"},
    {"days since 1583-03-01", "standard", -1000.25, "1580-05-24T18:00:00"},
    {"days since -4713-01-01 12:00:00", "julian", 2450000.5, "1995-09-27"},
    {"days since 1999-12-01", "360_day", 100.5, "2000-03-11T12:00:00"},
};

TEST(TimeUnits, DecodedTimesAgreeWithCftime) {
  for (const KnownTime& known : kKnown)
    EXPECT_EQ(decoded(known.value, known.units, known.calendar), known.expected) << known.units;
}

TEST(TimeUnits, EverySpellingOfAUnitIsRead) {
  const std::pair<const char*, const char*> cases[] = {
      {"s", "2000-01-01T00:00:02"},
      {"sec", "2000-01-01T00:00:02"},
      {"secs", "2000-01-01T00:00:02"},
      {"second", "2000-01-01T00:00:02"},
      {"SECONDS", "2000-01-01T00:00:02"},
      {"min", "2000-01-01T00:02:00"},
      {"mins", "2000-01-01T00:02:00"},
      {"Minute", "2000-01-01T00:02:00"},
      {"minutes", "2000-01-01T00:02:00"},
      {"h", "2000-01-01T02:00:00"},
      {"hr", "2000-01-01T02:00:00"},
      {"hrs", "2000-01-01T02:00:00"},
      {"hour", "2000-01-01T02:00:00"},
      {"hours", "2000-01-01T02:00:00"},
      {"d", "2000-01-03"},
      {"day", "2000-01-03"},
      {"Days", "2000-01-03"},
      {"week", "2000-01-15"},
      {"weeks", "2000-01-15"},
      {"common_year", "2001-12-31"},
      {"common_years", "2001-12-31"},
      {"month", "2000-03-01"},
      {"months", "2000-03-01"},
      {"year", "2002-01-01"},
      {"years", "2002-01-01"},
      {"yr", "2002-01-01"},
  };
  for (const auto& [unit, expected] : cases)
    EXPECT_EQ(decoded(2, std::string(unit) + " since 2000-01-01"), expected) << unit;
  EXPECT_EQ(decoded(2000, "msec since 2000-01-01"), "2000-01-01T00:00:02");
  EXPECT_EQ(decoded(2e6, "microseconds since 2000-01-01"), "2000-01-01T00:00:02");
}

TEST(TimeUnits, EveryWayToWriteTheReferenceIsRead) {
  const std::pair<const char*, const char*> cases[] = {
      {"days since 19500101", "1950-01-02"},
      {"days since 1950", "1950-01-02"},
      {"days since 1950-02", "1950-02-02"},
      {"days since 1-1-1", "0001-01-02"},
      {"  days   since   1950-01-01  ", "1950-01-02"},
      {"days after 1950-01-01", "1950-01-02"},
      {"days from 1950-01-01", "1950-01-02"},
      {"days ref 1950-01-01", "1950-01-02"},
      {"days @ 1950-01-01", "1950-01-02"},
      {"days @1950-01-01", "1950-01-02"},
      {"DAYS SINCE 1950-01-01T06:00:00Z", "1950-01-02T06:00:00"},
      {"days since 1950-01-01 6", "1950-01-02T06:00:00"},
      {"days since 1950-01-01 06:30", "1950-01-02T06:30:00"},
      {"days since 1950-01-01T0630", "1950-01-02T06:30:00"},
      {"days since 1950-01-01 6:3:5.7", "1950-01-02T06:03:06"},
      {"days since 1950-01-01 00:00:0.0", "1950-01-02"},
      {"days since 1950-01-01 00:00:00 GMT", "1950-01-02"},
      {"days since 1950-01-01 00:00:00 0:00", "1950-01-02"},
      {"days since 1950-01-01 00:00:00 UTC+2", "1950-01-01T22:00:00"},
      {"days since 1950-01-01 00:00:00 -6", "1950-01-02T06:00:00"},
      {"days since 1950-01-01 00:00:00+0530", "1950-01-01T18:30:00"},
      {"days since 1950-01-01 +01:00", "1950-01-01T23:00:00"},
  };
  for (const auto& [units, expected] : cases) EXPECT_EQ(decoded(1, units), expected) << units;
  EXPECT_EQ(decoded(1, std::string("days since 1950-01-01\0\0", 23)), "1950-01-02");
}

TEST(TimeUnits, TwentyFourHoursAreTheNextDayAndNoted) {
  std::vector<std::string> notes;
  const FileTimes times = decode({0}, "days since 1999-12-31 24:00:00", "", &notes);
  EXPECT_EQ(iso_text(times.calendar, times.times[0]), "2000-01-01");
  ASSERT_EQ(notes.size(), 1U);
  EXPECT_HAS(notes[0], "24:00:00 is taken as the next day");
}

TEST(TimeUnits, YearsOfTwoDigitsAreTakenAsWrittenAndNoted) {
  std::vector<std::string> notes;
  static_cast<void>(decode({0}, "days since 81-01-01", "", &notes));
  ASSERT_EQ(notes.size(), 1U);
  EXPECT_HAS(notes[0], "81 AD");
}

TEST(TimeUnits, ReferencesThatDoNotExistAreRefused) {
  const std::pair<const char*, const char*> cases[] = {
      {"days since 2000-13-01", "month 13 does not exist"},
      {"days since 2000-00-01", "month 0 does not exist"},
      {"days since 2001-02-29", "day 29 of month 2 does not exist in year 2001 of the standard calendar"},
      {"days since 1582-10-10", "day 10 of month 10 does not exist"},
      {"days since 2000-01-01 25:00", "time of day 25:00:00 does not exist"},
      {"days since 2000-01-01 24:30", "time of day 24:30:00 does not exist"},
      {"days since 2000-01-01 00:60", "time of day 00:60:00 does not exist"},
      {"days since 2000-01-01 00:00:00 +20:00", "time zone 20:00 does not exist"},
      {"days since 2000-01-01 00:00:00 MESZ", "time zone 'mesz' is not understood"},
      {"days since 2000-01-01 00:00:00 01:00", "a time zone needs a sign"},
      {"days since 2000-01-01 00:00:00Z about", "is not understood"},
      {"days since 1950101", "year 1950101 is out of reach"},
      {"days since 01.01.1950", "is not written as YEAR-MONTH-DAY"},
      {"days since 1950/01/01", "is not written as YEAR-MONTH-DAY"},
      {"days since start of run", "expected a date"},
      {"days until 2000-01-01", "expected 'since'"},
      {"2000-01-01", "does not begin with a unit"},
      {"dyas since 2000-01-01", "'dyas' is not a unit of time, did you mean 'days'?"},
      {"m since 2000-01-01", "'m' is not a unit of time"},
      {"days since 2000-001-01", "expected a month of one or two digits"},
      {"days since 2000-01-01T", "expected a time of day"},
  };
  for (const auto& [units, part] : cases) {
    const std::string message = message_of([&, u = units] { static_cast<void>(decode({0}, u)); });
    EXPECT_HAS(message, part);
    EXPECT_HAS(message, "file: harrow.nc, variable: time");
  }
}

TEST(TimeUnits, YearZeroIsRefusedOnlyWhereItDoesNotExist) {
  for (const char* calendar : {"", "gregorian", "julian"}) {
    const std::string message = message_of([&] { static_cast<void>(decode({0}, "days since 0000-01-01", calendar)); });
    EXPECT_HAS(message, "there is no year 0");
    EXPECT_HAS(message, "proleptic_gregorian");
  }
  EXPECT_EQ(decoded(366, "days since 0000-01-01", "proleptic_gregorian"), "0001-01-01");
  EXPECT_EQ(decoded(365, "days since 0-1-1", "noleap"), "0001-01-01");
}

TEST(TimeUnits, AMissingUnitOrReferenceNamesTheLineToAddToTheJob) {
  EXPECT_HAS(message_of([] { static_cast<void>(decode({0}, "")); }), "time = { unit = \"days since 1981-01-01\" }");
  EXPECT_HAS(message_of([] { static_cast<void>(decode({0}, "hours")); }),
             "time = { unit = \"hours since 1981-01-01\" }");
}

TEST(TimeUnits, CalendarsAreReadLenientlyOrRefusedWithTheNearestName) {
  std::vector<std::string> notes;
  EXPECT_EQ(decode({0}, "days since 1950-01-01", " NoLeap ", &notes).calendar, Calendar::noleap);
  EXPECT_TRUE(notes.empty());
  EXPECT_EQ(decode({0}, "days since 1950-01-01", "360", &notes).calendar, Calendar::day360);
  EXPECT_EQ(notes.size(), 1U);
  EXPECT_EQ(decode({0}, "days since 1950-01-01", "none", &notes).calendar, Calendar::standard);
  EXPECT_EQ(notes.size(), 2U);
  EXPECT_HAS(message_of([] { static_cast<void>(decode({0}, "days since 1950-01-01", "gregorain")); }),
             "did you mean 'gregorian'?");
}

// ---- values ---------------------------------------------------------------------------------------------------------

TEST(TimeValues, MonthsAndYearsAreThoseOfTheCalendar) {
  EXPECT_EQ(decoded(13, "months since 1981-01-15"), "1982-02-15");
  EXPECT_EQ(decoded(1, "months since 1981-01-31"), "1981-02-28");
  EXPECT_EQ(decoded(-1, "months since 1981-01-01"), "1980-12-01");
  EXPECT_EQ(decoded(0.5, "months since 1981-01-01"), "1981-01-16T12:00:00");
  EXPECT_EQ(decoded(1.5, "months since 1981-01-01"), "1981-02-15");
  EXPECT_EQ(decoded(-0.5, "months since 1981-01-01"), "1980-12-16T12:00:00");
  EXPECT_EQ(decoded(2, "years since 1981-07-01"), "1983-07-01");
  EXPECT_EQ(decoded(0.5, "years since 1981-01-01"), "1981-07-02T12:00:00");
}

TEST(TimeValues, FractionsOfAMonthAreRefusedExceptWhereMonthsAreEqual) {
  const std::string message = message_of([] { static_cast<void>(decode({0, 1, 2.25}, "months since 1981-01-01")); });
  EXPECT_HAS(message, "time value 3 of 3: 2.25");
  EXPECT_HAS(message, "neither a whole number nor a half");
  EXPECT_HAS(message_of([] { static_cast<void>(decode({1981.042}, "years since 0001-01-01")); }), "1981.042");
  EXPECT_EQ(decoded(2.25, "months since 1981-01-01", "360_day"), "1981-03-08T12:00:00");
  EXPECT_EQ(decoded(1.25, "years since 1981-01-01", "360_day"), "1982-04-01");
}

TEST(TimeValues, WrittenDaysAreReadAsDates) {
  EXPECT_EQ(decoded(19810115.5, "day as %Y%m%d.%f"), "1981-01-15T12:00:00");
  EXPECT_EQ(decoded(19810115, "day as %Y%m%d"), "1981-01-15");
  EXPECT_EQ(decoded(19810230, "day as %Y%m%d.%f", "360_day"), "1981-02-30");
  EXPECT_EQ(decoded(10115.25, "day as %Y%m%d.%f"), "0001-01-15T06:00:00");
  EXPECT_HAS(message_of([] { static_cast<void>(decode({19810230}, "day as %Y%m%d.%f")); }),
             "is not a date of the standard calendar");
}

TEST(TimeValues, MissingAndAbsurdValuesNameTheirStep) {
  EXPECT_HAS(message_of([] {
               static_cast<void>(decode({0, kNaN, 2}, "days since 1981-01-01"));
             }),
             "time value 2 of 3 is missing");
  EXPECT_HAS(message_of([] {
               static_cast<void>(decode({0, 1, 9.969209968386869e36}, "days since 1981-01-01"));
             }),
             "lies beyond any date");
  EXPECT_HAS(message_of([] { static_cast<void>(decode({kInfinity}, "months since 1981-01-01")); }),
             "lies beyond any date");
  EXPECT_HAS(message_of([] { static_cast<void>(decode({-kInfinity}, "day as %Y%m%d.%f")); }), "lies beyond any date");
}

TEST(TimeValues, EverySecondOfALargeDayNumberSurvivesTheRoundTrip) {
  // Day numbers near 730000 keep about 1e-10 days in a double: the second is exact if integer and fraction stay apart.
  for (Seconds second = 0; second < kDay; second += 7) {
    const double value = 730120 + static_cast<double>(second) / static_cast<double>(kDay);
    const FileTimes times = decode({value}, "days since 0001-01-01", "proleptic_gregorian");
    ASSERT_EQ(floor_div(times.times[0], kDay) * kDay + second, times.times[0]);
  }
}

// ---- join -----------------------------------------------------------------------------------------------------------

FileTimes file_of(const std::string& name, const std::vector<std::string>& stamps,
                  Calendar calendar = Calendar::standard) {
  FileTimes file{name, calendar, {}};
  for (const std::string& stamp : stamps) file.times.push_back(parse_iso(calendar, stamp).value());
  return file;
}

JoinedAxis join_one(const std::vector<std::string>& stamps, Calendar calendar = Calendar::standard) {
  return join_times({file_of("harrow.nc", stamps, calendar)}, std::nullopt, std::nullopt);
}

void expect_axis(const JoinedAxis& joined, const std::string& step, const std::string& first, const std::string& last,
                 std::size_t size) {
  EXPECT_EQ(duration_text(joined.axis.step()), step);
  ASSERT_EQ(joined.axis.size(), size);
  EXPECT_EQ(joined.axis.label(0), first);
  EXPECT_EQ(joined.axis.label(size - 1), last);
}

TEST(Join, MonthlyStampsOfEveryConventionAreMonthly) {
  expect_axis(join_one({"2001-01-01", "2001-02-01", "2001-03-01", "2001-04-01"}), "P1M", "2001-01-01", "2001-04-01", 4);
  expect_axis(join_one({"2001-01-16T12:00", "2001-02-15", "2001-03-16T12:00", "2001-04-16"}), "P1M",
              "2001-01-16T12:00:00", "2001-04-16T12:00:00", 4);
  expect_axis(join_one({"2001-02-28", "2001-03-31", "2001-04-30", "2001-05-31"}), "P1M", "2001-02-28", "2001-05-31", 4);
  expect_axis(join_one({"2001-01-15", "2001-02-15", "2001-03-15"}), "P1M", "2001-01-15", "2001-03-15", 3);
  expect_axis(join_one({"2001-01-01", "2001-02-01"}), "P1M", "2001-01-01", "2001-02-01", 2);
  expect_axis(join_one({"2001-01-16", "2001-02-16", "2001-03-16"}, Calendar::day360), "P1M", "2001-01-16", "2001-03-16",
              3);
}

TEST(Join, MonthlyDataWithSeveralMonthsMissingAreStillMonthly) {
  const JoinedAxis joined =
      join_one({"2001-01-16", "2001-02-15", "2001-03-16", "2001-06-16", "2001-07-16", "2002-01-16"});
  expect_axis(joined, "P1M", "2001-01-16", "2002-01-16", 13);
  EXPECT_EQ(joined.steps_present, 6U);
  EXPECT_EQ(joined.axis_step[0], (std::vector<std::int64_t>{0, 1, 2, 5, 6, 12}));
  ASSERT_EQ(joined.notes.size(), 1U);
  EXPECT_EQ(
      joined.notes[0],
      "7 steps of 13 are in no file and count as missing; the longest run of them is 5 (2001-08-16 to 2001-12-16)");
}

TEST(Join, SummerMonthsOfEachYearAreMonthly) {
  expect_axis(join_one({"2001-06-16", "2001-07-16", "2001-08-16", "2002-06-16", "2002-07-16", "2002-08-16"}), "P1M",
              "2001-06-16", "2002-08-16", 15);
}

TEST(Join, StampsThatWanderWithinTheirMonthAreMonthly) {
  const auto joined =
      join_times({file_of("a.nc", {"2001-01-01", "2001-02-01", "2001-03-01", "2001-04-01", "2001-05-01"}),
                  file_of("b.nc", {"2001-06-16", "2001-07-16", "2001-08-16"})},
                 std::nullopt, std::nullopt);
  expect_axis(joined, "P1M", "2001-01-01", "2001-08-01", 8);
  EXPECT_EQ(joined.steps_present, 8U);
}

TEST(Join, RoundingNoiseAroundTheBeginningOfAMonthDoesNotMoveAStepToTheMonthBefore) {
  const auto joined =
      join_one({"2001-01-01T00:20", "2001-01-31T23:40", "2001-03-01", "2001-03-31T23:30", "2001-05-01T00:10"});
  expect_axis(joined, "P1M", "2001-01-01", "2001-05-01", 5);
  EXPECT_EQ(joined.axis_step[0], (std::vector<std::int64_t>{0, 1, 2, 3, 4}));
}

TEST(Join, MultiplesOfMonthsAndYearsAreFound) {
  expect_axis(join_one({"2001-01-01", "2001-04-01", "2001-07-01", "2001-10-01", "2002-01-01"}), "P3M", "2001-01-01",
              "2002-01-01", 5);
  expect_axis(join_one({"1999-01-01", "2000-01-01", "2001-01-01", "2003-01-01"}), "P1Y", "1999-01-01", "2003-01-01", 5);
  expect_axis(join_one({"1999-07-02", "2000-07-01", "2001-07-02"}), "P1Y", "1999-07-02", "2001-07-02", 3);
  expect_axis(join_one({"1990-06-30", "2000-06-30", "2010-06-30"}), "P10Y", "1990-06-30", "2010-06-30", 3);
  expect_axis(join_one({"1999-12-31", "2000-12-31", "2001-12-31"}), "P1Y", "1999-12-31", "2001-12-31", 3);
  expect_axis(join_one({"2001-01-01", "2002-01-01", "2003-01-01"}, Calendar::day360), "P1Y", "2001-01-01", "2003-01-01",
              3);
}

std::vector<std::string> days(const std::string& first, std::size_t count, Calendar calendar = Calendar::standard,
                              Seconds step = kDay) {
  std::vector<std::string> out;
  const Seconds from = parse_iso(calendar, first).value();
  for (std::size_t i = 0; i < count; ++i) out.push_back(iso_text(calendar, from + static_cast<Seconds>(i) * step));
  return out;
}

TEST(Join, FixedStepsAreFound) {
  expect_axis(join_one(days("2001-01-01", 400)), "P1D", "2001-01-01", "2002-02-04", 400);
  expect_axis(join_one(days("2001-01-01T12:00", 60, Calendar::noleap)), "P1D", "2001-01-01T12:00:00",
              "2001-03-01T12:00:00", 60);
  expect_axis(join_one(days("2001-01-01T03:00", 50, Calendar::standard, 21600)), "PT6H", "2001-01-01T03:00:00",
              "2001-01-13T09:00:00", 50);
  expect_axis(join_one(days("2001-01-01", 50, Calendar::standard, 90000)), "PT25H", "2001-01-01", "2001-02-21T01:00:00",
              50);
  expect_axis(join_one(days("2001-01-01", 2, Calendar::standard, 90000)), "PT25H", "2001-01-01", "2001-01-02T01:00:00",
              2);
  expect_axis(join_one(days("2001-01-01", 52, Calendar::standard, 7 * kDay)), "P7D", "2001-01-01", "2001-12-24", 52);
}

TEST(Join, ThirtyEqualDaysAreNotAMonthOutsideThe360DayCalendar) {
  expect_axis(join_one(days("2001-01-01", 24, Calendar::standard, 30 * kDay)), "P30D", "2001-01-01", "2002-11-22", 24);
  expect_axis(join_one(days("2001-01-01", 4, Calendar::standard, 30 * kDay)), "P30D", "2001-01-01", "2001-04-01", 4);
  expect_axis(join_one(days("2001-01-01", 24, Calendar::day360, 30 * kDay)), "P1M", "2001-01-01", "2002-12-01", 24);
}

TEST(Join, DailyDataWithoutWeekendsAreDailyWithGaps) {
  std::vector<std::string> stamps = days("2001-01-01", 70);  // a Monday
  for (std::size_t i = stamps.size(); i-- > 0;)
    if (i % 7 >= 5) stamps.erase(stamps.begin() + static_cast<std::ptrdiff_t>(i));
  const JoinedAxis joined = join_one(stamps);
  expect_axis(joined, "P1D", "2001-01-01", "2001-03-09", 68);
  EXPECT_EQ(joined.steps_present, 50U);
}

TEST(Join, ModelDaysWithoutLeapDaysOnAStandardCalendarAreDailyWithGaps) {
  std::vector<std::string> stamps = days("2000-01-01", 1500);
  stamps.erase(stamps.begin() + 59);  // 2000-02-29
  stamps.erase(stamps.begin() + 1519 - 60);
  const JoinedAxis joined = join_one(stamps);
  EXPECT_EQ(duration_text(joined.axis.step()), "P1D");
  EXPECT_EQ(joined.axis.size(), 1500U);
  EXPECT_EQ(joined.steps_present, 1498U);
}

TEST(Join, StepsThatNeverFollowEachOtherDirectlyAreFoundToo) {
  const JoinedAxis joined =
      join_one({"2001-01-01", "2001-01-03", "2001-01-06", "2001-01-08", "2001-01-11", "2001-01-13", "2001-01-16"});
  expect_axis(joined, "P1D", "2001-01-01", "2001-01-16", 16);
  EXPECT_EQ(joined.steps_present, 7U);
}

TEST(Join, HoursStoredAsFloat32DaysAreSnapped) {
  std::vector<double> values;
  for (int hour = 0; hour < 1000; ++hour)
    values.push_back(static_cast<double>(static_cast<float>(51000 + hour / 24.0)));
  const FileTimes file = decode(values, "days since 1850-01-01");
  const JoinedAxis joined = join_times({file}, std::nullopt, std::nullopt);
  expect_axis(joined, "PT1H", "1989-08-20", "1989-09-30T15:00:00", 1000);
  EXPECT_EQ(joined.steps_present, 1000U);
  ASSERT_EQ(joined.notes.size(), 1U);
  EXPECT_HAS(joined.notes[0], "times snapped to equal steps (hourly), the largest shift is");
}

TEST(Join, JitterIsSnappedAndTheLargestShiftNoted) {
  std::mt19937 random(11);
  std::uniform_int_distribution<int> jitter(-500, 500);
  FileTimes file{"harrow.nc", Calendar::standard, {}};
  const Seconds first = seconds_of(Calendar::standard, {2001, 1, 1});
  for (int hour = 0; hour < 3000; ++hour)
    if (hour % 17 != 3) file.times.push_back(first + hour * 3600 + jitter(random));
  const JoinedAxis joined = join_times({file}, std::nullopt, std::nullopt);
  expect_axis(joined, "PT1H", "2001-01-01", "2001-05-05T23:00:00", 3000);
  EXPECT_HAS(joined.notes.at(0), "largest shift is 8.3");
}

TEST(Join, ThirtySixStampsAYearAreEvenOnAverageAndTheShiftIsSaid) {
  std::vector<std::string> stamps;
  for (int year = 2001; year < 2005; ++year)
    for (int month = 1; month <= 12; ++month)
      for (const int day : {1, 11, 21})
        stamps.push_back(iso_text(Calendar::standard, seconds_of(Calendar::standard, {year, month, day})));
  const JoinedAxis joined = join_one(stamps);
  EXPECT_EQ(joined.axis.size(), 144U);
  EXPECT_EQ(joined.steps_present, 144U);
  EXPECT_EQ(joined.axis.lag_unit(), "day");
  EXPECT_NEAR(joined.axis.lag_unit_per_step(), 1461.0 / 144, 0.03);
  EXPECT_HAS(joined.notes.at(0), "the largest shift is");
}

TEST(Join, UnevenTimesAreRefusedWithTheGapThatBreaksThePattern) {
  std::vector<std::string> stamps = days("2001-01-01", 20, Calendar::standard, 10 * kDay);
  stamps.push_back("2001-07-15");
  stamps.push_back("2001-07-29");
  const std::string message = message_of([&] { static_cast<void>(join_one(stamps)); });
  EXPECT_HAS(message, "the commonest step is 10 days (19 of 21)");
  EXPECT_HAS(message, "steps of unequal length");
  EXPECT_HAS(message, "harrow.nc, time step 21");
}

TEST(Join, StepsThatBeginAnewEachYearAreRefusedWithoutAdviceThatFails) {
  std::vector<std::string> stamps;
  for (int year = 2001; year <= 2010; ++year)
    for (int i = 0; i < 46; ++i)
      stamps.push_back(iso_text(Calendar::standard, seconds_of(Calendar::standard, {year, 1, 1}) + i * 8 * kDay));
  const std::string message = message_of([&] { static_cast<void>(join_one(stamps)); });
  EXPECT_HAS(message, "the commonest step is 8 days");
  EXPECT_HAS(message, "begin anew each year are not supported by this version");
  EXPECT_EQ(message.find("time = {"), std::string::npos);
}

TEST(Join, MonthlyStampsOfWhichTwoShareAMonthAreNamed) {
  const std::vector<std::string> stamps{"2001-01-15", "2001-02-15", "2001-03-01", "2001-03-31",
                                        "2001-05-15", "2001-06-15", "2001-07-15"};
  const std::string message = message_of([&] { static_cast<void>(join_one(stamps)); });
  EXPECT_HAS(message, "times look monthly, but 2001-03-01 and 2001-03-31 lie in one month");
  EXPECT_HAS(message, "duplicates = \"mean\"");
  const JoinedAxis joined = join_times({file_of("a.nc", stamps)}, TimeStep{StepKind::months, 1}, std::nullopt);
  expect_axis(joined, "P1M", "2001-01-15", "2001-07-15", 7);
  EXPECT_EQ(joined.overlaps.size(), 1U);
}

TEST(Join, StampsAnywhereInTheirMonthsAreSnappedWithANote) {
  const JoinedAxis joined =
      join_one({"2001-01-05", "2001-02-25", "2001-03-20", "2001-04-18", "2001-05-20", "2001-06-20"});
  expect_axis(joined, "P1M", "2001-01-05", "2001-06-05", 6);
  EXPECT_HAS(joined.notes.at(0), "times snapped to equal steps (monthly), the largest shift is 20 days");
}

TEST(Join, ASingleTimeIsRefusedUnlessTheJobGivesTheStep) {
  const FileTimes file = file_of("harrow.nc", {"2001-01-16"});
  const std::string message = message_of([&] { static_cast<void>(join_times({file}, std::nullopt, std::nullopt)); });
  EXPECT_HAS(message, "single time step, 2001-01-16");
  EXPECT_HAS(message, "name all files of the archive together");
  expect_axis(join_times({file}, TimeStep{StepKind::months, 1}, std::nullopt), "P1M", "2001-01-16", "2001-01-16", 1);
}

TEST(Join, AGivenStepIsKept) {
  const std::vector<FileTimes> files{file_of("a.nc", {"2001-01-05", "2001-01-25", "2001-02-10", "2001-04-20"})};
  const JoinedAxis monthly = join_times(files, TimeStep{StepKind::months, 1}, std::nullopt);
  expect_axis(monthly, "P1M", "2001-01-05", "2001-04-05", 4);
  ASSERT_EQ(monthly.overlaps.size(), 1U);  // two visits in January
  EXPECT_EQ(monthly.overlaps[0].step_a, 0U);
  EXPECT_EQ(monthly.overlaps[0].step_b, 1U);
  const std::string message = message_of([&] {
    static_cast<void>(join_times(files, TimeStep{StepKind::seconds, 10 * kDay}, std::nullopt));
  });
  EXPECT_HAS(message, "do not fit the step P10D");
}

TEST(Join, FilesComeInAnyOrderAndWithTheirOwnEpochs) {
  std::vector<std::string> notes;
  const FileTimes late =
      decode_times("late.nc", "time", std::vector<double>{0, 24, 48}, {"hours since 2001-01-03", ""}, notes);
  const FileTimes early =
      decode_times("early.nc", "time", std::vector<double>{365, 366}, {"days since 2000-01-02", ""}, notes);
  const JoinedAxis joined = join_times({late, early}, std::nullopt, std::nullopt);
  expect_axis(joined, "P1D", "2001-01-01", "2001-01-05", 5);
  EXPECT_EQ(joined.axis_step[0], (std::vector<std::int64_t>{2, 3, 4}));
  EXPECT_EQ(joined.axis_step[1], (std::vector<std::int64_t>{0, 1}));
  EXPECT_TRUE(joined.overlaps.empty());
}

TEST(Join, OverlapsAreListedAgainstTheFirstHolder) {
  const JoinedAxis joined = join_times({file_of("a.nc", {"2001-01-01", "2001-01-02", "2001-01-03", "2001-01-03"}),
                                        file_of("b.nc", {"2001-01-03", "2001-01-04"})},
                                       std::nullopt, std::nullopt);
  ASSERT_EQ(joined.overlaps.size(), 2U);
  EXPECT_EQ(joined.overlaps[0].axis_step, 2U);
  EXPECT_EQ(joined.overlaps[0].file_b, 0U);
  EXPECT_EQ(joined.overlaps[0].step_b, 3U);
  EXPECT_EQ(joined.overlaps[1].file_a, 0U);
  EXPECT_EQ(joined.overlaps[1].step_a, 2U);
  EXPECT_EQ(joined.overlaps[1].file_b, 1U);
  EXPECT_EQ(joined.overlaps[1].step_b, 0U);
  EXPECT_EQ(joined.steps_present, 4U);
}

TEST(Join, CopiesOfATimeThatDifferByRoundingNoiseOverlap) {
  FileTimes a{"a.nc", Calendar::standard, {}}, b{"b.nc", Calendar::standard, {}};
  const Seconds first = seconds_of(Calendar::standard, {2001, 1, 1});
  for (int t = 0; t < 48; ++t) a.times.push_back(first + t * 3600);
  for (int t = 40; t < 80; ++t) b.times.push_back(first + t * 3600 + (t % 3 - 1) * 20);
  const JoinedAxis joined = join_times({a, b}, std::nullopt, std::nullopt);
  expect_axis(joined, "PT1H", "2001-01-01", "2001-01-04T07:00:00", 80);
  EXPECT_EQ(joined.overlaps.size(), 8U);
  EXPECT_EQ(joined.steps_present, 80U);
}

TEST(Join, TimesOutOfOrderAreSortedAndNoted) {
  const JoinedAxis joined = join_one({"2001-01-03", "2001-01-01", "2001-01-02"});
  EXPECT_EQ(joined.axis_step[0], (std::vector<std::int64_t>{2, 0, 1}));
  ASSERT_EQ(joined.notes.size(), 1U);
  EXPECT_HAS(joined.notes[0], "harrow.nc: times are not in ascending order");
}

TEST(Join, MixedCalendarsAreRefusedNamingBothFilesUnlessTheirDatesAgree) {
  const std::vector<std::string> stamps{"2001-01-01", "2001-01-02"};
  const std::string message = message_of([&] {
    static_cast<void>(
        join_times({file_of("a.nc", stamps), file_of("b.nc", stamps, Calendar::noleap)}, std::nullopt, std::nullopt));
  });
  EXPECT_HAS(message, "a.nc has 'standard', b.nc has 'noleap'");
  const std::vector<std::string> later{"2001-01-03"};
  EXPECT_EQ(join_times({file_of("a.nc", stamps), file_of("b.nc", later, Calendar::proleptic_gregorian)}, std::nullopt,
                       std::nullopt)
                .axis.size(),
            3U);
}

TEST(Join, AFileWithoutTimesIsPassedOverButNotAWholeArchiveOfThem) {
  EXPECT_EQ(join_times({file_of("a.nc", {}), file_of("b.nc", {"2001-01-01", "2001-01-02"})}, std::nullopt, std::nullopt)
                .steps_present,
            2U);
  EXPECT_HAS(message_of([] { static_cast<void>(join_one({})); }), "no file holds a time step");
}

JoinedAxis join_period(const std::vector<std::string>& stamps, const std::string& from, const std::string& to,
                       Calendar calendar = Calendar::standard) {
  return join_times({file_of("harrow.nc", stamps, calendar)}, std::nullopt, std::pair(from, to));
}

TEST(Period, BothEndsAreInclusiveAtTheirOwnPrecision) {
  const std::vector<std::string> stamps = days("2000-01-01T12:00", 1000);
  expect_axis(join_period(stamps, "2000-02", "2000-02"), "P1D", "2000-02-01T12:00:00", "2000-02-29T12:00:00", 29);
  expect_axis(join_period(stamps, "2001", "2001"), "P1D", "2001-01-01T12:00:00", "2001-12-31T12:00:00", 365);
  expect_axis(join_period(stamps, "2000-03-01", "2000-03-02"), "P1D", "2000-03-01T12:00:00", "2000-03-02T12:00:00", 2);
  EXPECT_TRUE(join_period(stamps, "2001", "2001").notes.empty());
}

TEST(Period, StepsOutsideItAreMarkedAndTheirOverlapsDropped) {
  const JoinedAxis joined = join_times({file_of("a.nc", {"2001-01-01", "2001-01-02", "2001-01-03"}),
                                        file_of("b.nc", {"2001-01-01", "2001-01-03", "2001-01-04"})},
                                       std::nullopt, std::pair<std::string, std::string>("2001-01-02", "2001-01-03"));
  EXPECT_EQ(joined.axis_step[0], (std::vector<std::int64_t>{-1, 0, 1}));
  EXPECT_EQ(joined.axis_step[1], (std::vector<std::int64_t>{-1, 1, -1}));
  ASSERT_EQ(joined.overlaps.size(), 1U);
  EXPECT_EQ(joined.overlaps[0].axis_step, 1U);
}

TEST(Period, ReachingBeyondTheFilesIsCutAndNoted) {
  const JoinedAxis joined = join_period(days("2001-01-01", 100), "1990-01-01", "2001-01-31");
  expect_axis(joined, "P1D", "2001-01-01", "2001-01-31", 31);
  ASSERT_EQ(joined.notes.size(), 1U);
  EXPECT_HAS(joined.notes[0], "reaches beyond the files, which cover 2001-01-01 to 2001-04-10");
  EXPECT_EQ(join_period(days("2001-01-01", 100), "2001-04-01", "2002").notes.size(), 1U);
}

TEST(Period, AWholeMonthOrYearAroundTheStampsIsNotBeyondThem) {
  std::vector<std::string> stamps;
  for (int month = 1; month <= 12; ++month)
    stamps.push_back("2001-" + std::string(month < 10 ? "0" : "") + std::to_string(month) + "-16");
  const JoinedAxis joined = join_period(stamps, "2001-01-01", "2001-12-31");
  EXPECT_EQ(joined.axis.size(), 12U);
  EXPECT_TRUE(joined.notes.empty());
}

TEST(Period, OutsideTheFilesItIsAnErrorThatSaysWhatTheyCover) {
  EXPECT_HAS(message_of([] { static_cast<void>(join_period(days("2001-01-01", 100), "1990", "1999")); }),
             "cover 2001-01-01 to 2001-04-10");
  EXPECT_HAS(message_of([] {
               static_cast<void>(join_period({"2001-01-01", "2001-01-02", "2001-02-01"}, "2001-01-10", "2001-01-20"));
             }),
             "only before and after");
  EXPECT_HAS(message_of([] { static_cast<void>(join_period(days("2001-01-01", 9), "2001-02", "2001-01")); }),
             "begins after it ends");
  EXPECT_HAS(message_of([] { static_cast<void>(join_period(days("2001-01-01", 9), "Monday", "2001-01")); }),
             "'Monday' in [input] period");
}

TEST(Period, DaysThatTheCalendarLacksMeanTheNearestInside) {
  std::vector<std::string> stamps = days("2000-01-01", 720, Calendar::day360);
  EXPECT_EQ(join_period(stamps, "2000-01-01", "2000-12-31", Calendar::day360).axis.size(), 360U);
  stamps = days("2000-01-01", 730, Calendar::noleap);
  expect_axis(join_period(stamps, "2000-02-29", "2000-03-02", Calendar::noleap), "P1D", "2000-03-01", "2000-03-02", 2);
}

TEST(Cap, AnAxisThatIsNearlyEmptyIsRefusedNamingTheLonelyTime) {
  std::vector<std::string> stamps = days("2001-01-01", 100);
  stamps.insert(stamps.begin(), "1800-01-01");
  const std::string message = message_of([&] { static_cast<void>(join_one(stamps)); });
  EXPECT_HAS(message, "1800-01-01 is likely wrong");
  EXPECT_HAS(message, "harrow.nc, time step 1");
  stamps.erase(stamps.begin());
  stamps.push_back("9999-12-31");
  EXPECT_HAS(message_of([&] { static_cast<void>(join_one(stamps)); }), "9999-12-31 is likely wrong");
}

TEST(Cap, AnAxisBeyondFiftyMillionStepsIsRefused) {
  FileTimes file{"harrow.nc", Calendar::standard, {}};
  for (int i = 0; i < 600000; ++i) file.times.push_back(i);
  file.times.push_back(59'000'000);  // just over 1 % would be there
  EXPECT_HAS(message_of([&] { static_cast<void>(join_times({file}, std::nullopt, std::nullopt)); }),
             "59 000 001 steps (every second)");
}

// Law: however an archive is split into files and in whatever order they come, the axis is that of the whole, and every
// stamp goes to the step that stands for it.
TEST(Join, ShuffledSplitsGiveTheAxisOfTheWhole) {
  std::mt19937 random(5);
  const TimeStep steps[] = {{StepKind::seconds, 3600}, {StepKind::seconds, kDay}, {StepKind::seconds, 8 * kDay},
                            {StepKind::months, 1},     {StepKind::months, 3},     {StepKind::years, 1}};
  const Calendar calendars[] = {Calendar::standard, Calendar::julian, Calendar::noleap, Calendar::all_leap,
                                Calendar::day360};
  for (int trial = 0; trial < 600; ++trial) {
    const Calendar calendar = calendars[trial % 5];
    const TimeStep step = steps[trial % 6];
    const int day = trial % 4 == 0 ? 31 : 1 + static_cast<int>(random() % 28);
    const Date first{1890 + static_cast<int>(random() % 100), 1 + static_cast<int>(random() % 12), std::min(day, 30)};
    const Date start{first.year, first.month, std::min(first.day, days_in_month(calendar, first.year, first.month))};
    const TimeAxis truth(calendar, step, seconds_of(calendar, start, 3600 * static_cast<Seconds>(random() % 24)),
                         30 + random() % 200);
    std::vector<FileTimes> files(1 + random() % 5, FileTimes{"", calendar, {}});
    std::vector<std::vector<std::int64_t>> expected(files.size());
    for (std::size_t t = 0; t < truth.size(); ++t) {
      const bool inside = t > 1 && t + 1 < truth.size();
      if (inside && random() % 5 == 0) continue;  // a fifth of the steps is missing
      const std::size_t file = random() % files.size();
      files[file].times.push_back(truth.time(t));
      expected[file].push_back(static_cast<std::int64_t>(t));
    }
    const JoinedAxis joined = join_times(files, std::nullopt, std::nullopt);
    ASSERT_EQ(joined.axis.size(), truth.size())
        << trial << ' ' << duration_text(step) << ' ' << duration_text(joined.axis.step());
    ASSERT_EQ(joined.axis.step(), step);
    ASSERT_EQ(joined.axis_step, expected);
    ASSERT_TRUE(joined.overlaps.empty());
    for (std::size_t t = 0; t < truth.size(); ++t)
      ASSERT_EQ(joined.axis.index_of(truth.time(t)), static_cast<std::int64_t>(t));
  }
}

// Law: no text makes the parser do anything but decode or refuse.
TEST(TimeUnits, RandomTextIsDecodedOrRefused) {
  std::mt19937 random(3);
  const std::string pieces[] = {"days", "since", " ",           "-", "+", ":",     "T", "Z",  "1981",
                                "01",   "31",    "99999999999", ".", "@", "month", "s", "\0", "%"};
  int refused = 0;
  for (int trial = 0; trial < 20000; ++trial) {
    std::string units = trial % 2 == 0 ? "days since " : "";
    for (std::size_t i = random() % 9; i > 0; --i) units += pieces[random() % std::size(pieces)];
    try {
      static_cast<void>(decode({1.5}, units));
    } catch (const Error& error) {
      EXPECT_EQ(error.kind(), ErrorKind::input);
      ++refused;
    }
  }
  EXPECT_GT(refused, 15000);
  EXPECT_LT(refused, 20000);
}

}  // namespace
}  // namespace lagscape
