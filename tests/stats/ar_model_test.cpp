#include "lagscape/stats/ar_model.h"

#include <gtest/gtest.h>

#include <Eigen/Dense>
#include <array>
#include <complex>

#include "support/series.h"

namespace lagscape::test {
namespace {

using Coefficients = std::vector<double>;

const std::vector<DesignFrequency> kMeanOnly = {}, kStraightLine = {{0.0, 1}};

/// Twelve months and a straight line: the mean, five pairs of harmonics, the Nyquist harmonic, the line.
std::vector<DesignFrequency> months_and_line() { return monthly_columns(24, 1).frequencies; }

Coefficients bias_of(const Coefficients& f, std::span<const DesignFrequency> design) {
  Coefficients bias(f.size());
  coefficient_bias(f, design, bias.data());
  return bias;
}

TEST(CoefficientBias, AfterTheMeanHasTheIntegersOfShamanAndStine) {  // 1988, J. Am. Stat. Assoc. 83:842
  const double f1[] = {-0.5, 0, 0.3, 0.9};
  for (const double f : f1) EXPECT_NEAR(bias_of({f}, kMeanOnly)[0], -(1 + 3 * f), 1e-14);
  const Coefficients two = bias_of({0.5, 0.3}, kMeanOnly);
  EXPECT_NEAR(two[0], -(1 + 0.5 + 0.3), 1e-13);
  EXPECT_NEAR(two[1], -(2 + 4 * 0.3), 1e-13);
  const Coefficients three = bias_of({0.3, 0.2, 0.1}, kMeanOnly);
  EXPECT_NEAR(three[0], -(1 + 0.3 + 2 * 0.1), 1e-13);
  EXPECT_NEAR(three[1], -(2 - 0.3 + 4 * 0.2 + 0.1), 1e-13);
  EXPECT_NEAR(three[2], -(1 + 5 * 0.1), 1e-13);
}

TEST(CoefficientBias, AfterMeanAndLineHasOneMoreOfEach) {
  // Measured by simulation for Burg's estimates and rounded: c = (2), (2, 3), (2, 3, 2); B as below.
  for (const double f : {-0.4, 0.0, 0.6}) EXPECT_NEAR(bias_of({f}, kStraightLine)[0], -(2 + 4 * f), 1e-14);
  const Coefficients two = bias_of({0.5, 0.3}, kStraightLine);
  EXPECT_NEAR(two[0], -(2 + 0.5 + 2 * 0.3), 1e-12);
  EXPECT_NEAR(two[1], -(3 + 5 * 0.3), 1e-12);
  const Coefficients three = bias_of({0.3, 0.2, 0.1}, kStraightLine);
  EXPECT_NEAR(three[0], -(2 + 0.3 + 3 * 0.1), 1e-12);
  EXPECT_NEAR(three[1], -(3 - 2 * 0.3 + 5 * 0.2 + 2 * 0.1), 1e-12);
  EXPECT_NEAR(three[2], -(2 + 6 * 0.1), 1e-12);
}

TEST(CoefficientBias, OfOneColumnIsTheFirstOrderFormulaInItsGeneralForm) {
  // D(w) = R^-1 (dg - dR f), written out with complex numbers and an inverse.
  const auto general = [](const Coefficients& f, double omega) {
    const auto p = static_cast<Eigen::Index>(f.size());
    Eigen::VectorXd phi(p), rho(p);
    for (Eigen::Index j = 0; j < p; ++j) phi(j) = f[static_cast<std::size_t>(j)];
    // Autocorrelations of the process from its Yule-Walker equations.
    Eigen::MatrixXd yule_walker = Eigen::MatrixXd::Identity(p, p);
    for (Eigen::Index k = 1; k <= p; ++k) {
      for (Eigen::Index j = 1; j <= p; ++j) {
        const Eigen::Index lag = std::abs(k - j);
        if (lag > 0) yule_walker(k - 1, lag - 1) -= phi(j - 1);
      }
    }
    rho = yule_walker.partialPivLu().solve(phi);
    std::complex<double> transfer = 1;
    for (Eigen::Index j = 0; j < p; ++j) transfer -= phi(j) * std::polar(1.0, -omega * static_cast<double>(j + 1));
    const double g = (1 - phi.dot(rho)) / std::norm(transfer);
    const auto dg = [&](Eigen::Index k) { return -g * std::cos(omega * static_cast<double>(k)); };
    Eigen::MatrixXd r(p, p), dr(p, p);
    Eigen::VectorXd right(p);
    for (Eigen::Index i = 0; i < p; ++i) {
      right(i) = dg(i + 1);
      for (Eigen::Index j = 0; j < p; ++j) {
        r(i, j) = i == j ? 1 : rho(std::abs(i - j) - 1);
        dr(i, j) = dg(std::abs(i - j));
      }
    }
    const Eigen::VectorXd d = r.inverse() * (right - dr * phi);
    return Coefficients(d.data(), d.data() + p);
  };
  for (const Coefficients& f : {Coefficients{0.7}, {0.5, 0.3}, {1.2, -0.5}, {0.3, 0.2, 0.2}, {1.1, -0.6, 0.3}}) {
    for (const double omega : {0.0, 0.3, 1.7, std::numbers::pi}) {
      const std::vector<DesignFrequency> column = {{omega, 1}}, three_columns = {{omega, 3}};
      const Coefficients mean = bias_of(f, kMeanOnly), with = bias_of(f, column), thrice = bias_of(f, three_columns);
      const Coefficients expected = general(f, omega);
      for (std::size_t j = 0; j < f.size(); ++j) {
        EXPECT_NEAR(with[j] - mean[j], expected[j], 1e-11);
        EXPECT_NEAR(thrice[j] - mean[j], 3 * expected[j], 1e-11);
      }
    }
  }
}

TEST(CoefficientBias, AgreesWithWhatSimulationsMeasured) {
  // n * bias over simulated series of n = 240 by an independent program (numpy): months and line, then mean and line.
  // The formula is first order in 1/n; what it misses grows with memory (measured -5.16 against -4.70 for .9).
  struct Measured {
    Coefficients f, formula, measured;
    bool months;
  };
  const std::vector<Measured> table = {
      {{0.3}, {-1.90}, {-2.02}, true},
      {{0.6}, {-2.83}, {-3.20}, true},
      {{0.9}, {-4.70}, {-5.16}, true},
      {{0.5, 0.3}, {-2.05, -3.91}, {-2.26, -3.99}, true},
      {{1.2, -0.5}, {-1.92, 0.20}, {-2.25, 0.38}, true},
      {{0.3}, {-3.2}, {-3.24}, false},
      {{0.6}, {-4.4}, {-4.67}, false},
      {{0.9}, {-5.6}, {-6.16}, false},
      {{0.5, 0.3}, {-3.1, -4.5}, {-3.45, -4.52}, false},
      {{1.2, -0.5}, {-2.2, -0.5}, {-2.33, -0.44}, false},
  };
  for (const Measured& row : table) {
    const Coefficients bias = bias_of(row.f, row.months ? months_and_line() : kStraightLine);
    for (std::size_t j = 0; j < bias.size(); ++j) {
      EXPECT_NEAR(bias[j], row.formula[j], 0.0051) << row.f[0] << ' ' << j;  // given to two decimals
      EXPECT_NEAR(bias[j], row.measured[j], 0.57) << row.f[0] << ' ' << j;
    }
  }
}

TEST(BiasCorrected, IsTheFixedPointOfItsOwnBias) {
  for (const Coefficients& raw : {Coefficients{0.6}, {0.5, 0.2}, {0.3, 0.1, 0.1}}) {
    const auto design = months_and_line();
    const ArModel model = bias_corrected(model_from_coefficients(raw), 240, design, 100);
    EXPECT_FALSE(model.near_unit_root);
    const Coefficients f(model.coefficient.begin(), model.coefficient.begin() + model.order);
    const Coefficients bias = bias_of(f, design);
    for (std::size_t j = 0; j < f.size(); ++j) EXPECT_NEAR(f[j] + bias[j] / 240, raw[j], 1e-13);
  }
}

TEST(BiasCorrected, ThreePassesAreTheDefault) {
  const Coefficients raw = {0.5};
  double f = 0.5;
  for (int pass = 0; pass < 3; ++pass) f = 0.5 + (1 + 3 * f) / 50;
  EXPECT_NEAR(bias_corrected(model_from_coefficients(raw), 50, kMeanOnly).coefficient[0], f, 1e-15);
}

TEST(BiasCorrected, OfOrderOneIsCappedAndTold) {
  const ArModel model = bias_corrected(model_from_coefficients(Coefficients{0.95}), 30, kStraightLine);
  EXPECT_EQ(model.coefficient[0], 0.99);
  EXPECT_EQ(model.partial[0], 0.99);
  EXPECT_TRUE(model.near_unit_root);
}

TEST(BiasCorrected, ARawFitBeyondTheBoundIsKeptAndTold) {
  const ArModel model = bias_corrected(model_from_coefficients(Coefficients{0.995}), 1000, kMeanOnly);
  EXPECT_EQ(model.coefficient[0], 0.995);
  EXPECT_TRUE(model.near_unit_root);
}

TEST(BiasCorrected, HigherOrdersStayStationaryByShrinkingTheCorrection) {
  for (const Coefficients& raw : {Coefficients{0.6, 0.35}, {1.5, -0.56}, {0.5, 0.3, 0.15}, {0.2, 0.1, 0.66}}) {
    const ArModel model = bias_corrected(model_from_coefficients(raw), 40, kStraightLine);
    ASSERT_TRUE(model.near_unit_root) << raw[0];
    double sum = 0;
    for (int j = 0; j < model.order; ++j) {
      EXPECT_LT(std::abs(model.partial[static_cast<std::size_t>(j)]), 0.995);
      sum += model.coefficient[static_cast<std::size_t>(j)];
    }
    EXPECT_LE(sum, 0.985);
    // On the straight way from the raw fit to the full correction, in steps of two hundredths.
    ArModel full = model_from_coefficients(raw);
    Coefficients f = raw, bias(raw.size());
    for (int pass = 0; pass < 3; ++pass) {
      coefficient_bias(f, kStraightLine, bias.data());
      for (std::size_t j = 0; j < f.size(); ++j) f[j] = raw[j] - bias[j] / 40;
    }
    const double kept = (model.coefficient[1] - raw[1]) / (f[1] - raw[1]);
    EXPECT_NEAR(kept * 50, std::round(kept * 50), 1e-9);
    for (std::size_t j = 0; j < f.size(); ++j)
      EXPECT_NEAR(model.coefficient[j], raw[j] + kept * (f[j] - raw[j]), 1e-12);
    EXPECT_EQ(full.order, model.order);
  }
}

TEST(BiasCorrected, OrdersAboveThreeComeBackAsTheyAre) {
  const Coefficients raw = {0.3, 0.2, 0.1, 0.05};
  const ArModel model = bias_corrected(model_from_coefficients(raw), 40, kStraightLine);
  for (std::size_t j = 0; j < 4; ++j) EXPECT_EQ(model.coefficient[j], raw[j]);
  EXPECT_FALSE(model.near_unit_root);
}

TEST(ArModel, PartialsAndCoefficientsAreTwoNamesOfOneModel) {
  Draw draw(1);
  for (int repeat = 0; repeat < 50; ++repeat) {
    Coefficients partials(1 + static_cast<std::size_t>(repeat) % 10);
    for (double& kappa : partials) kappa = 1.8 * draw.uniform() - 0.9;
    const ArModel there = model_from_partials(partials);
    const ArModel back = model_from_coefficients({there.coefficient.data(), partials.size()});
    for (std::size_t j = 0; j < partials.size(); ++j) EXPECT_NEAR(back.partial[j], partials[j], 1e-9);
  }
}

TEST(ArModel, OfOrderTwoByHand) {
  // f = (1/2, 1/4): rho_1 = f_1/(1 - f_2) = 2/3, rho_2 = f_1 rho_1 + f_2 = 7/12; kappa = (2/3, 1/4);
  // innovation share = (1 - 4/9)(1 - 1/16) = 25/48; time = 25/48 / (1/4)^2 = 25/3.
  const ArModel model = model_from_coefficients(Coefficients{0.5, 0.25});
  EXPECT_NEAR(model.partial[0], 2.0 / 3, 1e-15);
  EXPECT_NEAR(model.partial[1], 0.25, 1e-15);
  EXPECT_NEAR(model.innovation_share(), 25.0 / 48, 1e-15);
  EXPECT_NEAR(model.decorrelation_time(), 25.0 / 3, 1e-13);
  ModelCorrelation correlation(model);
  EXPECT_NEAR(correlation.next(), 2.0 / 3, 1e-15);
  EXPECT_NEAR(correlation.next(), 7.0 / 12, 1e-15);
  EXPECT_NEAR(correlation.next(), 0.5 * 7 / 12 + 0.25 * 2 / 3, 1e-15);
}

TEST(ArModel, OfOrderZeroIsWhiteNoise) {
  const ArModel model = model_from_partials({});
  EXPECT_EQ(model.decorrelation_time(), 1);
  ModelCorrelation correlation(model);
  EXPECT_EQ(correlation.next(), 0);
  EXPECT_EQ(correlation.next(), 0);
}

TEST(ArModel, OneThatIsNotStationaryShowsInItsPartials) {
  EXPECT_GE(std::abs(model_from_coefficients(Coefficients{0.5, 0.6}).partial[0]), 1);
  EXPECT_GE(std::abs(model_from_coefficients(Coefficients{0.1, -1.2}).partial[1]), 1);
}

TEST(LogTimeError, OfOrderOneIsTheClosedForm) {
  // tau = (1+f)/(1-f): se(tau) = 2/(1-f)^2 sqrt((1-f^2)/n), divided by tau.
  for (const double f : {-0.5, 0.0, 0.3, 0.6, 0.9}) {
    const double n = 200, tau = (1 + f) / (1 - f);
    const double expected = 2 / ((1 - f) * (1 - f)) * std::sqrt((1 - f * f) / n) / tau;
    EXPECT_TRUE(close(log_time_error(model_from_coefficients(Coefficients{f}), n), expected, 1e-7, 0)) << f;
  }
}

TEST(LogTimeError, OfOrderTwoIsTheDeltaMethodWithAnalyticDerivatives) {
  // ln tau = ln(1+f2) + ln(1 - f2 + f1) - ln(1 - f2) - ln(1 - f1 - f2)  (from prod (1 - k^2)/(1 - sum f)^2).
  for (const Coefficients& f : {Coefficients{0.5, 0.3}, {1.2, -0.5}, {-0.3, 0.2}}) {
    const double n = 300, f1 = f[0], f2 = f[1];
    Eigen::Vector2d g(1 / (1 - f2 + f1) + 1 / (1 - f1 - f2),
                      1 / (1 + f2) - 1 / (1 - f2 + f1) + 1 / (1 - f2) + 1 / (1 - f1 - f2));
    const ArModel model = model_from_coefficients(f);
    Eigen::Matrix2d r;
    r << 1, f1 / (1 - f2), f1 / (1 - f2), 1;
    const double expected = std::sqrt(g.dot(r.inverse() * g) * model.innovation_share() / n);
    EXPECT_TRUE(close(log_time_error(model, n), expected, 1e-7, 0)) << f1;
  }
}

TEST(LogTimeError, BeyondTheUnitRootIsNotANumber) {
  EXPECT_TRUE(std::isnan(log_time_error(model_from_coefficients(Coefficients{1.0}), 100)));
  EXPECT_TRUE(std::isnan(log_time_error(model_from_coefficients(Coefficients{0.5, 0.6}), 100)));
}

TEST(LargestOrder, IsBoundByTheRecordTheGapsAndTheLimit) {
  const Coefficients complete(30, 1000.0);
  EXPECT_EQ(largest_order(complete, 1000, 10), 10);  // limit
  EXPECT_EQ(largest_order(complete, 65, 10), 6);     // m/10
  EXPECT_EQ(largest_order(complete, 19, 10), 1);     // m/10 = 1.9
  EXPECT_EQ(largest_order(Coefficients(2, 1000.0), 1000, 10), 2);
  // Each order needs max(20, m/4) usable terms: m = 200 asks for 50.
  EXPECT_EQ(largest_order(Coefficients{150, 100, 50, 49, 80}, 200, 10), 3);
  EXPECT_EQ(largest_order(Coefficients{49, 100}, 200, 10), 0);
  EXPECT_EQ(largest_order(Coefficients{19, 19}, 40, 10), 0);
  EXPECT_EQ(largest_order(Coefficients{20, 19}, 40, 10), 1);
}

/// The criterion written out as published, each with n terms and q columns.
int slow_choice(const Coefficients& partials, OrderCriterion criterion, double n, double q) {
  double best = INFINITY, share = 1;
  int order = 0;
  for (std::size_t i = 0; i < partials.size(); ++i) {
    share *= 1 - partials[i] * partials[i];
    const double p = static_cast<double>(i + 1);
    double value = n * std::log(share) + p * std::log(n);                             // Schwarz 1978
    if (criterion == OrderCriterion::aic) value = n * std::log(share) + 2 * (p + 1);  // Akaike 1974
    if (criterion == OrderCriterion::aicc) value = n * std::log(share) + 2 * (p + q + 1) * n / (n - p - q - 2);
    if (value < best) {
      best = value;
      order = static_cast<int>(i + 1);
    }
  }
  return order;
}

TEST(ChooseOrder, TakesTheSmallestCriterion) {
  Draw draw(2);
  std::array<int, 11> seen{};
  for (int repeat = 0; repeat < 300; ++repeat) {
    Coefficients partials(10);
    for (std::size_t j = 0; j < 10; ++j) partials[j] = 0.8 * draw.uniform() - 0.4;
    for (const OrderCriterion criterion : {OrderCriterion::bic, OrderCriterion::aic, OrderCriterion::aicc}) {
      const OrderChoice choice{criterion, 1, 100, 13};
      const int order = choose_order(partials, 10, choice);
      EXPECT_EQ(order, slow_choice(partials, criterion, 100, 13));
      ++seen[static_cast<std::size_t>(order)];
    }
  }
  for (const std::size_t order : {1U, 2U, 3U, 5U}) EXPECT_GT(seen[order], 0);  // or the draw proves nothing
}

TEST(ChooseOrder, NeverTakesZeroWhereAnOrderCanBeFitted) {
  EXPECT_EQ(choose_order(Coefficients{0.0, 0.0}, 2, {.values = 100}), 1);
  EXPECT_EQ(choose_order(Coefficients{0.5}, 0, {.values = 100}), 0);
}

TEST(ChooseOrder, AFixedOrderIsTakenAsFarAsTheRecordAllows) {
  const OrderChoice five{OrderCriterion::fixed, 5, 100, 1};
  EXPECT_EQ(choose_order(Coefficients(10, 0.1), 10, five), 5);
  EXPECT_EQ(choose_order(Coefficients(10, 0.1), 3, five), 3);
}

}  // namespace
}  // namespace lagscape::test
