#include <algorithm>
#include <array>
#include <cmath>

#include "lagscape/measures/cell_result.h"
#include "lagscape/measures/trend_test.h"

namespace lagscape {
namespace {

TrendVerdict student_verdict(const TrendInput& in, double variance, double degrees) {
  TrendVerdict verdict;
  verdict.standard_error = std::sqrt(variance * in.slope_factor);
  verdict.p = t_two_sided_p(in.slope / verdict.standard_error, degrees);
  verdict.half_width = (*in.quantile)(degrees)*verdict.standard_error;
  return verdict;
}

TrendVerdict ols(const TrendInput& in) {
  const double degrees = in.values - in.parameters;
  return student_verdict(in, in.sum_squares / degrees, degrees);
}

TrendVerdict ols_neff(const TrendInput& in) {
  constexpr double kTooFew = 2.05;
  if (!(in.effective_size > kTooFew)) return {.p = 1, .standard_error = kMissing, .half_width = kMissing};
  const double degrees = in.effective_size - 2;
  const double variance = in.sum_squares * (in.values - 2) / (in.values - in.parameters) / degrees;
  return student_verdict(in, variance, degrees);
}

constexpr std::array kTests = {
    TrendTest{
        .name = "ols-neff",
        .summary = "least squares, with the number of values cut down to the independent ones under AR(1) memory",
        .assumptions =
            "the noise about season and straight line is stationary, roughly normal, and its memory is that of a "
            "first-order autoregression; with longer memory (AR of higher order, long-range) p is too small",
        .source = "Santer et al. 2000, J. Geophys. Res. 105:7337; lag-1 autocorrelation corrected for small-sample "
                  "bias after "
                  "Shaman & Stine 1988, J. Am. Stat. Assoc. 83:842; degrees of freedom of season and gaps allowed for",
        .cost = "one pass over the record",
        .covered_order = 1,
        .verdict = ols_neff,
    },
    TrendTest{
        .name = "ols",
        .summary = "plain least squares, as if values were independent",
        .assumptions =
            "the noise about season and straight line is independent from step to step, of constant variance and "
            "roughly normal; with any memory p is too small, often by orders of magnitude",
        .source = "common practice (Student's t of a least-squares slope), no published source",
        .cost = "one pass over the record",
        .covered_order = 0,
        .verdict = ols,
    },
};
static_assert(kTests.size() <= kMaxTrendTests);

}  // namespace

std::span<const TrendTest> trend_tests() { return kTests; }

const TrendTest* find_trend_test(std::string_view name) {
  const auto found =
      std::find_if(kTests.begin(), kTests.end(), [&](const TrendTest& test) { return test.name == name; });
  return found == kTests.end() ? nullptr : &*found;
}

std::vector<std::string> trend_test_names() {
  std::vector<std::string> names;
  names.reserve(kTests.size());
  for (const TrendTest& test : kTests) names.emplace_back(test.name);
  return names;
}

std::string test_map_name(std::string_view test) {
  std::string name = "trend_p_" + std::string(test);
  std::ranges::replace(name, '-', '_');
  return name;
}

}  // namespace lagscape
