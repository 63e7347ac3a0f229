#pragma once
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace lagscape {

struct TrendInput;    // measures/cell_result.h: the fitted trend of one cell and what its noise looks like
struct TrendVerdict;  // p, standard error, critical value

/// One trend test: a declaration. Chosen by `trend.tests`; the first one feeds the field step.
struct TrendTest {
  std::string_view name;         ///< as in job files: "ols-neff"
  std::string_view summary;      ///< one line of help
  std::string_view assumptions;  ///< what its p-value rests on; written into results
  std::string_view source;
  std::string_view cost;
  /// Order of autoregression that the assumptions cover; 0: any order is told to the user by the assumptions alone.
  int covered_order;
  TrendVerdict (*verdict)(const TrendInput&);
};

[[nodiscard]] std::span<const TrendTest> trend_tests();
[[nodiscard]] const TrendTest* find_trend_test(std::string_view name);
[[nodiscard]] std::vector<std::string> trend_test_names();
/// Name of the map of a test's p-values: "trend_p_ols_neff".
[[nodiscard]] std::string test_map_name(std::string_view test);

}  // namespace lagscape
