// Each definition on a handful of lags, by hand.
#include "lagscape/stats/lag_scan.h"

#include <gtest/gtest.h>

#include "support/series.h"

namespace lagscape::test {
namespace {

LagScan fed(const std::vector<double>& r, double limit = 0) {
  LagScan scan;
  for (const double value : r) scan.feed(value, limit);
  return scan;
}

constexpr double kLevel = 1 / std::numbers::e;

TEST(LagScan, EFoldingInterpolatesBetweenTheLagsAroundOneOverE) {
  // 3/4 at lag 1, 1/4 at lag 2: 1 + (3/4 - 1/e)/(1/2)
  EXPECT_NEAR(fed({0.75, 0.25}).e_folding(), 1 + (0.75 - kLevel) * 2, 1e-15);
  // From r(0) = 1 down to 0 at lag 1: 1 - 1/e
  EXPECT_NEAR(fed({0.0}).e_folding(), 1 - kLevel, 1e-15);
  EXPECT_NEAR(fed({0.9, kLevel}).e_folding(), 2, 1e-15);  // reached exactly at the lag
  EXPECT_TRUE(std::isnan(fed({0.9, 0.8}).e_folding()));
}

TEST(LagScan, LaterLagsDoNotMoveTheFirstCrossing) {
  EXPECT_EQ(fed({0.5, 0.25, 0.8, 0.1}).e_folding(), fed({0.5, 0.25}).e_folding());
  EXPECT_EQ(fed({0.5, -0.25, 0.8, -0.1}).zero_crossing(), fed({0.5, -0.25}).zero_crossing());
}

TEST(LagScan, ZeroCrossingInterpolates) {
  EXPECT_DOUBLE_EQ(fed({0.5, 0.25, -0.75}).zero_crossing(), 2.25);  // a quarter of the way from lag 2 to 3
  EXPECT_DOUBLE_EQ(fed({-1}).zero_crossing(), 0.5);
  EXPECT_DOUBLE_EQ(fed({0.5, 0}).zero_crossing(), 2);
  EXPECT_TRUE(std::isnan(fed({0.5, 0.25}).zero_crossing()));
}

TEST(LagScan, IntegralSumsTheLagsBeforeTheFirstThatIsNotPositive) {
  EXPECT_DOUBLE_EQ(fed({0.5, 0.25, -0.125, 0.5}).integral(), 1 + 2 * 0.75);
  EXPECT_DOUBLE_EQ(fed({0, 0.5}).integral(), 1);
  EXPECT_DOUBLE_EQ(fed({0.5, 0.25}).integral(), 2.5);  // still open: so far
}

TEST(LagScan, IntegralAboveTheLimitEndsAtTheFirstLagBelowIt) {
  EXPECT_DOUBLE_EQ(fed({0.5, 0.25, 0.125, 0.5}, 0.2).integral_above_limit(), 2.5);
  EXPECT_DOUBLE_EQ(fed({0.1}, 0.2).integral_above_limit(), 1);
  EXPECT_DOUBLE_EQ(fed({0.25, 0.1}, 0.25).integral_above_limit(), 1.5);  // at the limit is not below
}

TEST(LagScan, GeyersPairsEndBeforeTheFirstThatIsNotPositive) {
  // G_0 = 1 + 1/2, G_1 = 1/4 + 1/8, G_2 = 1/2 + 1/4, G_3 = -1/2 + 1/4 <= 0
  const LagScan scan = fed({0.5, 0.25, 0.125, 0.5, 0.25, -0.5, 0.25});
  EXPECT_DOUBLE_EQ(scan.geyer_positive(), -1 + 2 * (1.5 + 0.375 + 0.75));
  EXPECT_DOUBLE_EQ(scan.geyer_monotone(), -1 + 2 * (1.5 + 0.375 + 0.375));
}

TEST(LagScan, GeyerKeepsTheFirstPairWhateverItIs) {  // r(1) = -1: G_0 = 0, tau = -1 + 0
  EXPECT_DOUBLE_EQ(fed({-1}).geyer_positive(), -1);
  EXPECT_DOUBLE_EQ(fed({-0.5, 0.25, -0.5}).geyer_monotone(), -1 + 2 * 0.5);
}

TEST(LagScan, SokalsWindowIsTheFirstThatIsFiveHalfTimesLong) {
  // Without correlation tau_half is 1/2: 5/2 <= W at W = 3. With r = 1/4, -1/4, 0 the sum at W = 3 is again 0.
  EXPECT_DOUBLE_EQ(fed({0, 0, 0, 0.5}).sokal(), 1);
  EXPECT_DOUBLE_EQ(fed({0.25, -0.25, 0, 0.5}).sokal(), 1);
  // r = 1/2, 1/4, 1/8, 1/16, 0, 0, 0: tau_half = 23/16 from lag 4 on, 5 tau_half = 7.19: W = 8
  EXPECT_DOUBLE_EQ(fed({0.5, 0.25, 0.125, 0.0625, 0, 0, 0, 0, 1}).sokal(), 1 + 2 * (0.9375));
}

TEST(LagScan, SokalsWindowUsesTheSumIncludingItsOwnLag) {
  // The sum that decides at W = 8 holds r(8): 15/16 + 1/4 makes tau_half 27/16 and 5 tau_half 8.4 > 8; at W = 9 it is
  // enough only with r(9) <= 0.1125.
  const std::vector<double> r = {0.5, 0.25, 0.125, 0.0625, 0, 0, 0, 0.25, 0.0625, 0.5};
  EXPECT_DOUBLE_EQ(fed(r).sokal(), 1 + 2 * (0.9375 + 0.25 + 0.0625));
}

TEST(LagScan, FirstLagInsideTheLimits) {
  EXPECT_EQ(fed({0.5, -0.4, 0.1, 0.5}, 0.2).first_inside_limits(), 3U);
  EXPECT_EQ(fed({0.2}, 0.2).first_inside_limits(), 1U);  // on the limit is inside
  EXPECT_EQ(fed({0.5, -0.5}, 0.2).first_inside_limits(), 0U);
}

TEST(LagScan, IsCompleteOnlyWhenEveryDefinitionIs) {
  LagScan scan;
  scan.feed(0.9, 0.2);
  EXPECT_FALSE(scan.complete());
  for (const double r : {0.5, 0.3, 0.1, -0.1, -0.3, -0.2, 0.0}) scan.feed(r, 0.2);
  EXPECT_FALSE(scan.complete());  // 5 tau_half is still longer than the window
  for (int i = 0; i < 3; ++i) scan.feed(0, 0.2);
  EXPECT_TRUE(scan.complete());
}

}  // namespace
}  // namespace lagscape::test
