// Statistics of nine published series and two station networks against R 4.2.2 and Python (numpy, scipy, statsmodels),
// which computed them from the formulas in tests/reference/README.md: every row that this version computes.
#include <gtest/gtest.h>

#include <algorithm>
#include <fstream>
#include <functional>
#include <memory>
#include <optional>
#include <regex>
#include <set>

#include "lagscape/stats/ar_model.h"
#include "lagscape/stats/distributions.h"
#include "lagscape/stats/effective_size.h"
#include "lagscape/stats/lag_scan.h"
#include "support/reference_series.h"

namespace lagscape::test {
namespace {

constexpr std::size_t kLane = 5;     // any lane will do; kernels_test shows that they are equal
constexpr std::size_t kOrders = 20;  // rows of pacf_*
constexpr int kToConvergence = 60;   // R and Python solved the bias equations in closed form
const DesignFrequency kLine{0.0, 1};

/// Everything the reference programs computed from one series and its design.
class Statistics {
 public:
  Statistics(const KernelTable& kernels, const ReferenceSeries& series) : steps_(series.x.size()), pairs_(steps_) {
    const Design design(series.columns);
    std::vector<Series> lanes(kLane + 1, Series(steps_, kNaN));
    lanes[kLane] = series.x;
    const Prepared prepared = prepare(kernels, design, tile_of(lanes));
    count_ = prepared.fit.count[kLane];
    mean_ = prepared.fit.mean[kLane];
    slope_ = prepared.fit.slope[kLane];
    sum_squares_ = prepared.fit.sum_squares[kLane];
    slope_error_ =
        std::sqrt(sum_squares_ / (count_ - prepared.fit.parameters[kLane]) * prepared.fit.slope_factor[kLane]);
    pairs_.start(prepared.bits.data(), kLane, static_cast<std::size_t>(prepared.summary.first[kLane]),
                 static_cast<std::size_t>(prepared.summary.last[kLane]));

    const std::size_t lags = pairs_.span();
    AlignedVector<double> products(lags * kLanes), r(lags * kLanes), work(2 * lags * kLanes), partial(lags * kLanes);
    kernels.lag_products(prepared.residual.data(), steps_, 0, lags, products.data());
    products_ = lane_of(products, lags, kLane);
    for (std::size_t k = 0; k < lags; ++k) r[k * kLanes + kLane] = biased(k);
    kernels.durbin_levinson(r.data(), kOrders, work.data(), partial.data());
    for (std::size_t k = 1; k <= kOrders; ++k) yule_walker_.push_back(partial[k * kLanes + kLane]);

    AlignedVector<double> burg_work(2 * steps_ * kLanes), burg(kOrders * kLanes), usable(kOrders * kLanes);
    std::vector<std::uint8_t> window(steps_);
    kernels.burg(prepared.residual.data(), prepared.bits.data(), steps_, kOrders, burg_work.data(), window.data(),
                 burg.data(), usable.data());
    burg_ = lane_of(burg, kOrders, kLane);
    for (std::size_t k = 1; k < lags; ++k) scan_.feed(biased(k), normal_quantile(0.975) / std::sqrt(count_));
  }

