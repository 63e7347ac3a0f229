#include "lagscape/stats/effective_size.h"

#include <gtest/gtest.h>

#include "support/series.h"

namespace lagscape::test {
namespace {

/// A record with every third value missing, or a complete one.
struct Record {
  std::vector<std::uint8_t> bits;
  double values = 0;
  PairCounts pairs;

  explicit Record(std::size_t steps, bool gaps = false) : bits(steps, 1), pairs(steps) {
    for (std::size_t t = 0; t < steps; ++t) {
      if (gaps && t % 3 == 1) bits[t] = 0;
      values += bits[t];
    }
    pairs.start(bits.data(), 0, 0, steps - 1);
  }
};

ArModel first_order(double f) {
  const double coefficient[] = {f};
  return model_from_coefficients(coefficient);
}

/// m^2 / sum over all pairs of values of rho^power, pair by pair.
double slow_size(const ArModel& model, const Record& record, int power) {
  const std::size_t n = record.bits.size();
  std::vector<double> rho = {1};
  ModelCorrelation correlation(model);
  while (rho.size() < n) rho.push_back(correlation.next());
  double sum = 0;
  for (std::size_t s = 0; s < n; ++s) {
    for (std::size_t t = 0; t < n; ++t) {
      if (record.bits[s] != 0 && record.bits[t] != 0) sum += std::pow(rho[s > t ? s - t : t - s], power);
    }
  }
  return record.values * record.values / sum;
}

TEST(EffectiveSizes, AreTheVarianceOfTheMeanOverAllPairs) {  // Bayley & Hammersley 1946
  const double two[] = {1.2, -0.5};                          // oscillates: its correlations pass through zero
  for (const ArModel& model : {first_order(0.3), first_order(0.9), model_from_coefficients(two)}) {
    for (const bool gaps : {false, true}) {
      Record record(240, gaps);
      const EffectiveSizes sizes = effective_sizes(model, record.pairs, record.values);
      // Correlations below 1e-6 are not summed.
      EXPECT_TRUE(close(sizes.mean, slow_size(model, record, 1), 1e-5, 0)) << gaps;
      EXPECT_TRUE(close(sizes.variance, slow_size(model, record, 2), 1e-5, 0)) << gaps;
    }
  }
}

TEST(EffectiveSizes, OfThreeValuesByHand) {
  // f = 1/2: 3 + 2 (2/2 + 1/4) = 11/2, 9/(11/2) = 18/11 is below the least size of 2; squares: 3 + 2 (2/4 + 1/16)
  Record record(3);
  const EffectiveSizes sizes = effective_sizes(first_order(0.5), record.pairs, 3);
  EXPECT_EQ(sizes.mean, 2);
  EXPECT_NEAR(sizes.variance, 9 / (3 + 2 * (0.5 + 0.0625)), 1e-14);
}

TEST(EffectiveSizes, OfIndependentValuesAreTheirNumber) {
  Record record(100, true);
  const EffectiveSizes sizes = effective_sizes(first_order(0), record.pairs, record.values);
  EXPECT_EQ(sizes.mean, record.values);
  EXPECT_EQ(sizes.variance, record.values);
}

TEST(EffectiveSizes, AreNeverMoreThanTheNumberOfValues) {
  Record record(100);
  EXPECT_EQ(effective_sizes(first_order(-0.5), record.pairs, 100).mean, 100);
  EXPECT_LT(effective_sizes(first_order(-0.5), record.pairs, 100).variance, 100);  // squares do not alternate
}

TEST(EffectiveSizeForTrend, OfACompleteRecordIsTheClosedForm) {  // Santer et al. 2000: n (1 - r)/(1 + r)
  Record record(200);
  EXPECT_NEAR(effective_size_for_trend(0.6, record.pairs, 200, 200), 200 * 0.4 / 1.6, 1e-12);
  EXPECT_EQ(effective_size_for_trend(-0.3, record.pairs, 200, 200), 200);
  EXPECT_EQ(effective_size_for_trend(0.99, record.pairs, 200, 200), 2);
}

TEST(EffectiveSizeForTrend, OfAGappyRecordIsDividedByTheInflationTheGapsChange) {
  for (const double f : {-0.2, 0.3, 0.6, 0.9}) {
    Record record(300, true);
    const double m = record.values, n = 300;
    double gappy = 0, complete = 0;
    for (std::size_t k = 1; k < 300; ++k) {
      const double power = std::pow(f, static_cast<double>(k));
      double pairs = 0;
      for (std::size_t t = 0; t + k < 300; ++t) pairs += record.bits[t] * record.bits[t + k];
      gappy += pairs * power;
      complete += (n - static_cast<double>(k)) * power;
    }
    const double inflation = ((m + 2 * gappy) / m) / ((n + 2 * complete) / n);
    const double expected = std::min(m, m * (1 - f) / (1 + f) / inflation);
    EXPECT_TRUE(close(effective_size_for_trend(f, record.pairs, m, n), expected, 1e-9, 0)) << f;
  }
}

}  // namespace
}  // namespace lagscape::test
