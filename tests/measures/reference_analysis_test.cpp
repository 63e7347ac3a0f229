// The whole path of one cell against R 4.2.2 and Python (tests/reference/README.md): what a map would show.
#include <gtest/gtest.h>

#include "measures/setup.h"
#include "support/reference_series.h"

namespace lagscape::test {
namespace {

const std::vector<std::string> kPlainSeries = {"LakeHuron", "Nile",      "nottem",  "sunspot.year",
                                               "lynx",      "log10lynx", "treering"};

TEST(ReferenceAnalysis, MapsAndCubesOfPlainSeriesAreReproduced) {
  const CsvTable table = reference_table("reference_values.csv");
  std::size_t limits = 0;
  for (const std::string& dataset : kPlainSeries) {
    const ReferenceSeries series = reference_series(dataset);
    const AnalysisSettings settings = settings_for(series.columns);
    const Analysed cell(settings, series.x);
    const double z = normal_quantile(0.975);
    for (const std::size_t row : table.where({{"dataset", dataset}})) {
      const std::string& quantity = table.text(row, "quantity");
      const std::string& lag_text = table.text(row, "lag");
      const std::size_t lag = lag_text.empty() ? 0 : std::stoul(lag_text);
      double value = 0;
      if (quantity == "bartlett_se") {
        value = cell->autocorrelation_limit[lag] / z;  // Bartlett 1946, J. R. Stat. Soc. Suppl. 8:27
        ++limits;
      } else if (quantity == "acf_biased") {
        value = cell->autocorrelation[lag];
      } else if (quantity == "pacf_yw") {
        value = cell->partial_autocorrelation[lag];
      } else if (quantity == "ljung_box_p" && lag == 10) {
        value = cell->ljung_box_p;
      } else if (quantity == "sd") {
        value = cell->residual_sd;
      } else if (quantity == "mean") {
        value = cell->mean;
      } else if (quantity == "tau_efold") {
        value = cell->e_folding;
      } else if (quantity == "lag_zero_cross") {
        value = cell->zero_crossing;
      } else if (quantity == "tau_int_first_nonpos") {
        value = 2 * cell->integral;  // the map is one-sided
      } else if (quantity == "tau_int_geyer_ims") {
        value = cell->geyer;
      } else if (quantity == "tau_int_sokal_c5") {
        value = cell->sokal;
      } else {
        continue;
      }
      EXPECT_TRUE(close(value, reference_value(table, row), 1e-9, 1e-12)) << dataset << ' ' << quantity << ' ' << lag;
    }
  }
  EXPECT_EQ(limits, 140U);  // all rows of bartlett_se
}

}  // namespace
}  // namespace lagscape::test