  /// The value of a row; nothing if this class does not know the quantity.
  [[nodiscard]] std::optional<double> value(const std::string& quantity, std::size_t lag, double reference_q) {
    const auto coefficient = [&](const Series& partials, std::size_t order) {
      return model(partials, order).coefficient.at(lag - 1);
    };
    const std::map<std::string, std::function<double()>> values = {
        {"n", [&] { return static_cast<double>(steps_); }},
        {"nobs", [&] { return count_; }},
        {"mean", [&] { return mean_; }},
        {"sd", [&] { return std::sqrt(sum_squares_ / (count_ - 1)); }},
        {"var_biased", [&] { return sum_squares_ / count_; }},
        {"resid_var_biased", [&] { return sum_squares_ / count_; }},
        {"acf_biased", [&] { return biased(lag); }},
        {"acf_pairwise", [&] { return products_[lag] / pairs_.at(lag) / variance(); }},
        {"acf_psd", [&] { return products_[lag] / products_[0]; }},
        {"pacf_yw", [&] { return yule_walker_.at(lag - 1); }},
        {"pacf_burg[py only]", [&] { return burg_.at(lag - 1); }},
        {"ar10_yw_coef", [&] { return coefficient(yule_walker_, 10); }},
        {"ar2_yw_coef", [&] { return coefficient(yule_walker_, 2); }},
        {"ar2_burg_coef", [&] { return coefficient(burg_, 2); }},
        {"ar3_burg_coef", [&] { return coefficient(burg_, 3); }},
        // R's innovation variance: Yule-Walker's is per degree of freedom, Burg's is not.
        {"ar2_yw_var_pred",
         [&] { return variance() * model(yule_walker_, 2).innovation_share() * count_ / (count_ - 3); }},
        {"ar2_burg_var_pred", [&] { return variance() * model(burg_, 2).innovation_share(); }},
        {"ar_aicdiff_yw", [&] { return aic(yule_walker_, lag) - smallest_aic(yule_walker_); }},
        {"ar_aicdiff_burg", [&] { return aic(burg_, lag) - smallest_aic(burg_); }},
        {"ar_aic_order10max_yw", [&] { return order(yule_walker_, 10); }},
        {"ar_aic_order10max_burg", [&] { return order(burg_, 10); }},
        {"ar_aic_order15max_burg", [&] { return order(burg_, 15); }},
        {"ljung_box_Q", [&] { return ljung_box(lag); }},
        {"ljung_box_p", [&] { return chi_squared_tail(reference_q, static_cast<double>(lag)); }},
        {"tau_efold", [&] { return scan_.e_folding(); }},
        {"lag_zero_cross", [&] { return scan_.zero_crossing(); }},
        {"tau_int_first_nonpos", [&] { return scan_.integral(); }},
        {"tau_int_first_insig", [&] { return scan_.integral_above_limit(); }},
        {"tau_int_geyer_ips", [&] { return scan_.geyer_positive(); }},
        {"tau_int_geyer_ims", [&] { return scan_.geyer_monotone(); }},
        {"tau_int_sokal_c5", [&] { return scan_.sokal(); }},
        {"tau_ar1", [&] { return first_order().decorrelation_time(); }},
        {"r1_corrected_mean", [&] { return corrected({}, static_cast<double>(steps_)).coefficient[0]; }},
        {"tau_ar1_corrected", [&] { return corrected({}, static_cast<double>(steps_)).decorrelation_time(); }},
        {"n_eff_mean_ar1", [&] { return effective_size_for_trend(biased(1), pairs_, count_, count_); }},
        {"joint_slope_per_day", [&] { return slope_; }},
        {"joint_slope_per_month", [&] { return slope_; }},
        {"ols_se_iid_joint", [&] { return slope_error_; }},
        {"resid_r1", [&] { return biased(1); }},
        {"resid_r1_corrected_trend",
         [&] {
           return corrected({&kLine, 1}, count_).coefficient[0];
         }},
    };
    const auto found = values.find(quantity);
    return found == values.end() ? std::nullopt : std::optional(found->second());
  }

 private:
  [[nodiscard]] double variance() const { return sum_squares_ / count_; }
  [[nodiscard]] double biased(std::size_t k) {
    return products_[k] / (pairs_.at(k) + static_cast<double>(k)) / variance();
  }
  [[nodiscard]] static ArModel model(const Series& partials, std::size_t order) {
    return model_from_partials({partials.data(), order});
  }
  [[nodiscard]] double aic(const Series& partials, std::size_t order) const {
    return count_ * std::log(model(partials, order).innovation_share()) + 2 * static_cast<double>(order);
  }
  [[nodiscard]] double smallest_aic(const Series& partials) const {
    double smallest = aic(partials, 0);
    for (std::size_t p = 1; p <= 10; ++p) smallest = std::min(smallest, aic(partials, p));
    return smallest;
  }
  [[nodiscard]] double order(const Series& partials, int largest) const {
    return choose_order(partials, largest, {.criterion = OrderCriterion::aic, .values = count_});
  }
  [[nodiscard]] double ljung_box(std::size_t lags) {
    double sum = 0;
    for (std::size_t k = 1; k <= lags; ++k) sum += biased(k) * biased(k) / pairs_.at(k);
    return count_ * (count_ + 2) * sum;
  }
  [[nodiscard]] ArModel first_order() {
    const double f[] = {biased(1)};
    return model_from_coefficients(f);
  }
  [[nodiscard]] ArModel corrected(std::span<const DesignFrequency> design, double values) {
    return bias_corrected(first_order(), values, design, kToConvergence);
  }

