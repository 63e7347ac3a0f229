#include "lagscape/grid/time_axis.h"

#include <gtest/gtest.h>
#include <array>

namespace lagscape {
namespace {

constexpr TimeStep kMonthly{StepKind::months, 1};
constexpr TimeStep kDaily{StepKind::seconds, kDay};

Seconds at(Calendar calendar, int year, int month, int day, Seconds clock = 0) {
  return seconds_of(calendar, {year, month, day}, clock);
}

TEST(Duration, WholeUnitsAreRead) {
  EXPECT_EQ(parse_duration("P1M"), kMonthly);
  EXPECT_EQ(parse_duration("P5Y"), (TimeStep{StepKind::years, 5}));
  EXPECT_EQ(parse_duration("P30D"), (TimeStep{StepKind::seconds, 30 * kDay}));
  EXPECT_EQ(parse_duration("PT6H"), (TimeStep{StepKind::seconds, 6 * 3600}));
  EXPECT_EQ(parse_duration("PT30M"), (TimeStep{StepKind::seconds, 1800}));
  EXPECT_EQ(parse_duration("P1W"), (TimeStep{StepKind::seconds, 7 * kDay}));
  EXPECT_EQ(parse_duration("P1DT12H"), (TimeStep{StepKind::seconds, 36 * 3600}));
  EXPECT_EQ(parse_duration(" p1m "), kMonthly);
}

TEST(Duration, MalformedMixedOrEmptyDurationsGiveNothing) {
  for (const char* text : {"", "P", "PT", "1M", "P0D", "P-1D", "P1.5D", "P1", "P1H", "PT1D", "P1Y6M", "P1MT1H", "P1DT",
                           "month", "P99999999999D"})
    EXPECT_EQ(parse_duration(text), std::nullopt) << text;
}

TEST(Duration, TextReadsBackAsTheSameStep) {
  for (const TimeStep step :
       {kMonthly, TimeStep{StepKind::months, 12}, TimeStep{StepKind::years, 5}, kDaily,
        TimeStep{StepKind::seconds, 21600}, TimeStep{StepKind::seconds, 90}, TimeStep{StepKind::seconds, 7}})
    EXPECT_EQ(parse_duration(duration_text(step)), step) << duration_text(step);
  EXPECT_EQ(duration_text({StepKind::seconds, 10 * kDay}), "P10D");
  EXPECT_EQ(duration_text({StepKind::seconds, 21600}), "PT6H");
}

TEST(Duration, WordsForPeople) {
  EXPECT_EQ(step_words(kMonthly), "monthly");
  EXPECT_EQ(step_words(kDaily), "daily");
  EXPECT_EQ(step_words({StepKind::years, 1}), "yearly");
  EXPECT_EQ(step_words({StepKind::seconds, 21600}), "every 6 hours");
  EXPECT_EQ(step_words({StepKind::months, 3}), "every 3 months");
  EXPECT_EQ(step_words({StepKind::seconds, 3600}), "hourly");
  EXPECT_EQ(step_words({StepKind::seconds, 10 * kDay + 8640}), "every 10.1 days");
}

TEST(TimeAxis, MonthlyStepsKeepTheDayOfTheMonthWhereItExists) {
  const TimeAxis axis(Calendar::standard, kMonthly, at(Calendar::standard, 1999, 12, 31, 43200), 5);
  EXPECT_EQ(axis.label(0), "1999-12-31T12:00:00");
  EXPECT_EQ(axis.label(1), "2000-01-31T12:00:00");
  EXPECT_EQ(axis.label(2), "2000-02-29T12:00:00");
  EXPECT_EQ(axis.label(3), "2000-03-31T12:00:00");
  EXPECT_EQ(axis.label(4), "2000-04-30T12:00:00");
}

TEST(TimeAxis, ASliceKeepsTheNominalDayOfTheMonth) {
  const TimeAxis axis(Calendar::standard, kMonthly, at(Calendar::standard, 2001, 1, 31), 6);
  const TimeAxis part = axis.slice(1, 3);
  for (std::size_t t = 0; t < 3; ++t) EXPECT_EQ(part.label(t), axis.label(t + 1));
  EXPECT_EQ(axis.slice(0, 6), axis);
  const TimeAxis month_end(Calendar::standard, kMonthly, at(Calendar::standard, 2001, 2, 28), 3, 31);
  EXPECT_EQ(month_end.label(2), "2001-04-30");
}

TEST(TimeAxis, LeapYearsClampYearlySteps) {
  const TimeAxis axis(Calendar::standard, {StepKind::years, 1}, at(Calendar::standard, 2000, 2, 29), 5);
  EXPECT_EQ(axis.label(1), "2001-02-28");
  EXPECT_EQ(axis.label(4), "2004-02-29");
}

TEST(TimeAxis, DaysThatTheStandardCalendarLeftOutAreClampedToo) {
  const TimeAxis axis(Calendar::standard, kMonthly, at(Calendar::standard, 1582, 9, 10), 3);
  EXPECT_EQ(axis.label(1), "1582-10-04");
  EXPECT_EQ(axis.label(2), "1582-11-10");
}

TEST(TimeAxis, EveryNominalTimeFallsOnItsOwnStep) {
  for (const Calendar calendar :
       {Calendar::standard, Calendar::julian, Calendar::noleap, Calendar::all_leap, Calendar::day360})
    for (const TimeStep step :
         {kMonthly, TimeStep{StepKind::months, 3}, TimeStep{StepKind::years, 1}, TimeStep{StepKind::years, 10}, kDaily,
          TimeStep{StepKind::seconds, 3600}, TimeStep{StepKind::seconds, 7 * kDay + 1}}) {
      const TimeAxis axis(calendar, step, at(calendar, 1570, 1, 16, 43200), 600);
      for (std::size_t t = 0; t < axis.size(); ++t) {
        Seconds off = 1;
        ASSERT_EQ(axis.index_of(axis.time(t), &off), static_cast<std::int64_t>(t)) << duration_text(step);
        ASSERT_EQ(off, 0);
      }
    }
}

TEST(TimeAxis, FixedStepsTakeTheNearestSlotAndCalendarStepsTheirMonth) {
  const TimeAxis daily(Calendar::standard, kDaily, at(Calendar::standard, 2000, 1, 1, 43200), 10);
  Seconds off = 0;
  EXPECT_EQ(daily.index_of(at(Calendar::standard, 2000, 1, 3), &off), 2);
  EXPECT_EQ(off, -43200);
  EXPECT_EQ(daily.index_of(at(Calendar::standard, 1999, 12, 31, 43200)), -1);
  const TimeAxis monthly(Calendar::standard, kMonthly, at(Calendar::standard, 2000, 1, 16), 10);
  EXPECT_EQ(monthly.index_of(at(Calendar::standard, 2000, 3, 1), &off), 2);
  EXPECT_EQ(off, -15 * kDay);
  EXPECT_EQ(monthly.index_of(at(Calendar::standard, 2000, 3, 31, 86399)), 2);
  EXPECT_EQ(monthly.index_of(at(Calendar::standard, 1999, 12, 31)), -1);
  const TimeAxis yearly(Calendar::standard, {StepKind::years, 1}, at(Calendar::standard, 2000, 7, 1), 10);
  EXPECT_EQ(yearly.index_of(at(Calendar::standard, 2001, 1, 1)), 1);
}

TEST(TimeAxis, SeasonsFollowTheStep) {
  const auto first = at(Calendar::standard, 2001, 4, 16);
  const TimeAxis monthly(Calendar::standard, kMonthly, first, 12);
  EXPECT_EQ(monthly.seasons(), 12);
  EXPECT_EQ(monthly.season_of(0), 3);
  EXPECT_EQ(monthly.season_of(9), 0);
  const TimeAxis quarterly(Calendar::standard, {StepKind::months, 3}, first, 12);
  EXPECT_EQ(quarterly.seasons(), 4);
  EXPECT_EQ(quarterly.season_of(0), 1);
  EXPECT_EQ(quarterly.season_of(3), 0);
  const TimeAxis every_five(Calendar::standard, {StepKind::months, 5}, first, 12);
  EXPECT_EQ(every_five.seasons(), 1);
  EXPECT_EQ(every_five.season_of(4), 0);
  EXPECT_EQ(TimeAxis(Calendar::standard, {StepKind::years, 1}, first, 3).season_of(1), 0);
  EXPECT_EQ(TimeAxis(Calendar::standard, kDaily, first, 40).season_of(20), 4);
}

// By hand from methods section 1.1: (day of year - 1 + day fraction) / length of the year. Days of the year from
// cftime 1.6.2:
//   /usr/bin/python3 -c "from cftime import datetime; print(datetime(2000, 2, 29, 18, calendar='standard').dayofyr)"
TEST(TimeAxis, YearPhaseUsesTheLengthOfThatYear) {
  const auto phase = [](Calendar calendar, Date date, Seconds clock) {
    return TimeAxis(calendar, kDaily, seconds_of(calendar, date, clock), 1).year_phase(0);
  };
  constexpr Seconds kSix = 18 * 3600;
  EXPECT_DOUBLE_EQ(phase(Calendar::standard, {2000, 2, 29}, kSix), 59.75 / 366);
  EXPECT_DOUBLE_EQ(phase(Calendar::standard, {2001, 3, 1}, kSix), 59.75 / 365);
  EXPECT_DOUBLE_EQ(phase(Calendar::julian, {1900, 12, 31}, 0), 365.0 / 366);
  EXPECT_DOUBLE_EQ(phase(Calendar::noleap, {2000, 3, 1}, 0), 59.0 / 365);
  EXPECT_DOUBLE_EQ(phase(Calendar::all_leap, {2001, 3, 1}, 0), 60.0 / 366);
  EXPECT_DOUBLE_EQ(phase(Calendar::day360, {2001, 12, 30}, 43200), 359.5 / 360);
  EXPECT_DOUBLE_EQ(phase(Calendar::standard, {1582, 10, 15}, 0), 277.0 / 355);
}

TEST(TimeAxis, DayPhaseIsTheShareOfTheDayGone) {
  const TimeAxis axis(Calendar::standard, {StepKind::seconds, 21600}, at(Calendar::standard, 1969, 12, 31, 3600), 5);
  EXPECT_DOUBLE_EQ(axis.day_phase(0), 1.0 / 24);
  EXPECT_DOUBLE_EQ(axis.day_phase(3), 19.0 / 24);
  EXPECT_DOUBLE_EQ(axis.day_phase(4), 1.0 / 24);
}

TEST(TimeAxis, StepsPerYearAreThoseOfTheCalendar) {
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::standard, kMonthly, 0, 240).steps_per_year(), 12);
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::standard, kMonthly, 0, 240).years(), 20);
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::standard, kDaily, 0, 1).steps_per_year(), 365.2425);
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::noleap, kDaily, 0, 1).steps_per_year(), 365);
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::julian, kDaily, 0, 1).steps_per_year(), 365.25);
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::day360, {StepKind::seconds, 21600}, 0, 1).steps_per_year(), 1440);
  EXPECT_DOUBLE_EQ(TimeAxis(Calendar::standard, {StepKind::years, 5}, 0, 1).steps_per_year(), 0.2);
}

