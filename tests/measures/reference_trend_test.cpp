// Straight lines through nine series, and through the anomalies of six stations, against R 4.2.2 and Python
// (statsmodels OLS; Santer et al. 2000, J. Geophys. Res. 105:7337, from the raw lag-1 autocorrelation).
#include <gtest/gtest.h>

#include "lagscape/measures/cell_result.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/stats/effective_size.h"
#include "support/reference_series.h"

namespace lagscape::test {
namespace {

/// Values of one data set by quantity.
std::map<std::string, double> straight_line(const KernelTable& kernels, const std::string& dataset) {
  const ReferenceSeries series = reference_series(dataset, true);
  const std::size_t steps = series.x.size();
  const Prepared prepared = prepare(kernels, Design(series.columns), tile_of({series.x}));
  const double m = prepared.fit.count[0];
  PairCounts pairs(steps);
  pairs.start(prepared.bits.data(), 0, static_cast<std::size_t>(prepared.summary.first[0]),
              static_cast<std::size_t>(prepared.summary.last[0]));
  alignas(64) double lagged[kLanes];
  kernels.lag_products(prepared.residual.data(), steps, 1, 1, lagged);
  const double r1 = lagged[0] / (pairs.at(1) + 1) / (prepared.fit.sum_squares[0] / m);

  const StudentQuantile quantile(0.975);
  TrendInput input{.slope = prepared.fit.slope[0],
                   .slope_factor = prepared.fit.slope_factor[0],
                   .sum_squares = prepared.fit.sum_squares[0],
                   .values = m,
                   .parameters = prepared.fit.parameters[0],
                   .effective_size = effective_size_for_trend(r1, pairs, m, m),  // the reference ignores where gaps are
                   .quantile = &quantile};
  const TrendVerdict plain = find_trend_test("ols")->verdict(input),
                     santer = find_trend_test("ols-neff")->verdict(input);
  EXPECT_TRUE(close(santer.half_width, quantile(input.effective_size - 2) * santer.standard_error, 1e-12, 0));
  EXPECT_TRUE(close(plain.p, t_two_sided_p(input.slope / plain.standard_error, m - 2), 1e-12, 0));
  return {{"ols_slope_per_step", input.slope},
          {"ols_se_iid", plain.standard_error},
          {"ols_t_iid", input.slope / plain.standard_error},
          {"santer_n_eff", input.effective_size},
          {"santer_se", santer.standard_error},
          {"santer_t", input.slope / santer.standard_error},
          {"santer_p", santer.p}};
}

TEST(ReferenceTrend, SlopesErrorsAndEffectiveSizesAreReproduced) {
  const CsvTable table = reference_table("reference_values.csv");
  for (const KernelTable* kernels : all_kernels()) {
    std::map<std::string, std::map<std::string, double>> computed;
    std::size_t checked = 0;
    for (std::size_t row = 0; row < table.rows(); ++row) {
      const std::string &dataset = table.text(row, "dataset"), &quantity = table.text(row, "quantity");
      if (reference_fates().at(quantity) != Fate::trend_test) continue;
      if (!computed.contains(dataset)) computed[dataset] = straight_line(*kernels, dataset);
      EXPECT_TRUE(close(computed[dataset].at(quantity), reference_value(table, row), 1e-9, 1e-12))
          << kernels->isa << ", " << dataset << ' ' << quantity;
      ++checked;
    }
    EXPECT_EQ(checked, 70U);
  }
}

TEST(ReferenceTrend, AnEffectiveSizeOfTwoCannotShowATrend) {
  const StudentQuantile quantile(0.975);
  const TrendInput input{.slope = 5,
                         .slope_factor = 1,
                         .sum_squares = 1,
                         .values = 50,
                         .parameters = 2,
                         .effective_size = 2.05,
                         .quantile = &quantile};
  const TrendVerdict verdict = find_trend_test("ols-neff")->verdict(input);
  EXPECT_EQ(verdict.p, 1);
  EXPECT_TRUE(std::isnan(verdict.standard_error));
}

TEST(TrendTests, HaveNamesTextsAndAVerdict) {
  for (const TrendTest& test : trend_tests()) {
    EXPECT_EQ(find_trend_test(test.name), &test);
    for (const std::string_view text : {test.summary, test.assumptions, test.source, test.cost})
      EXPECT_FALSE(text.empty());
    EXPECT_NE(test.verdict, nullptr);
  }
  EXPECT_EQ(find_trend_test("no such test"), nullptr);
  EXPECT_EQ(test_map_name("ols-neff"), "trend_p_ols_neff");
}

}  // namespace
}  // namespace lagscape::test
