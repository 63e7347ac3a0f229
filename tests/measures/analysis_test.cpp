#include "lagscape/measures/analysis.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <functional>
#include <map>
#include <set>

#include "measures/setup.h"
#include "support/csv_table.h"

namespace lagscape::test {
namespace {

constexpr std::size_t kSteps = 360;

Series example(std::uint64_t seed = 1, double share_missing = 0) {
  Draw draw(seed);
  Series x = draw.autoregression(kSteps, {0.6});
  for (std::size_t t = 0; t < kSteps; ++t) {
    x[t] += 20 + 0.01 * static_cast<double>(t) + 2 * std::sin(2 * std::numbers::pi * static_cast<double>(t) / 12);
  }
  return draw.with_gaps(x, share_missing);
}

/// Estimates that do not depend on the unit of the values, in the order of their declaration.
std::vector<std::pair<std::string, double>> pure_numbers(const CellResult& cell) {
  std::vector<std::pair<std::string, double>> all = {{"lag1", cell.lag1},
                                                     {"lag1_corrected", cell.lag1_corrected},
                                                     {"ljung_box_p", cell.ljung_box_p},
                                                     {"order", cell.order},
                                                     {"time", cell.time},
                                                     {"time_low", cell.time_low},
                                                     {"time_high", cell.time_high},
                                                     {"e_folding", cell.e_folding},
                                                     {"zero_crossing", cell.zero_crossing},
                                                     {"integral", cell.integral},
                                                     {"geyer", cell.geyer},
                                                     {"sokal", cell.sokal},
                                                     {"ar1_time", cell.ar1_time},
                                                     {"first_inside_limits", cell.first_inside_limits},
                                                     {"effective_size", cell.effective_size},
                                                     {"effective_size_variance", cell.effective_size_variance},
                                                     {"effective_size_trend", cell.effective_size_trend},
                                                     {"p", cell.p},
                                                     {"p_independent", cell.p_independent},
                                                     {"share_season", cell.share_season},
                                                     {"share_trend", cell.share_trend}};
  for (std::size_t k = 0; k < cell.autocorrelation.size; ++k) {
    all.emplace_back("r(" + std::to_string(k) + ")", cell.autocorrelation[k]);
    if (k > 0) all.emplace_back("partial(" + std::to_string(k) + ")", cell.partial_autocorrelation[k]);
  }
  return all;
}

void expect_same_memory(const CellResult& found, const CellResult& expected) {
  const auto a = pure_numbers(found), b = pure_numbers(expected);
  for (std::size_t i = 0; i < a.size(); ++i) EXPECT_TRUE(close(a[i].second, b[i].second, 1e-8, 1e-11)) << a[i].first;
}

TEST(Laws, ShiftAndScaleChangeOnlyWhatHasAUnit) {
  const AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  const Series x = example(1, 0.1);
  Series y = x;
  for (double& value : y) value = -3 * value + 1000;
  const Analysed plain(settings, x), changed(settings, y);
  expect_same_memory(*changed, *plain);
  EXPECT_TRUE(close(changed->mean, -3 * plain->mean + 1000, 1e-12, 0));
  EXPECT_TRUE(close(changed->mean_high, -3 * plain->mean_low + 1000, 1e-10, 0));
  EXPECT_TRUE(close(changed->residual_sd, 3 * plain->residual_sd, 1e-10, 0));
  EXPECT_TRUE(close(changed->innovation_sd, 3 * plain->innovation_sd, 1e-9, 0));
  EXPECT_TRUE(close(changed->autocovariance[2], 9 * plain->autocovariance[2], 1e-9, 0));
  EXPECT_TRUE(close(changed->slope, -3 * plain->slope, 1e-9, 0));
  EXPECT_TRUE(close(changed->slope_low, -3 * plain->slope_high, 1e-8, 1e-10));
  EXPECT_TRUE(close(changed->total, -3 * plain->total, 1e-9, 0));
  EXPECT_TRUE(close(changed->detectable, 3 * plain->detectable, 1e-9, 0));
  EXPECT_EQ(changed->status, plain->status);
}

TEST(Laws, MemoryIsTheSameBackwardsInTimeAndTheTrendTurns) {
  const AnalysisSettings settings = settings_for(plain_columns(kSteps, 1));
  const Series x = example(2, 0.1);
  const Analysed forwards(settings, x), backwards(settings, Series(x.rbegin(), x.rend()));
  expect_same_memory(*backwards, *forwards);
  EXPECT_TRUE(close(backwards->slope, -forwards->slope, 1e-9, 0));
}

TEST(Laws, TimesFollowTheUnitOfTheLagAxisAndRatesTheYear) {
  AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  const Series x = example(3, 0.1);
  const Analysed months(settings, x);
  settings.lag_units_per_step = 5;
  settings.steps_per_rate = 120;
  const Analysed other(settings, x);
  for (const auto time : {&CellResult::time, &CellResult::time_low, &CellResult::time_high, &CellResult::e_folding,
                          &CellResult::zero_crossing, &CellResult::integral, &CellResult::geyer, &CellResult::sokal,
                          &CellResult::ar1_time, &CellResult::first_inside_limits, &CellResult::longest_gap}) {
    EXPECT_DOUBLE_EQ((*other).*time, 5 * (*months).*time);
  }
  EXPECT_DOUBLE_EQ(other->slope, 10 * months->slope);
  EXPECT_DOUBLE_EQ(other->detectable, 10 * months->detectable);
  EXPECT_EQ(other->effective_size, months->effective_size);
  EXPECT_EQ(other->total, months->total);
}

TEST(Laws, AnEmptyCellHasNoEstimates) {
  const AnalysisSettings settings = settings_for(plain_columns(kSteps, 1));
  const Analysed cell(settings, Series(kSteps, kNaN));
  EXPECT_EQ(cell->status, kNoData);
  EXPECT_EQ(cell->valid_count, 0);
  for (const Measure& measure : measure_catalog()) {
    if (measure.value == nullptr || measure.type != MapType::f32) continue;
    const double value = measure.value(*cell);
    EXPECT_TRUE(std::isnan(value) || measure.name == "valid_share") << measure.name << ' ' << value;
  }
}

TEST(Laws, AConstantRecordHasNoMemoryAndASlopeOfZero) {
  const AnalysisSettings settings = settings_for(plain_columns(kSteps, 1));
  const Analysed cell(settings, Series(kSteps, 0.1));
  EXPECT_EQ(cell->status, kConstant);
  EXPECT_EQ(cell->mean, 0.1);
  EXPECT_EQ(cell->slope, 0);
  for (const double value : {cell->lag1, cell->time, cell->effective_size, cell->p}) EXPECT_TRUE(std::isnan(value));
}

TEST(Laws, ARecordOfAFewStepsIsTooShortAndHarmless) {
  for (const std::size_t steps : {1U, 2U, 3U, 9U, 12U}) {
    Series x(steps);
    for (std::size_t t = 0; t < steps; ++t) x[t] = static_cast<double>(t * t % 5);
    const AnalysisSettings settings = settings_for(plain_columns(steps, 1));
    const Analysed cell(settings, x);
    EXPECT_EQ(cell->status & kTooFew, kTooFew) << steps;
    EXPECT_TRUE(std::isnan(cell->time));
  }
}

TEST(Laws, ACellDoesNotKnowItsPlaceInTheTile) {
  const AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  std::vector<Series> lanes;
  for (std::size_t lane = 0; lane < kLanes; ++lane)
    lanes.push_back(example(10 + lane, 0.02 * static_cast<double>(lane)));
  Analysis analysis(settings);
  const auto tile = tile_of(lanes);
  std::vector<std::vector<std::pair<std::string, double>>> together;
  for (const CellResult& cell : analysis.analyse(tile.data(), kLanes)) together.push_back(pure_numbers(cell));
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    const auto alone = pure_numbers(*Analysed(settings, lanes[lane]));
    ASSERT_EQ(alone.size(), together[lane].size());
    for (std::size_t i = 0; i < alone.size(); ++i)
      EXPECT_EQ(together[lane][i].second, alone[i].second) << alone[i].first;
  }
  EXPECT_EQ(analysis.analyse(tile.data(), 3).size(), 3U);  // the rest of a last tile is not looked at
}

/// What brings a status bit about.
struct Cause {
  std::function<AnalysisSettings()> settings;
  Series x;
};

std::map<std::string_view, Cause> causes() {
  const auto plain = [] { return settings_for(plain_columns(kSteps)); };
  const auto months = [] { return settings_for(monthly_columns(kSteps, 0)); };
  Draw draw(4);
  Series few(kSteps, kNaN), one_month(kSteps, kNaN), walk(60), winters = draw.autoregression(kSteps, {0.95}),
                                                               ties(kSteps, 0);
  Series almost_ten_years = example();
  almost_ten_years.resize(119);
  std::fill_n(few.begin(), 29, 0.0);
  for (std::size_t t = 5; t < kSteps; t += 12) one_month[t] = draw.normal();
  for (std::size_t t = 1; t < walk.size(); ++t) walk[t] = walk[t - 1] + draw.normal();
  for (std::size_t t = 0; t < kSteps; ++t) {
    if (t % 12 >= 3) winters[t] = kNaN;
    if (draw.uniform() < 0.4) ties[t] = draw.normal();
  }
  return {{"no_data", {plain, Series(kSteps, kNaN)}},
          {"too_few_values", {plain, few}},
          {"constant", {plain, Series(kSteps, 7)}},
          {"season_incomplete", {months, one_month}},
          {"near_unit_root", {[] { return settings_for(plain_columns(60)); }, walk}},
          {"beyond_lag_range", {plain, winters}},
          {"many_ties", {plain, ties}},
          {"many_gaps", {plain, example(5, 0.3)}},
          {"short_record", {[] { return settings_for(plain_columns(119)); }, almost_ten_years}}};
}

TEST(Analysis, NoLagGivesNoTimesAndNoVerdictOnMemory) {
  // Every second step is missing, so there is no pair at lag 1.
  Series x = example();
  for (std::size_t t = 1; t < x.size(); t += 2) x[t] = kNaN;
  const AnalysisSettings settings = settings_for(plain_columns(x.size()));
  const Analysed cell(settings, x);
  for (const double value : {cell->lag1, cell->lag1_corrected, cell->ar1_time, cell->integral, cell->geyer, cell->sokal,
                             cell->e_folding, cell->time, cell->p}) {
    EXPECT_TRUE(std::isnan(value)) << value;
  }
  EXPECT_EQ(cell->status & kNearUnitRoot, 0);
  EXPECT_NE(cell->status & kManyGaps, 0);
  EXPECT_NE(cell->status & kBeyondLagRange, 0);
}

TEST(Analysis, LimitsOfTheMeanNeedTenIndependentValues) {
  Draw draw(9);
  const Series strong = draw.autoregression(120, {0.95}), weak = draw.autoregression(120, {0.3});
  const AnalysisSettings settings = settings_for(plain_columns(120));
  const Analysed few(settings, strong), many(settings, weak);
  ASSERT_LT(few->effective_size, 10);
  EXPECT_TRUE(std::isnan(few->mean_low) && std::isnan(few->mean_high));
  ASSERT_GT(many->effective_size, 10);
  EXPECT_LT(many->mean_low, many->mean);
  EXPECT_GT(many->mean_high, many->mean);
}

TEST(Status, EachBitHasACauseAndTellsOfIt) {
  const auto all = causes();
  std::set<std::string_view> names;
  for (const StatusBit& bit : status_bits()) {
    ASSERT_TRUE(all.contains(bit.name)) << bit.name << " has no cause";
    const Cause& cause = all.at(bit.name);
    const AnalysisSettings settings = cause.settings();
    const Analysed cell(settings, cause.x);
    EXPECT_NE(cell->status & bit.mask, 0) << bit.name << " was not set: " << cell->status;
    EXPECT_EQ(std::isnan(cell->lag1), bit.fatal) << bit.name;
    names.insert(bit.name);
  }
  EXPECT_EQ(names.size(), all.size());
}

TEST(Status, AFineRecordHasNone) {
  const AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  EXPECT_EQ(Analysed(settings, example())->status, 0);
}

TEST(Status, BitsAreSingleAndTold) {
  int seen = 0;
  for (const StatusBit& bit : status_bits()) {
    EXPECT_EQ(bit.mask & (bit.mask - 1), 0);
    EXPECT_EQ(seen & bit.mask, 0);
    seen |= bit.mask;
    for (const std::string_view text : {bit.name, bit.words, bit.meaning}) EXPECT_FALSE(text.empty());
  }
}

TEST(Status, ARecordThatTrendAndSeasonExplainIsConstant) {
  Series x(kSteps);
  for (std::size_t t = 0; t < kSteps; ++t) x[t] = static_cast<double>(t % 12) + 0.5 * static_cast<double>(t);
  const AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  EXPECT_NE(Analysed(settings, x)->status & kConstant, 0);
}

TEST(Status, SharesAreOfTheSpanOrOfThePeriod) {
  Series x = example(6);
  std::fill(x.begin(), x.begin() + 180, kNaN);
  AnalysisSettings settings = settings_for(plain_columns(kSteps));
  settings.min_share = 0.8;
  const Analysed by_span(settings, x);
  EXPECT_EQ(by_span->valid_share, 1);
  EXPECT_EQ(by_span->status, 0);
  settings.share_of_period = true;
  const Analysed by_period(settings, x);
  EXPECT_EQ(by_period->valid_share, 0.5);
  EXPECT_EQ(by_period->status, kTooFew | kManyGaps);
}

TEST(Record, IsDescribedFromFirstToLastValue) {
  Series x = example(7);
  std::fill(x.begin(), x.begin() + 10, kNaN);
  std::fill(x.begin() + 50, x.begin() + 57, kNaN);
  x[kSteps - 1] = kNaN;
  const AnalysisSettings settings = settings_for(plain_columns(kSteps));
  const Analysed cell(settings, x);
  EXPECT_EQ(cell->first_time, 10);
  EXPECT_EQ(cell->last_time, 358);
  EXPECT_EQ(cell->longest_gap, 7);
  EXPECT_EQ(cell->valid_count, 342);
  EXPECT_DOUBLE_EQ(cell->valid_share, 342.0 / 349);
}

TEST(Trade, CorrelationAtLagZeroIsOneAndCovarianceTheVariance) {  // common practice, no published source
  const AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  for (const double gaps : {0.0, 0.1}) {
    const Analysed cell(settings, example(8, gaps));
    EXPECT_EQ(cell->autocorrelation[0], 1);
    const double m = cell->valid_count, q = 13;  // twelve months and a slope
    EXPECT_TRUE(close(cell->autocovariance[0], cell->residual_sd * cell->residual_sd * (m - q) / m, 1e-12, 0));
    EXPECT_EQ(cell->pair_count[0], m);
    EXPECT_TRUE(std::isnan(cell->partial_autocorrelation[0]));
  }
}

TEST(Trade, PartialAndPlainAutocorrelationAgreeAtLagOne) {  // common practice, no published source
  const AnalysisSettings settings = settings_for(plain_columns(kSteps, 1));
  const Analysed cell(settings, example(9, 0.1));
  EXPECT_DOUBLE_EQ(cell->partial_autocorrelation[1], cell->autocorrelation[1]);
  EXPECT_EQ(cell->lag1, cell->autocorrelation[1]);
}

TEST(Trade, FirstOrderMemoryDecaysGeometricallyAndHasOnePartial) {  // common practice, no published source
  Draw draw(20);
  AnalysisSettings settings = settings_for(plain_columns(4000));
  settings.bartlett_limits = false;
  const Analysed cell(settings, draw.autoregression(4000, {0.92}));
  EXPECT_GT(cell->autocorrelation[1], 0.90);
  EXPECT_LT(cell->autocorrelation[1], 0.94);
  EXPECT_GT(cell->autocorrelation[2], 0.80);
  EXPECT_LT(cell->autocorrelation[2], 0.87);
  EXPECT_GT(cell->autocorrelation[3], 0.70);
  EXPECT_LT(cell->autocorrelation[3], 0.80);
  EXPECT_LT(std::abs(cell->partial_autocorrelation[2]), cell->autocorrelation_limit[2]);
  EXPECT_EQ(cell->order, 1);
}

TEST(Correlation, WithGapsIsTheSumOverPairsOverTheirNumberAndTheLag) {
  const Series x = example(11, 0.15);
  const AnalysisSettings settings = settings_for(plain_columns(kSteps));
  const Analysed cell(settings, x);
  double mean = 0, m = 0, squares = 0;
  for (const double value : x) {
    if (!std::isnan(value)) mean += value, ++m;
  }
  mean /= m;
  for (const double value : x) squares += std::isnan(value) ? 0 : (value - mean) * (value - mean);
  for (std::size_t k = 1; k < 25; ++k) {
    double sum = 0, pairs = 0;
    for (std::size_t t = 0; t + k < kSteps; ++t) {
      if (std::isnan(x[t]) || std::isnan(x[t + k])) continue;
      sum += (x[t] - mean) * (x[t + k] - mean);
      ++pairs;
    }
    EXPECT_EQ(cell->pair_count[k], pairs);
    EXPECT_TRUE(close(cell->autocorrelation[k], sum / (pairs + static_cast<double>(k)) / (squares / m), 1e-11, 1e-13));
  }
}

TEST(Correlation, ALagWithTooFewPairsIsMissing) {  // fewer than 10, or a tenth of the values
  Series winters = example(12);
  for (std::size_t t = 0; t < kSteps; ++t) {
    if (t % 12 >= 3) winters[t] = kNaN;
  }
  const AnalysisSettings settings = settings_for(plain_columns(kSteps));
  const Analysed cell(settings, winters);
  for (std::size_t k = 1; k < 25; ++k) {
    const std::size_t within = k % 12;
    EXPECT_EQ(std::isnan(cell->autocorrelation[k]), within >= 3 && within <= 9) << k;
  }
  EXPECT_FALSE(std::isnan(cell->partial_autocorrelation[2]));
  EXPECT_TRUE(std::isnan(cell->partial_autocorrelation[12]));  // the recursion ends at the first missing lag
}

TEST(Limits, OfTheDecorrelationTimeAreSymmetricOnALogScale) {
  const AnalysisSettings settings = settings_for(plain_columns(kSteps, 1));
  const Analysed cell(settings, example(13));
  EXPECT_LT(cell->time_low, cell->time);
  EXPECT_TRUE(close(cell->time_high / cell->time, cell->time / cell->time_low, 1e-12, 0));
  const ArModel model = model_from_coefficients({cell->coefficients.data(), static_cast<std::size_t>(cell->order)});
  EXPECT_TRUE(close(cell->time, model.decorrelation_time(), 1e-10, 0));
  const double error = log_time_error(model, static_cast<double>(kSteps) - cell->order);
  EXPECT_TRUE(close(std::log(cell->time_high / cell->time), normal_quantile(0.975) * error, 1e-8, 0));
}

TEST(Limits, OfTheMeanUseTheEffectiveSize) {  // Zwiers & von Storch 1995, J. Clim. 8:336 discuss this interval
  const AnalysisSettings settings = settings_for(plain_columns(kSteps));
  const Analysed cell(settings, example(14, 0.1));
  const double n = cell->effective_size;
  // With the mean alone, SSE/m (m-1)/(m-1) is the biased variance of the values.
  const double half = StudentQuantile(0.975)(n - 1) * std::sqrt(cell->autocovariance[0] / (n - 1));
  EXPECT_TRUE(close(cell->mean_high - cell->mean, half, 1e-10, 0));
  EXPECT_TRUE(close(cell->mean - cell->mean_low, half, 1e-10, 0));
}

TEST(Trend, DetectableIsTheErrorTimesBothQuantiles) {
  AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  settings.target = 0.05;
  const Analysed cell(settings, example(15));
  const double degrees = cell->effective_size_trend - 2, t = StudentQuantile(0.975)(degrees);
  const double error = (cell->slope_high - cell->slope) / t;
  EXPECT_TRUE(close(cell->detectable, (t + normal_quantile(0.9)) * error, 1e-10, 0));
  EXPECT_TRUE(close(cell->p, t_two_sided_p(cell->slope / error, degrees), 1e-8, 0));
  EXPECT_TRUE(close(cell->years_to_detect, 30 * std::pow(cell->detectable / 0.05, 2.0 / 3), 1e-12, 0));
  EXPECT_TRUE(close(cell->total, cell->slope / 12 * 359, 1e-12, 0));
}

TEST(Trend, IsThatOfTheJointFitWhateverThePreparation) {
  const Series x = example(16, 0.1);
  const AnalysisSettings joint = settings_for(monthly_columns(kSteps, 1));
  const Analysed expected(joint, x);
  for (const int degree : {0, 2}) {
    const AnalysisSettings settings = settings_for(monthly_columns(kSteps, degree));
    const Analysed cell(settings, x);
    EXPECT_TRUE(close(cell->slope, expected->slope, 1e-10, 0));
    EXPECT_TRUE(close(cell->p, expected->p, 1e-8, 0));
    EXPECT_TRUE(close(cell->effective_size_trend, expected->effective_size_trend, 1e-8, 0));
  }
}

TEST(Trend, TheFirstTestDecides) {
  AnalysisSettings settings = settings_for(monthly_columns(kSteps, 1));
  const Series x = example(17);
  const Analysed with_memory(settings, x);
  settings.tests = {find_trend_test("ols"), find_trend_test("ols-neff")};
  const Analysed without(settings, x);
  EXPECT_EQ(without->p, without->p_independent);
  EXPECT_EQ(without->p_independent, with_memory->p_independent);
  EXPECT_LT(without->p, with_memory->p);
  EXPECT_LT(without->slope_high - without->slope_low, with_memory->slope_high - with_memory->slope_low);
}

/// x less what a filter takes off, written from its definition.
Series filtered(const Series& x, Filter filter, std::size_t length) {
  Series y(x.size(), kNaN);
  for (std::size_t t = 0; t < x.size(); ++t) {
    if (filter == Filter::difference) {
      if (t >= length) y[t] = x[t] - x[t - length];
      continue;
    }
    const std::size_t half = length / 2;
    if (t < half || t + half >= x.size()) continue;
    double sum = 0;
    std::size_t count = 0;
    for (std::size_t s = t - half; s <= t + half; ++s) {
      if (std::isnan(x[s])) continue;
      sum += x[s];
      ++count;
    }
    if (2 * count >= length) y[t] = x[t] - sum / static_cast<double>(count);
  }
  return y;
}

/// Close, or both missing.
::testing::AssertionResult same(double value, double expected, double relative, double absolute) {
  if (std::isnan(value) && std::isnan(expected)) return ::testing::AssertionSuccess();
  return close(value, expected, relative, absolute);
}

TEST(Filters, ReplaceTheSeriesBeforeItIsPrepared) {
  struct Choice {
    Filter filter;
    std::size_t length;
  };
  for (const double gaps : {0.0, 0.2, 0.5}) {
    const Series x = example(18, gaps);
    for (const Choice choice : {Choice{Filter::difference, 1}, {Filter::difference, 12}, {Filter::running_mean, 25}}) {
      AnalysisSettings settings = settings_for(plain_columns(kSteps));
      const Analysed expected(settings, filtered(x, choice.filter, choice.length)), plain(settings, x);
      settings.filter = choice.filter;
      settings.filter_length = choice.length;
      const Analysed cell(settings, x);
      for (std::size_t k = 1; k < 25; ++k) {
        EXPECT_TRUE(same(cell->autocorrelation[k], expected->autocorrelation[k], 1e-10, 1e-12))
            << choice.length << ' ' << k;
      }
      EXPECT_TRUE(same(cell->time, expected->time, 1e-9, 0));
      EXPECT_TRUE(close(cell->residual_sd, expected->residual_sd, 1e-10, 0));
      // Record, mean and trend are those of the series itself; effective sizes of a filtered one mean nothing.
      EXPECT_EQ(cell->valid_count, plain->valid_count);
      EXPECT_TRUE(close(cell->mean, plain->mean, 1e-12, 0));
      EXPECT_EQ(cell->slope, plain->slope);
      EXPECT_EQ(cell->p, plain->p);
      EXPECT_TRUE(std::isnan(cell->effective_size));
      EXPECT_TRUE(std::isnan(cell->mean_low));
    }
  }
}

TEST(Filters, DifferencesOfWhiteNoiseHaveACorrelationOfMinusOneHalf) {  // common practice, no published source
  Draw draw(19);
  AnalysisSettings settings = settings_for(plain_columns(4000));
  settings.filter = Filter::difference;
  const Series noise = draw.autoregression(4000, {});
  EXPECT_NEAR(Analysed(settings, noise)->lag1, -0.5, 0.05);
  settings.filter_length = 12;
  EXPECT_NEAR(Analysed(settings, noise)->autocorrelation[12], -0.5, 0.05);
}

TEST(Filters, TheRunningMeanGivesAnImpulseTheCorrelationOfFilteredWhiteNoise) {
  // An impulse comes out as the weights of the filter: their products are the autocorrelation that white noise obtains
  // (toy_checks.csv, numpy). The first and last two values are missing, the weights sum to zero.
  const CsvTable table = reference_table("toy_checks.csv");
  Series x(kSteps, 0.0);
  x[180] = 1;
  AnalysisSettings settings = settings_for(plain_columns(kSteps));
  settings.filter = Filter::running_mean;
  settings.filter_length = 5;
  const Analysed cell(settings, x);
  const auto rows = table.where({{"case", "high-pass w=5 on white noise"}});
  ASSERT_EQ(rows.size(), 5U);
  for (const std::size_t row : rows) {
    const std::size_t lag = std::stoul(table.text(row, "index"));
    EXPECT_TRUE(close(cell->autocorrelation[lag], table.number(row, "value"), 1e-12, 1e-14)) << lag;
  }
  EXPECT_NEAR(cell->autocorrelation[7], 0, 1e-14);
}

}  // namespace
}  // namespace lagscape::test