TEST(TimeAxis, LagsAreGivenInTheLongestUnitThatDividesTheStep) {
  const auto unit = [](TimeStep step) {
    const TimeAxis axis(Calendar::standard, step, 0, 1);
    return std::pair(axis.lag_unit(), axis.lag_unit_per_step());
  };
  EXPECT_EQ(unit(kMonthly), std::pair(std::string("month"), 1.0));
  EXPECT_EQ(unit({StepKind::months, 3}), std::pair(std::string("month"), 3.0));
  EXPECT_EQ(unit({StepKind::years, 2}), std::pair(std::string("year"), 2.0));
  EXPECT_EQ(unit(kDaily), std::pair(std::string("day"), 1.0));
  EXPECT_EQ(unit({StepKind::seconds, 21600}), std::pair(std::string("hour"), 6.0));
  EXPECT_EQ(unit({StepKind::seconds, 900}), std::pair(std::string("minute"), 15.0));
  EXPECT_EQ(unit({StepKind::seconds, 10 * kDay + 21600}), std::pair(std::string("hour"), 246.0));
  EXPECT_EQ(unit({StepKind::seconds, 10 * kDay + 8640}), std::pair(std::string("day"), 10.1));
  EXPECT_EQ(unit({StepKind::seconds, 61}), std::pair(std::string("second"), 61.0));
}

TEST(TimeAxis, CfValuesAreDaysSince1970) {
  const TimeAxis axis(Calendar::standard, kDaily, at(Calendar::standard, 1970, 1, 2, 43200), 2);
  EXPECT_EQ(axis.cf_units(), "days since 1970-01-01 00:00:00");
  EXPECT_DOUBLE_EQ(axis.cf_value(axis.time(1)), 2.5);
}

}  // namespace
}  // namespace lagscape
