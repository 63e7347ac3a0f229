// The joint fit of season and trend against Householder QR with column pivoting (Eigen) on each lane's own rows.
#include "lagscape/stats/design.h"

#include <gtest/gtest.h>

#include <Eigen/Dense>

#include "support/series.h"

namespace lagscape::test {
namespace {

struct Oracle {
  Series residual;  ///< 0 where not used
  double count = 0, parameters = 0, mean = 0, slope = 0, slope_factor = 0, sum_squares = 0, share_trend = 0,
         share_season = 0;
};

double variance_of(const Eigen::VectorXd& v) { return (v.array() - v.mean()).square().mean(); }

/// An indicator for each season with two values or more, the raw season columns, and the powers of time.
Oracle least_squares(const DesignColumns& columns, const Series& x) {
  std::vector<double> in_group(columns.groups, 0);
  for (std::size_t t = 0; t < x.size(); ++t) in_group[columns.group[t]] += std::isnan(x[t]) ? 0 : 1;
  std::vector<std::size_t> rows, groups;
  for (std::size_t g = 0; g < columns.groups; ++g) {
    if (in_group[g] >= 2) groups.push_back(g);
  }
  for (std::size_t t = 0; t < x.size(); ++t) {
    if (!std::isnan(x[t]) && in_group[columns.group[t]] >= 2) rows.push_back(t);
  }
  const auto degree = static_cast<std::size_t>(columns.trend_degree);
  const std::size_t others = groups.size() + columns.season.size();
  Eigen::MatrixXd design(rows.size(), others + degree);
  Eigen::VectorXd y(rows.size());
  const double middle = (static_cast<double>(x.size()) - 1) / 2;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    const std::size_t t = rows[i];
    const auto row = static_cast<Eigen::Index>(i);
    y(row) = x[t];
    Eigen::Index col = 0;
    for (const std::size_t g : groups) design(row, col++) = columns.group[t] == g ? 1 : 0;
    for (const auto& season : columns.season) design(row, col++) = season[t];
    const double time = static_cast<double>(t) - middle;
    if (degree > 0) design(row, col++) = time;
    if (degree > 1) design(row, col++) = time * time;
  }
  const Eigen::ColPivHouseholderQR<Eigen::MatrixXd> qr(design);
  const Eigen::VectorXd beta = qr.solve(y);
  const Eigen::VectorXd rest = y - design * beta;
  Oracle out;
  out.residual.assign(x.size(), 0.0);
  for (std::size_t i = 0; i < rows.size(); ++i) out.residual[rows[i]] = rest(static_cast<Eigen::Index>(i));
  out.count = static_cast<double>(rows.size());
  out.parameters = static_cast<double>(qr.rank());
  out.mean = y.mean();
  out.sum_squares = rest.squaredNorm();
  if (degree > 0) {
    const auto at = static_cast<Eigen::Index>(others);
    out.slope = beta(at);
    out.slope_factor = (design.transpose() * design).inverse()(at, at);
    const Eigen::VectorXd trend =
        design.rightCols(static_cast<Eigen::Index>(degree)) * beta.tail(static_cast<Eigen::Index>(degree));
    out.share_trend = variance_of(trend) / variance_of(y);
    out.share_season = variance_of(y - rest - trend) / variance_of(y);
  } else {
    out.share_season = variance_of(y - rest) / variance_of(y);
  }
  return out;
}

/// The fit of every instruction set, lane by lane. Series are of order 1 to 10, so 1e-10 covers absolute differences.
void expect_fit(const DesignColumns& columns, const std::vector<Series>& lanes) {
  constexpr double kTolerance = 1e-10;
  const Design design(columns);
  for (const KernelTable* kernels : all_kernels()) {
    const Prepared prepared = prepare(*kernels, design, tile_of(lanes));
    EXPECT_EQ(prepared.fit.incomplete & ((1U << lanes.size()) - 1), 0);
    for (std::size_t lane = 0; lane < lanes.size(); ++lane) {
      SCOPED_TRACE(std::string(kernels->isa) + ", lane " + std::to_string(lane));
      const Oracle expected = least_squares(columns, lanes[lane]);
      const LaneFit& fit = prepared.fit;
      EXPECT_EQ(fit.count[lane], expected.count);
      EXPECT_EQ(fit.parameters[lane], expected.parameters);
      EXPECT_TRUE(close(fit.mean[lane], expected.mean, kTolerance, kTolerance));
      EXPECT_TRUE(close(fit.sum_squares[lane], expected.sum_squares, kTolerance, kTolerance));
      EXPECT_TRUE(close(fit.slope[lane], expected.slope, kTolerance, 1e-13));
      EXPECT_TRUE(close(fit.share_trend[lane], expected.share_trend, kTolerance, kTolerance));
      EXPECT_TRUE(close(fit.share_season[lane], expected.share_season, kTolerance, kTolerance));
      if (columns.trend_degree == 1) {
        EXPECT_TRUE(close(fit.slope_factor[lane], expected.slope_factor, 1e-9, 0));
      }
      const Series residual = lane_of(prepared.residual, columns.steps, lane);
      for (std::size_t t = 0; t < columns.steps; ++t) ASSERT_NEAR(residual[t], expected.residual[t], kTolerance) << t;
    }
  }
}

/// Series with a season, a trend and noise; gaps of another kind in each lane.
std::vector<Series> gappy_lanes(std::uint64_t seed, std::size_t steps) {
  Draw draw(seed);
  std::vector<Series> lanes;
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    Series x = draw.autoregression(steps, {0.5});
    for (std::size_t t = 0; t < steps; ++t) {
      x[t] += 3 * std::cos(2 * std::numbers::pi * static_cast<double>(t) / 12) + 0.01 * static_cast<double>(t) + 5;
    }
    if (lane > 0) x = draw.with_gaps(x, 0.1 * static_cast<double>(lane));
    if (lane == 6) std::fill(x.begin() + 20, x.begin() + 80, kNaN);
    if (lane == 7) std::fill(x.begin(), x.begin() + 50, kNaN);
    lanes.push_back(x);
  }
  return lanes;
}

