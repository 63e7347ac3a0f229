#include "lagscape/stats/distributions.h"

#include <gtest/gtest.h>

#include <boost/math/distributions/students_t.hpp>

#include "support/series.h"

namespace lagscape::test {
namespace {

TEST(StudentQuantile, TheTableAgreesWithBoostForAnyDegreesOfFreedom) {  // Boost.Math, a general-purpose library
  for (const double share : {0.9, 0.95, 0.975, 0.995}) {
    const StudentQuantile quantile(share);
    for (double degrees = 0.1; degrees < 1e6; degrees *= 1.037) {
      const double expected = boost::math::quantile(boost::math::students_t(degrees), share);
      EXPECT_TRUE(close(quantile(degrees), expected, 1e-9, 0)) << share << " at " << degrees;
    }
    for (const double degrees : {1.0, 2.0, 1.0 + 1e-9, 2048.0, 1e12}) {  // nodes and ends of the table
      const double expected = boost::math::quantile(boost::math::students_t(degrees), share);
      EXPECT_TRUE(close(quantile(degrees), expected, 1e-9, 0)) << share << " at " << degrees;
    }
  }
}

TEST(StudentQuantile, HasTheClosedFormsOfOneAndTwoDegrees) {
  // 1 degree: tan(pi (share - 1/2)); 2 degrees: (2 share - 1) sqrt(2/(4 share (1 - share))).
  const double share = 0.975;
  const StudentQuantile quantile(share);
  EXPECT_TRUE(close(quantile(1), std::tan(std::numbers::pi * (share - 0.5)), 1e-10, 0));
  EXPECT_TRUE(close(quantile(2), (2 * share - 1) * std::sqrt(2 / (4 * share * (1 - share))), 1e-10, 0));
}

TEST(StudentQuantile, NeedsPositiveDegrees) {
  const StudentQuantile quantile(0.975);
  for (const double degrees : {0.0, -1.0, kNaN}) EXPECT_TRUE(std::isnan(quantile(degrees)));
}

TEST(StudentP, IsTheClosedFormOfCauchyAndOfTwoDegrees) {
  for (const double t : {0.0, 0.5, 1.0, 3.0, 40.0}) {
    EXPECT_TRUE(close(t_two_sided_p(t, 1), 1 - 2 * std::atan(t) / std::numbers::pi, 1e-12, 1e-14));
    EXPECT_TRUE(close(t_two_sided_p(t, 2), 1 - t / std::sqrt(2 + t * t), 1e-10, 1e-14));
    EXPECT_EQ(t_two_sided_p(-t, 7.5), t_two_sided_p(t, 7.5));
  }
}

TEST(StudentP, KeepsItsDigitsFarOut) {
  // Many degrees: 2 Q(z) of the normal; erfc keeps relative accuracy where 1 - cdf would give 0.
  EXPECT_TRUE(close(t_two_sided_p(12, 1e12), std::erfc(12 / std::numbers::sqrt2), 1e-8, 0));
}

TEST(StudentP, OfImpossibleInputIsNotANumber) {
  EXPECT_TRUE(std::isnan(t_two_sided_p(1, 0)));
  EXPECT_TRUE(std::isnan(t_two_sided_p(1, -2)));
  EXPECT_TRUE(std::isnan(t_two_sided_p(kNaN, 5)));
  EXPECT_EQ(t_two_sided_p(INFINITY, 5), 0);
}

TEST(ChiSquaredTail, IsTheClosedFormOfTwoAndFourDegrees) {
  for (const double x : {0.0, 0.3, 2.0, 15.0, 700.0}) {
    EXPECT_TRUE(close(chi_squared_tail(x, 2), std::exp(-x / 2), 1e-12, 0)) << x;
    EXPECT_TRUE(close(chi_squared_tail(x, 4), std::exp(-x / 2) * (1 + x / 2), 1e-12, 0)) << x;
  }
  EXPECT_TRUE(std::isnan(chi_squared_tail(kNaN, 10)));
}

TEST(NormalQuantile, InvertsTheErrorFunction) {
  for (const double share : {0.001, 0.3, 0.5, 0.9, 0.975, 0.9999}) {
    EXPECT_NEAR(std::erfc(-normal_quantile(share) / std::numbers::sqrt2) / 2, share, 1e-14);
  }
}

}  // namespace
}  // namespace lagscape::test
