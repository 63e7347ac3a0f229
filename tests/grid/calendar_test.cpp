#include "lagscape/grid/calendar.h"

#include <gtest/gtest.h>
#include <array>

namespace lagscape {
namespace {

constexpr std::array kAll{Calendar::standard, Calendar::proleptic_gregorian,
                          Calendar::julian,   Calendar::noleap,
                          Calendar::all_leap, Calendar::day360};

// Days since 1970-01-01 in the calendars in the order of kAll; kNone where the calendar has no such day.
// Printed by Debian's python3-cftime 1.6.2:
//   /usr/bin/python3 -c "from cftime import date2num, datetime
//   for d in [(1,1,1), (4,2,29), ...]:
//     for c in ['standard','proleptic_gregorian','julian','noleap','all_leap','360_day']:
//       print(d, c, int(date2num(datetime(*d, calendar=c), 'days since 1970-01-01', calendar=c)))"
constexpr std::int64_t kNone = INT64_MIN;
struct KnownDay {
  Date date;
  std::array<std::int64_t, 6> days;
};
constexpr KnownDay kKnown[] = {
    {{1, 1, 1}, {-719164, -719162, -719177, -718685, -720654, -708840}},
    {{4, 2, 29}, {-718010, -718008, -718023, kNone, -719497, -707702}},
    {{100, 3, 1}, {-682945, -682944, -682958, -682491, -684360, -673140}},
    {{900, 2, 28}, {-390747, -390751, -390760, -390492, -391562, -385143}},
    {{1500, 3, 1}, {-171595, -171605, -171608, -171491, -171960, -169140}},
    {{1582, 10, 4}, {-141428, -141438, -141441, -141344, -141731, -139407}},
    {{1582, 10, 15}, {-141427, -141427, -141430, -141333, -141720, -139396}},
    {{1600, 2, 29}, {-135081, -135081, -135084, kNone, -135361, -133142}},
    {{1850, 1, 1}, {-43829, -43829, -43830, -43800, -43920, -43200}},
    {{1899, 12, 31}, {-25568, -25568, -25569, -25551, -25621, kNone}},
    {{1969, 12, 31}, {-1, -1, -1, -1, -1, kNone}},
    {{1970, 1, 1}, {0, 0, 0, 0, 0, 0}},
    {{1999, 12, 30}, {10955, 10955, 10955, 10948, 10978, 10799}},
    {{2000, 2, 29}, {11016, 11016, 11016, kNone, 11039, 10858}},
    {{2015, 1, 1}, {16436, 16436, 16436, 16425, 16470, 16200}},
    {{2100, 3, 1}, {47541, 47541, 47542, 47509, 47640, 46860}},
    {{2400, 2, 29}, {157113, 157113, 157116, kNone, 157439, 154858}},
    {{9999, 12, 30}, {2932895, 2932895, 2932955, 2930948, 2938978, 2890799}},
    // Before year 1: the first and third calendar have no year 0 (cftime's default convention too).
    {{-1, 3, 1}, {-719470, -719834, -719483, kNone, kNone, -709500}},
    {{-4, 3, 1}, {-720566, -720929, -720579, kNone, kNone, -710580}},
    {{-401, 3, 1}, {-865570, -865931, -865583, kNone, kNone, -853500}},
};

TEST(Calendar, DayNumbersAgreeWithCftime) {
  for (const KnownDay& known : kKnown) {
    for (std::size_t c = 0; c < kAll.size(); ++c) {
      if (known.days[c] == kNone) continue;
      SCOPED_TRACE(std::string(calendar_name(kAll[c])) + " year " + std::to_string(known.date.year));
      EXPECT_TRUE(valid_date(kAll[c], known.date));
      EXPECT_EQ(day_number(kAll[c], known.date), known.days[c]);
      EXPECT_EQ(date_of(kAll[c], known.days[c]), known.date);
    }
  }
}

TEST(Calendar, DaysFrom1850To2015AreThoseOfEachCalendar) {
  constexpr std::array<std::int64_t, 6> expected{60265, 60265, 60266, 60225, 60390, 59400};  // cftime 1.6.2, as above
  for (std::size_t c = 0; c < kAll.size(); ++c)
    EXPECT_EQ(day_number(kAll[c], {2015, 1, 1}) - day_number(kAll[c], {1850, 1, 1}), expected[c])
        << calendar_name(kAll[c]);
}

TEST(Calendar, StandardAndProlepticDifferByTwoDaysFromYearOne) {
  const auto span = [](Calendar c) { return day_number(c, {1850, 1, 1}) - day_number(c, {1, 1, 1}); };
  EXPECT_EQ(span(Calendar::standard) - span(Calendar::proleptic_gregorian), 2);
}

TEST(Calendar, StandardCalendarGoesFrom4To15October1582) {
  const std::int64_t last = day_number(Calendar::standard, {1582, 10, 4});
  EXPECT_EQ(date_of(Calendar::standard, last + 1), (Date{1582, 10, 15}));
  for (int day = 5; day <= 14; ++day) {
    EXPECT_FALSE(valid_date(Calendar::standard, {1582, 10, day}));
    EXPECT_TRUE(valid_date(Calendar::proleptic_gregorian, {1582, 10, day}));
  }
  EXPECT_EQ(days_in_year(Calendar::standard, 1582), 355);
}

// Walks every day of the years given, from one valid date to the next, and back again from the day number.
void walk_every_day(Calendar calendar, int first_year, int last_year) {
  if (!valid_date(calendar, {first_year, 1, 1})) ++first_year;
  std::int64_t day = day_number(calendar, {first_year, 1, 1});
  for (int year = first_year; year <= last_year; ++year) {
    if (!valid_date(calendar, {year, 1, 1})) continue;
    const std::int64_t new_year = day;
    for (int month = 1; month <= 12; ++month) {
      for (int d = 1; d <= days_in_month(calendar, year, month); ++d) {
        const Date date{year, month, d};
        if (!valid_date(calendar, date)) continue;
        ASSERT_EQ(day_number(calendar, date), day)
            << calendar_name(calendar) << ' ' << year << '-' << month << '-' << d;
        ASSERT_EQ(date_of(calendar, day), date) << calendar_name(calendar) << " day " << day;
        ++day;
      }
    }
    ASSERT_EQ(day - new_year, days_in_year(calendar, year)) << calendar_name(calendar) << ' ' << year;
  }
}

TEST(Calendar, EveryDayOfManyCenturiesIsNextToItsNeighbour) {
  for (const Calendar calendar : kAll) {
    walk_every_day(calendar, -405, 410);
    walk_every_day(calendar, 1480, 2410);
  }
}

TEST(Calendar, ImpossibleDatesAreKnownAsSuch) {
  EXPECT_FALSE(valid_date(Calendar::standard, {2000, 13, 1}));
  EXPECT_FALSE(valid_date(Calendar::standard, {2000, 0, 1}));
  EXPECT_FALSE(valid_date(Calendar::standard, {2001, 2, 29}));
  EXPECT_FALSE(valid_date(Calendar::standard, {1900, 2, 29}));
  EXPECT_TRUE(valid_date(Calendar::julian, {1900, 2, 29}));
  EXPECT_TRUE(valid_date(Calendar::standard, {1500, 2, 29}));
  EXPECT_FALSE(valid_date(Calendar::proleptic_gregorian, {1500, 2, 29}));
  EXPECT_FALSE(valid_date(Calendar::noleap, {2000, 2, 29}));
  EXPECT_TRUE(valid_date(Calendar::all_leap, {2001, 2, 29}));
  EXPECT_TRUE(valid_date(Calendar::day360, {2001, 2, 30}));
  EXPECT_FALSE(valid_date(Calendar::day360, {2001, 1, 31}));
  EXPECT_FALSE(valid_date(Calendar::standard, {0, 1, 1}));
  EXPECT_FALSE(valid_date(Calendar::julian, {0, 1, 1}));
  EXPECT_TRUE(valid_date(Calendar::proleptic_gregorian, {0, 1, 1}));
}

TEST(Calendar, NamesAreReadInAnyCaseAndWrittenAsCf) {
  EXPECT_EQ(parse_calendar("GREGORIAN"), Calendar::standard);
  EXPECT_EQ(parse_calendar(" Standard "), Calendar::standard);
  EXPECT_EQ(parse_calendar("365_day"), Calendar::noleap);
  EXPECT_EQ(parse_calendar("NoLeap"), Calendar::noleap);
  EXPECT_EQ(parse_calendar("366_day"), Calendar::all_leap);
  EXPECT_EQ(parse_calendar("360"), Calendar::day360);
  EXPECT_EQ(parse_calendar("martian"), std::nullopt);
  EXPECT_EQ(parse_calendar("none"), std::nullopt);
  for (const Calendar calendar : kAll) EXPECT_EQ(parse_calendar(calendar_name(calendar)), calendar);
}

TEST(Calendar, MonthsAreNumberedWithoutAGapAtYearOne) {
  EXPECT_EQ(month_number(Calendar::standard, {1, 1, 1}) - month_number(Calendar::standard, {-1, 12, 1}), 1);
  EXPECT_EQ(month_start(Calendar::standard, month_number(Calendar::standard, {1, 1, 9}) - 1), (Date{-1, 12, 1}));
  EXPECT_EQ(month_start(Calendar::proleptic_gregorian, 11), (Date{0, 12, 1}));
}

TEST(Iso, TextNamesTheTimeOnlyWhenItIsNotMidnight) {
  EXPECT_EQ(iso_text(Calendar::standard, seconds_of(Calendar::standard, {1981, 1, 15})), "1981-01-15");
  EXPECT_EQ(iso_text(Calendar::standard, seconds_of(Calendar::standard, {1981, 1, 15}, 43200)), "1981-01-15T12:00:00");
  EXPECT_EQ(iso_text(Calendar::standard, -1), "1969-12-31T23:59:59");
  EXPECT_EQ(iso_text(Calendar::day360, -1), "1969-12-30T23:59:59");
  EXPECT_EQ(iso_text(Calendar::proleptic_gregorian, seconds_of(Calendar::proleptic_gregorian, {-12, 3, 1})),
            "-0012-03-01");
}

TEST(Iso, DatesAndDateTimesAreRead) {
  const auto at = [](int y, int m, int d, Seconds clock = 0) {
    return seconds_of(Calendar::standard, {y, m, d}, clock);
  };
  const auto read = [](const char* text) { return parse_iso(Calendar::standard, text); };
  EXPECT_EQ(read("1981"), at(1981, 1, 1));
  EXPECT_EQ(read("1981-03"), at(1981, 3, 1));
  EXPECT_EQ(read(" 1981-03-31 "), at(1981, 3, 31));
  EXPECT_EQ(read("19810331"), at(1981, 3, 31));
  EXPECT_EQ(read("1981-03-31T06:30"), at(1981, 3, 31, 23400));
  EXPECT_EQ(read("1981-03-31 06:30:05Z"), at(1981, 3, 31, 23405));
  EXPECT_EQ(read("1981-03-31T06:30:05.75"), at(1981, 3, 31, 23406));
  EXPECT_EQ(read("12000-03-31"), at(12000, 3, 31));
}

TEST(Iso, TheEndOfANamedPeriodIsItsLastSecond) {
  const auto end = [](Calendar calendar, const char* text) {
    return iso_text(calendar, *parse_iso(calendar, text, true));
  };
  EXPECT_EQ(end(Calendar::standard, "1980"), "1980-12-31T23:59:59");
  EXPECT_EQ(end(Calendar::standard, "1980-02"), "1980-02-29T23:59:59");
  EXPECT_EQ(end(Calendar::noleap, "1980-02"), "1980-02-28T23:59:59");
  EXPECT_EQ(end(Calendar::day360, "1980"), "1980-12-30T23:59:59");
  EXPECT_EQ(end(Calendar::standard, "1980-02-03"), "1980-02-03T23:59:59");
  EXPECT_EQ(end(Calendar::standard, "1980-02-03T06:00"), "1980-02-03T06:00:00");
}

TEST(Iso, MalformedTextAndImpossibleDatesGiveNothing) {
  for (const char* text : {"", "81", "1981-", "1981-13", "1981-02-30", "1981-1-1x", "1981/01/01", "01.02.1981",
                           "1981-01-01T25", "1981-01-01T06:60", "1981-01T06:00", "1981-01-01T", "1981-01-01T06:00+01",
                           "1981-01-01T06:00:00.", "1234567", "today", "1582-10-10"})
    EXPECT_EQ(parse_iso(Calendar::standard, text), std::nullopt) << text;
}

TEST(Iso, TextOfEveryHourOfTwoYearsReadsBack) {
  for (const Calendar calendar : kAll) {
    const Seconds first = seconds_of(calendar, {1999, 1, 1});
    for (Seconds time = first; time < first + 740 * kDay; time += 3607)
      ASSERT_EQ(parse_iso(calendar, iso_text(calendar, time)), time) << iso_text(calendar, time);
  }
}

}  // namespace
}  // namespace lagscape