TEST(Design, MeanAlone) { expect_fit(plain_columns(200), gappy_lanes(1, 200)); }
TEST(Design, StraightLine) { expect_fit(plain_columns(200, 1), gappy_lanes(2, 200)); }
TEST(Design, MonthsAndStraightLine) { expect_fit(monthly_columns(240, 1), gappy_lanes(3, 240)); }
TEST(Design, MonthsOfAnUnevenNumberOfYears) { expect_fit(monthly_columns(233, 2), gappy_lanes(4, 233)); }
TEST(Design, HarmonicsAndQuadratic) { expect_fit(harmonic_columns(365, 4, 365.25, 2), gappy_lanes(5, 365)); }
TEST(Design, HarmonicsAlone) { expect_fit(harmonic_columns(300, 2, 12, 0), gappy_lanes(6, 300)); }

TEST(Design, ThreeMonthsOfTheYearMayBeMissing) {
  std::vector<Series> lanes = gappy_lanes(7, 240);
  for (Series& x : lanes) {
    for (std::size_t t = 0; t < x.size(); ++t) {
      if (t % 12 < 2 || t % 12 == 11) x[t] = kNaN;
    }
  }
  expect_fit(monthly_columns(240, 1), lanes);
}

TEST(Design, ASeasonWithASingleValueIsLeftOutAndCounted) {
  Draw draw(8);
  Series x = draw.autoregression(240, {0.3});
  for (std::size_t t = 0; t < x.size(); ++t) {
    if (t % 12 == 4 && t != 100) x[t] = kNaN;  // only t = 100 is left of this month
    if (t % 12 == 7) x[t] = kNaN;
  }
  const DesignColumns columns = monthly_columns(240, 1);
  expect_fit(columns, {x});
  const Prepared prepared = prepare(best_kernels(), Design(columns), tile_of({x, x}));
  EXPECT_EQ(prepared.fit.dropped[1], 1);
  EXPECT_EQ(prepared.fit.parameters[1], 11);  // ten months and the slope
  EXPECT_EQ(prepared.bits[100] & 2, 0);
  EXPECT_EQ(prepared.residual[100 * kLanes + 1], 0);
}

TEST(Design, FewerThanTwoSeasonsAreIncomplete) {
  Series x(120, kNaN), two(120, kNaN);
  for (std::size_t t = 3; t < 120; t += 12) x[t] = two[t] = static_cast<double>(t % 7);
  for (std::size_t t = 4; t < 120; t += 12) two[t] = static_cast<double>(t % 5);
  x[5] = 1;  // a season with one value does not count
  const Prepared prepared = prepare(best_kernels(), Design(monthly_columns(120, 0)), tile_of({x, two}));
  EXPECT_EQ(prepared.fit.incomplete & 3, 1);
}

