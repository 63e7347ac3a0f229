// The published example of Benjamini & Hochberg stands in theory_test (toy_checks.csv); here the definition and the
// laws.
#include "lagscape/stats/false_discovery.h"

#include <gtest/gtest.h>

#include <algorithm>

#include "support/series.h"

namespace lagscape::test {
namespace {

/// min over all q >= p of (number of tests) q / (number of p-values <= q), at most 1, by brute force.
std::vector<double> slow_adjusted(const std::vector<double>& p, double factor) {
  std::vector<double> adjusted(p.size(), kNaN);
  const auto tests = static_cast<double>(std::count_if(p.begin(), p.end(), [](double v) { return !std::isnan(v); }));
  for (std::size_t i = 0; i < p.size(); ++i) {
    if (std::isnan(p[i])) continue;
    adjusted[i] = 1;
    for (const double q : p) {
      if (!(q >= p[i])) continue;
      const auto at_most = static_cast<double>(std::count_if(p.begin(), p.end(), [q](double v) { return v <= q; }));
      adjusted[i] = std::min(adjusted[i], tests * factor * q / at_most);
    }
  }
  return adjusted;
}

TEST(AdjustedP, IsTheSmallestRateAtWhichACellWouldStand) {
  Draw draw(1);
  std::vector<double> p(200);
  for (double& value : p) value = std::pow(draw.uniform(), 3);
  p[7] = p[80] = p[133] = p[12];  // ties
  p[0] = 0;
  p[1] = 1;
  for (const std::size_t missing : {5U, 6U, 77U}) p[missing] = kNaN;
  double harmonic = 0;
  for (int i = 1; i <= 197; ++i) harmonic += 1.0 / i;
  for (const bool any : {false, true}) {
    const auto adjusted = adjusted_p(p, any), expected = slow_adjusted(p, any ? harmonic : 1);
    for (std::size_t i = 0; i < p.size(); ++i) {
      if (std::isnan(p[i])) {
        EXPECT_TRUE(std::isnan(adjusted[i]));
        continue;
      }
      EXPECT_TRUE(close(adjusted[i], expected[i], 1e-13, 0)) << i;
      EXPECT_GE(adjusted[i], p[i]);
    }
  }
}

TEST(AdjustedP, OfThreeByHand) {  // .01, .02, .9: 3 * .01/1 = .03, 3 * .02/2 = .03, .9; .04 beside .9 and .9
  EXPECT_DOUBLE_EQ(adjusted_p(std::vector{0.9, 0.01, 0.02}, false)[1], 0.03);
  EXPECT_DOUBLE_EQ(adjusted_p(std::vector{0.9, 0.01, 0.02}, false)[2], 0.03);
  EXPECT_DOUBLE_EQ(adjusted_p(std::vector{0.9, 0.01, 0.02}, false)[0], 0.9);
  EXPECT_DOUBLE_EQ(adjusted_p(std::vector{0.04, 0.9, 0.9}, true)[0], 0.12 * (1 + 0.5 + 1.0 / 3));
}

TEST(AdjustedP, MissingCellsAreNotTests) { EXPECT_EQ(adjusted_p(std::vector{0.03, kNaN, kNaN}, false)[0], 0.03); }

TEST(AdjustedP, OfNothingIsNothing) {
  EXPECT_TRUE(adjusted_p({}, true).empty());
  EXPECT_TRUE(std::isnan(adjusted_p(std::vector{kNaN}, false)[0]));
}

}  // namespace
}  // namespace lagscape::test
