// Mean, standard deviation and lag-1 autocorrelation as certified by the US National Institute of Standards and
// Technology (Statistical Reference Datasets, univariate summary statistics; 15 digits).
#include <gtest/gtest.h>

#include "support/csv_table.h"
#include "support/series.h"

namespace lagscape::test {
namespace {

/// What double precision allows: the digits before the decimal point are lost to the deviations. NumAcc3 and 4 are
/// 1e6 and 1e7 plus tenths, Mavro's values differ in the fifth digit.
struct Tolerance {
  double mean, sd, lag1;
};

Tolerance tolerance_of(const std::string& dataset) {
  if (dataset == "NumAcc3") return {1e-14, 1e-9, 1e-10};
  if (dataset == "NumAcc4") return {1e-14, 1e-7, 1e-10};
  if (dataset == "Mavro") return {1e-14, 1e-12, 1e-10};
  return {1e-14, 1e-12, 1e-12};
}

TEST(Nist, MeanSpreadAndLagOneAreTheCertifiedOnes) {
  const CsvTable certified = reference_table("nist_certified.csv");
  ASSERT_EQ(certified.rows(), 9U);
  for (const KernelTable* kernels : all_kernels()) {
    for (std::size_t row = 0; row < certified.rows(); ++row) {
      const std::string& dataset = certified.text(row, "dataset");
      SCOPED_TRACE(std::string(kernels->isa) + " " + dataset);
      const Series x = reference_table("nist_" + dataset + ".csv").numbers("x");
      ASSERT_EQ(static_cast<double>(x.size()), certified.number(row, "n"));
      const Design design(plain_columns(x.size()));
      const Prepared prepared = prepare(*kernels, design, tile_of({x, x}));
      alignas(64) double products[2 * kLanes];
      kernels->lag_products(prepared.residual.data(), x.size(), 0, 2, products);
      const Tolerance tolerance = tolerance_of(dataset);
      for (const std::size_t lane : {0U, 1U}) {
        const double m = prepared.fit.count[lane];
        const double sd = std::sqrt(prepared.fit.sum_squares[lane] / (m - 1));
        EXPECT_TRUE(close(prepared.fit.mean[lane], certified.number(row, "certified_mean"), tolerance.mean, 0));
        EXPECT_TRUE(close(sd, certified.number(row, "certified_sd"), tolerance.sd, 0));
        EXPECT_TRUE(close(products[kLanes + lane] / products[lane], certified.number(row, "certified_lag1"),
                          tolerance.lag1, 0));
      }
    }
  }
}

TEST(Nist, CertifiedDigitsAreThoseOfExactArithmetic) {  // guards the committed file itself
  const CsvTable certified = reference_table("nist_certified.csv");
  for (std::size_t row = 0; row < certified.rows(); ++row) {
    for (const std::string what : {"mean", "sd", "lag1"}) {
      EXPECT_TRUE(
          close(certified.number(row, "certified_" + what), certified.number(row, "exact_rational_" + what), 1e-14, 0))
          << certified.text(row, "dataset") << ' ' << what;
    }
  }
}

}  // namespace
}  // namespace lagscape::test