TEST(Design, ColumnsThatGapsMakeDependentAreTold) {
  // Values only every twelve steps: the harmonic is the same at all of them, so it cannot be told from the mean.
  Draw draw(9);
  Series x(240, kNaN), y = draw.autoregression(240, {});
  for (std::size_t t = 0; t < 240; t += 12) x[t] = y[t];
  const Prepared prepared = prepare(best_kernels(), Design(harmonic_columns(240, 1, 12, 1)), tile_of({y, x}));
  EXPECT_EQ(prepared.fit.incomplete & 3, 2);
}

TEST(Design, AColumnThatDependsOnEarlierOnesIsNoColumn) {
  const Design design(harmonic_columns(240, 6, 12, 0));  // the sine at the Nyquist frequency is zero
  EXPECT_EQ(design.dense(), 11U);
}

TEST(Design, ColumnsAreOrthonormalAndWithoutMeanInEachGroup) {
  DesignColumns columns = harmonic_columns(200, 3, 7.3, 2);
  columns.groups = 5;
  for (std::size_t t = 0; t < 200; ++t) columns.group[t] = static_cast<std::uint16_t>(t * t % 5);
  std::vector<bool> used(5, false);
  for (const auto g : columns.group) used[g] = true;
  for (std::size_t t = 0; t < 5; ++t) {
    if (!used[t]) columns.group[t] = static_cast<std::uint16_t>(t);  // squares leave two groups empty
  }
  const Design design(columns);
  const DesignView view = design.view();
  ASSERT_EQ(view.dense, 8U);
  for (std::size_t i = 0; i < view.dense; ++i) {
    std::vector<double> sums(5, 0.0);
    for (std::size_t t = 0; t < 200; ++t) sums[view.group[t]] += view.columns[i * 200 + t];
    for (const double sum : sums) EXPECT_NEAR(sum, 0, 1e-13);
    for (std::size_t j = 0; j <= i; ++j) {
      double dot = 0;
      for (std::size_t t = 0; t < 200; ++t) dot += view.columns[i * 200 + t] * view.columns[j * 200 + t];
      EXPECT_NEAR(dot, i == j ? 1 : 0, 1e-13);
    }
  }
}

TEST(Design, AStraightLineIsFoundExactly) {  // by hand: 1, 3, 5, missing, 9 has slope 2 and nothing left
  const Prepared prepared = prepare(best_kernels(), Design(plain_columns(5, 1)), tile_of({{1, 3, 5, kNaN, 9}}));
  EXPECT_NEAR(prepared.fit.slope[0], 2, 1e-14);
  EXPECT_NEAR(prepared.fit.sum_squares[0], 0, 1e-26);
  EXPECT_NEAR(prepared.fit.share_trend[0], 1, 1e-14);
  // sum (t - mean)^2 of t = 0, 1, 2, 4 (mean 7/4) is 35/4
  EXPECT_NEAR(prepared.fit.slope_factor[0], 4.0 / 35, 1e-15);
}

TEST(Design, SeasonAndTrendTogetherDoNotAttenuateTheSlope) {
  // Month means first, then a line: the slope of y complete years comes out as (y^2 - 1)/(y^2 - 1/144) of the true one.
  constexpr std::size_t kYears = 5;
  Series x(12 * kYears);
  for (std::size_t t = 0; t < x.size(); ++t) x[t] = 0.25 * static_cast<double>(t);
  EXPECT_NEAR(prepare(best_kernels(), Design(monthly_columns(x.size(), 1)), tile_of({x})).fit.slope[0], 0.25, 1e-14);
  const auto without_months = prepare(best_kernels(), Design(monthly_columns(x.size(), 0)), tile_of({x}));
  const Series anomalies = lane_of(without_months.residual, x.size(), 0);
  const double attenuated =
      prepare(best_kernels(), Design(plain_columns(x.size(), 1)), tile_of({anomalies})).fit.slope[0];
  EXPECT_NEAR(attenuated / 0.25, 144.0 * (kYears * kYears - 1) / (144.0 * kYears * kYears - 1), 1e-12);
}

TEST(Design, LanesWithoutValuesGiveZeros) {
  const Series none(120, kNaN);
  const Prepared prepared = prepare(best_kernels(), Design(plain_columns(120, 1)), tile_of({none}));
  EXPECT_EQ(prepared.fit.count[0], 0);
  EXPECT_EQ(prepared.fit.mean[0], 0);
  EXPECT_EQ(prepared.fit.sum_squares[0], 0);
  EXPECT_EQ(prepared.fit.share_trend[0], 0);
}

}  // namespace
}  // namespace lagscape::test