  std::size_t steps_;
  PairCounts pairs_;
  LagScan scan_;
  double count_ = 0, mean_ = 0, slope_ = 0, sum_squares_ = 0, slope_error_ = 0;
  Series products_, yule_walker_, burg_;
};

/// Quantities that belong to the plain straight line, not to the data set's own fit.
bool of_straight_line(const std::string& quantity) { return begins_with(quantity, "resid_r1"); }

TEST(ReferenceValues, EveryRowOfThisVersionIsReproduced) {
  const CsvTable table = reference_table("reference_values.csv");
  std::map<std::string, double> ljung_box_q;
  for (const std::size_t row : table.where({{"quantity", "ljung_box_Q"}})) {
    ljung_box_q[table.text(row, "dataset") + table.text(row, "lag")] = reference_value(table, row);
  }
  for (const KernelTable* kernels : all_kernels()) {
    std::map<std::string, std::unique_ptr<Statistics>> computed;
    std::size_t checked = 0;
    for (std::size_t row = 0; row < table.rows(); ++row) {
      const std::string &dataset = table.text(row, "dataset"), &quantity = table.text(row, "quantity");
      if (reference_fates().at(quantity) != Fate::kernels) continue;
      const bool line = of_straight_line(quantity);
      auto& statistics = computed[dataset + (line ? " line" : "")];
      if (!statistics) statistics = std::make_unique<Statistics>(*kernels, reference_series(dataset, line));
      const std::string& lag_text = table.text(row, "lag");
      const std::size_t lag = lag_text.empty() ? 0 : std::stoul(lag_text);
      const auto value = statistics->value(quantity, lag, ljung_box_q[dataset + lag_text]);
      ASSERT_TRUE(value) << quantity << " is listed as checked, but is not";
      EXPECT_TRUE(close(*value, reference_value(table, row), 1e-9, 1e-12))
          << kernels->isa << ", " << dataset << ' ' << quantity << ' ' << lag_text;
      ++checked;
    }
    EXPECT_EQ(checked, 1820U);  // as the README of the folder says, row by row
  }
}

TEST(ReferenceValues, NoQuantityIsForgotten) {
  const CsvTable table = reference_table("reference_values.csv");
  std::set<std::string> unlisted, unused;
  for (const auto& [quantity, fate] : reference_fates()) unused.insert(quantity);
  for (std::size_t row = 0; row < table.rows(); ++row) {
    const std::string& quantity = table.text(row, "quantity");
    if (!reference_fates().contains(quantity)) unlisted.insert(quantity);
    unused.erase(quantity);
  }
  EXPECT_TRUE(unlisted.empty()) << *unlisted.begin() << " is neither checked nor listed as left out";
  EXPECT_TRUE(unused.empty()) << *unused.begin() << " is not in the file";
}

TEST(ReferenceValues, TheReadmeListsEachQuantityWithItsRowsAndWhatBecomesOfThem) {
  const CsvTable table = reference_table("reference_values.csv");
  std::ifstream readme(LAGSCAPE_TEST_DATA "/README.md");
  std::map<std::string, std::pair<std::size_t, std::string>> listed;
  for (std::string line; std::getline(readme, line);) {
    static const std::regex kRow(R"(\| `([^`]+)` \| (\d+) \| (.*) \|)");
    std::smatch found;
    if (std::regex_match(line, found, kRow)) listed[found[1]] = {std::stoul(found[2]), found[3]};
  }
  EXPECT_EQ(listed.size(), reference_fates().size());
  const std::map<Fate, std::string> words = {{Fate::kernels, "stats/reference_values_test"},
                                             {Fate::analysis, "measures/reference_analysis_test"},
                                             {Fate::trend_test, "measures/reference_trend_test"},
                                             {Fate::left_out, "left out: "}};
  for (const auto& [quantity, fate] : reference_fates()) {
    EXPECT_EQ(listed[quantity].first, table.where({{"quantity", quantity}}).size()) << quantity;
    EXPECT_TRUE(begins_with(listed[quantity].second, words.at(fate))) << quantity;
  }
}

}  // namespace
}  // namespace lagscape::test
