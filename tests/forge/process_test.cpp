#include "forge/process.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numeric>
#include <utility>

namespace lagscape {
namespace {

Process ar(std::vector<double> coefficients) { return Process::autoregression(std::move(coefficients)); }

TEST(Process, StationarityOfOrderTwoIsTheKnownTriangle) {
  // f2 > -1, f1 + f2 < 1, f2 - f1 < 1 (Box and Jenkins, Time Series Analysis, section 3.2).
  for (double f1 = -2.43; f1 < 2.5; f1 += 0.1) {
    for (double f2 = -1.41; f2 < 1.5; f2 += 0.1) {
      EXPECT_EQ(Process::stationary({f1, f2}), f2 > -1 && f1 + f2 < 1 && f2 - f1 < 1) << f1 << " " << f2;
    }
  }
  EXPECT_TRUE(Process::stationary({}));
  EXPECT_TRUE(Process::stationary({0.5, 0.0}));
  EXPECT_FALSE(Process::stationary({1.0}));
  EXPECT_FALSE(Process::stationary({0.0, 0.0, 0.0, 1.0}));
}

TEST(Process, DecorrelationTimesByHand) {
  EXPECT_DOUBLE_EQ(ar({}).decorrelation_time(), 1);
  EXPECT_NEAR(ar({0.3}).decorrelation_time(), 1.3 / 0.7, 1e-14);
  EXPECT_NEAR(ar({0.6}).decorrelation_time(), 4, 1e-14);
  EXPECT_NEAR(ar({0.9}).decorrelation_time(), 19, 1e-12);
  EXPECT_NEAR(ar({-0.5}).decorrelation_time(), 1.0 / 3, 1e-15);
  EXPECT_NEAR(ar({0.5, 0.3}).decorrelation_time(), 78.0 / 7, 1e-13);  // (1 - 25/49)(1 - 9/100) / (1/5)^2
  EXPECT_NEAR(ar({1.2, -0.5}).decorrelation_time(), 3, 1e-13);        // (1 - 16/25)(1 - 1/4) / (3/10)^2
  EXPECT_TRUE(std::isnan(Process::long_memory(0.3).decorrelation_time()));
}

TEST(Process, DecorrelationTimeIsTheSumOfAllAutocorrelations) {
  for (const auto& f : {std::vector{0.8}, std::vector{0.5, 0.3}, std::vector{1.2, -0.5}, std::vector{0.3, 0.2, 0.2},
                        std::vector{-0.6, 0.1}}) {
    const std::vector<double> rho = ar(f).autocorrelation(2000);
    EXPECT_NEAR(ar(f).decorrelation_time(), 2 * std::accumulate(rho.begin(), rho.end(), 0.0) - 1, 1e-10);
  }
}

TEST(Process, AutocorrelationSatisfiesTheYuleWalkerEquations) {
  const std::vector<double> f{0.3, 0.2, 0.2};
  const std::vector<double> rho = ar(f).autocorrelation(20);
  for (std::size_t k = 1; k <= 20; ++k) {
    double sum = 0;
    for (std::size_t j = 1; j <= 3; ++j) sum += f[j - 1] * rho[k > j ? k - j : j - k];
    EXPECT_NEAR(rho[k], sum, 1e-14) << k;
  }
}

TEST(Process, LongMemoryFollowsItsClosedForms) {
  for (const double d : {0.3, 0.45, -0.3}) {
    const Process process = Process::long_memory(d);
    const std::vector<double> rho = process.autocorrelation(50);
    EXPECT_NEAR(rho[1], d / (1 - d), 1e-15);
    // Hosking (1981): rho_k = Gamma(1 - d) Gamma(k + d) / (Gamma(d) Gamma(k + 1 - d)).
    for (std::size_t k = 1; k <= 50; ++k) {
      const double lag = static_cast<double>(k);
      EXPECT_NEAR(rho[k],
                  std::tgamma(1 - d) / std::tgamma(d) * std::exp(std::lgamma(lag + d) - std::lgamma(lag + 1 - d)),
                  1e-13)
          << k;
    }
    double left = 1;
    for (std::size_t k = 1; k <= 2000000; ++k) left *= 1 - process.partial(k) * process.partial(k);
    EXPECT_NEAR(process.innovation_variance(), left, 1e-6);
  }
}

TEST(Predictor, WeightsSolveTheNormalEquationsAtEveryStep) {
  for (const Process& process : {ar({0.5, 0.3}), ar({1.2, -0.5}), Process::long_memory(0.4)}) {
    const std::vector<double> rho = process.autocorrelation(12);
    Predictor predictor(process);
    for (std::size_t t = 0; t < 12; ++t) {
      const std::vector<double>& w = predictor.weights();
      double explained = 0;
      for (std::size_t k = 1; k <= w.size(); ++k) {
        double sum = 0;
        for (std::size_t j = 1; j <= w.size(); ++j) sum += w[j - 1] * rho[k > j ? k - j : j - k];
        EXPECT_NEAR(sum, rho[k], 1e-14);
        explained += w[k - 1] * rho[k];
      }
      EXPECT_NEAR(predictor.error_sd() * predictor.error_sd(), 1 - explained, 1e-14);
      predictor.advance();
    }
  }
}

}  // namespace
}  // namespace lagscape
