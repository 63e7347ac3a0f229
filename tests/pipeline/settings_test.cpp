#include "pipeline/settings.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "lagscape/base/error.h"
#include "lagscape/job/job_file.h"

namespace lagscape {
namespace {

TimeAxis axis_of(TimeStep step, std::size_t size, Calendar calendar = Calendar::standard) {
  return {calendar, step, seconds_of(calendar, {1981, 1, 1}), size};
}
const TimeStep kMonthly{StepKind::months, 1}, kDaily{StepKind::seconds, kDay}, kYearly{StepKind::years, 1};

std::string told(const ResolvedSettings& settings, std::string_view key) {
  for (const EffectiveSetting& setting : settings.told) {
    if (setting.key == key) return setting.value;
  }
  return "";
}

TEST(Settings, SeasonFollowsTheStep) {
  const JobSpec job;
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 480)).season, SeasonRule::calendar);
  EXPECT_EQ(resolve_settings(job, axis_of({StepKind::months, 3}, 160)).season, SeasonRule::calendar);
  EXPECT_EQ(resolve_settings(job, axis_of({StepKind::months, 5}, 160)).season, SeasonRule::none);
  EXPECT_EQ(resolve_settings(job, axis_of(kDaily, 4000)).season, SeasonRule::harmonics);
  EXPECT_EQ(resolve_settings(job, axis_of(kYearly, 60)).season, SeasonRule::none);
  // Less than two years: each month is seen once, which is no season; but 730 days are two years.
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 20)).season, SeasonRule::none);
  EXPECT_EQ(resolve_settings(job, axis_of(kDaily, 730)).season, SeasonRule::harmonics);
}

TEST(Settings, StepsShorterThanADayGetHarmonicsOfTheDay) {
  const JobSpec job;
  const TimeAxis six_hourly = axis_of({StepKind::seconds, 21600}, 20000);
  const ResolvedSettings settings = resolve_settings(job, six_hourly);
  EXPECT_EQ(settings.daily_harmonics, 2);
  ASSERT_EQ(settings.notes.size(), 1U);
  // Four values a day: the second harmonic is at the Nyquist frequency, where its sine vanishes and its column is left
  // out.
  const auto analysis = analysis_settings(job, settings, six_hourly, {});
  EXPECT_EQ(analysis->prepare_design.dense(), 2U * 4 + 3 + 1);
  EXPECT_EQ(analysis->prepare_design.frequencies()[5].columns, 1);
  EXPECT_NEAR(analysis->prepare_design.frequencies()[5].omega, std::numbers::pi, 1e-12);
}

TEST(Settings, TheDayNeedsNoTwoYearsToShow) {
  const JobSpec job;
  const ResolvedSettings settings = resolve_settings(job, axis_of({StepKind::seconds, 3600}, 8760));
  EXPECT_EQ(settings.season, SeasonRule::none);
  EXPECT_EQ(settings.daily_harmonics, 2);
  EXPECT_EQ(settings.notes.size(), 2U) << "both are told";
}

TEST(Settings, TheTrendSeesTheSeasonThatASeasonDifferenceTakesOut) {
  JobSpec job;
  job.prepare.remove = RemoveRule::season_difference;
  const TimeAxis axis = axis_of(kMonthly, 480);
  const auto analysis = analysis_settings(job, resolve_settings(job, axis), axis, {});
  EXPECT_EQ(analysis->prepare_design.groups(), 1U);
  EXPECT_EQ(analysis->trend_design.groups(), 12U);
}

TEST(Settings, MonthIndicatorsCountAsElevenColumnsBesideTheMean) {
  const JobSpec job;
  const TimeAxis axis = axis_of(kMonthly, 480);
  const auto analysis = analysis_settings(job, resolve_settings(job, axis), axis, {"autocorrelation"});
  int columns = 0;
  for (const DesignFrequency& frequency : analysis->prepare_design.frequencies()) columns += frequency.columns;
  EXPECT_EQ(columns, 11 + 1);
  EXPECT_EQ(analysis->prepare_design.groups(), 12U);
  EXPECT_EQ(analysis->cube_lags, 28U);  // 10 log10(480) = 26.8, rounded up, and lag 0
  EXPECT_EQ(analysis->steps_per_rate, 12);
  EXPECT_FALSE(analysis->separate_trend_fit);
}

TEST(Settings, LongestLagIsAutomaticWithinAQuarterOfTheRecord) {
  JobSpec job;
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 60)).max_lag, 15U);
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 120)).max_lag, 24U);
  EXPECT_EQ(resolve_settings(job, axis_of(kDaily, 14600)).max_lag, 366U);
  EXPECT_EQ(resolve_settings(job, axis_of(kYearly, 100)).max_lag, 20U);
  job.memory.max_lag = StepsOrDuration("P5Y");
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 480)).max_lag, 60U);
  EXPECT_EQ(told(resolve_settings(job, axis_of(kDaily, 14600)), "memory.max_lag"), "1826 steps");
  job.memory.max_lag = StepsOrDuration("P30D");
  EXPECT_EQ(resolve_settings(job, axis_of(kDaily, 14600)).max_lag, 30U);
  EXPECT_THROW((void)resolve_settings(job, axis_of(kMonthly, 480)), Error) << "30 days are no whole number of months";
  job.memory.max_lag = StepsOrDuration(std::int64_t{121});
  try {
    (void)resolve_settings(job, axis_of(kMonthly, 480));
    FAIL() << "more than a quarter of the record was accepted";
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::job);
    EXPECT_NE(std::string(error.what()).find("at most 120"), std::string::npos) << error.what();
  }
}

TEST(Settings, RefusesWhatTheAxisMakesImpossible) {
  JobSpec job;
  job.prepare.season = SeasonRule::calendar;
  EXPECT_THROW((void)resolve_settings(job, axis_of(kYearly, 60)), Error);
  job.prepare.season = SeasonRule::harmonics;
  job.prepare.harmonics = 7;
  EXPECT_THROW((void)resolve_settings(job, axis_of(kMonthly, 480)), Error);
  job = {};
  job.prepare.remove = RemoveRule::season_difference;
  EXPECT_THROW((void)resolve_settings(job, axis_of(kYearly, 60)), Error);
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 480)).filter_length, 12U);
  EXPECT_EQ(resolve_settings(job, axis_of(kMonthly, 480)).season, SeasonRule::none);
  job.prepare.remove = RemoveRule::running_mean;
  job.prepare.window = StepsOrDuration("P11Y");
  const ResolvedSettings settings = resolve_settings(job, axis_of(kMonthly, 480));
  EXPECT_EQ(settings.filter_length, 133U);  // 132 months, made odd
  EXPECT_EQ(settings.notes.size(), 1U);
  EXPECT_THROW((void)resolve_settings(job, axis_of(kMonthly, 200)), Error);
}

}  // namespace
}  // namespace lagscape
