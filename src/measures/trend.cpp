#include <array>

#include "lagscape/measures/cell_result.h"
#include "lagscape/measures/trend_test.h"
#include "measures/groups.h"

namespace lagscape {
namespace {

/// The p-value map of every declared test, for comparison of tests; `trend_p` is that of the first test of the job.
template <std::size_t... index>
std::array<double (*)(const CellResult&), sizeof...(index)> p_getters(std::index_sequence<index...>) {
  return {[](const CellResult& cell) { return cell.p_of_test[index]; }...};
}

/// Names and texts of those maps are put together from the tests, once.
const std::vector<std::array<std::string, 4>>& test_map_texts() {
  static const auto texts = [] {
    std::vector<std::array<std::string, 4>> all;
    for (const TrendTest& test : trend_tests()) {
      all.push_back({test_map_name(test.name), "p-value of the trend by the test " + std::string(test.name),
                     "What this test says in each cell by itself: " + std::string(test.summary) + ".",
                     "Assumes: " + std::string(test.assumptions) + "."});
    }
    return all;
  }();
  return texts;
}

}  // namespace

std::vector<Measure> trend_measures() {
  std::vector<Measure> measures = {
      {.name = "trend_slope",
       .group = MapGroup::trend,
       .standard = true,
       .unit = UnitRule::input_rate,
       .long_name = "linear trend",
       .meaning = "Slope of the straight line, fitted together with mean and season by least squares.",
       .formula = "b of x = mean + season + b t + noise, in one fit over the valid steps",
       .source = "common practice (least squares), no published source",
       .cautions = "A straight line may be a poor description; a slope is not a cause.",
       .ancillary = "trend_slope_low trend_slope_high trend_p trend_class status",
       .value = [](const CellResult& cell) { return cell.slope; }},
      {.name = "trend_slope_low",
       .group = MapGroup::trend,
       .standard = true,
       .unit = UnitRule::input_rate,
       .long_name = "lower confidence limit of the linear trend, memory allowed for",
       .meaning = "Lower limit of the slope at memory.confidence by the job's first trend test.",
       .formula = "b - c se of the test",
       .source = "as the test: see global attribute lagscape_trend_test",
       .cautions = "For one cell at a time, not for all cells together.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.slope_low; }},
      {.name = "trend_slope_high",
       .group = MapGroup::trend,
       .standard = true,
       .unit = UnitRule::input_rate,
       .long_name = "upper confidence limit of the linear trend, memory allowed for",
       .meaning = "Upper limit of the slope at memory.confidence by the job's first trend test.",
       .formula = "b + c se of the test",
       .source = "as the test: see global attribute lagscape_trend_test",
       .cautions = "For one cell at a time, not for all cells together.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.slope_high; }},
      {.name = "trend_total",
       .group = MapGroup::trend,
       .standard = true,
       .unit = UnitRule::input_difference,
       .long_name = "change over the record according to the linear trend",
       .meaning = "Slope times the time from the cell's first to its last value.",
       .formula = "b (t_last - t_first)",
       .source = kCommonPractice,
       .cautions = "Cells with records of different length are not comparable in this map: use trend_slope.",
       .ancillary = "trend_p trend_class status",
       .value = [](const CellResult& cell) { return cell.total; }},
      {.name = "trend_p",
       .group = MapGroup::trend,
       .standard = true,
       .long_name = "p-value of the trend by the job's first test (two-sided, single cell)",
       .meaning = "How often noise with the memory that the test assumes would show a trend at least this strong.",
       .formula = "see the test: explain ols-neff, explain ols",
       .source = "as the test: see global attribute lagscape_trend_test",
       .cautions =
           "Rests on the test's assumptions. Not corrected for testing many cells: see trend_p_field and trend_class.",
       .ancillary = "status",
       .valid_range = {0, 1},
       .value = [](const CellResult& cell) { return cell.p; }},
      {.name = "trend_p_independent",
       .group = MapGroup::trend,
       .standard = true,
       .long_name = "p-value of the trend as if values were independent (two-sided)",
       .meaning = "What a test that ignores memory would say; compare with trend_p to see what memory costs.",
       .formula = "b / sqrt(SSE/(m-q) s_b) against Student's t(m - q)",
       .source = "common practice (least squares), no published source",
       .cautions = "Wrong wherever there is memory: for comparison only.",
       .ancillary = "status",
       .valid_range = {0, 1},
       .value = [](const CellResult& cell) { return cell.p_independent; }},
      {.name = "trend_p_field",
       .group = MapGroup::trend,
       .standard = true,
       .long_name = "p-value of the trend, adjusted for testing all cells of the map",
       .meaning =
           "Smallest false discovery rate at which the cell's trend would stand, given all cells tested together.",
       .formula = "bh: min_{j>=i} N p_(j)/j; by: times sum 1/i (field.control); none: trend_p itself",
       .source = "Benjamini & Hochberg 1995, J. R. Stat. Soc. B 57:289; Benjamini & Yekutieli 2001, Ann. Stat. 29:1165",
       .cautions = "Depends on which cells are on the map. Rests on the assumptions of the test in every cell.",
       .ancillary = "status",
       .valid_range = {0, 1},
       .value = [](const CellResult& cell) { return cell.p_field; }},
      {.name = "trend_class",
       .group = MapGroup::trend,
       .standard = true,
       .type = MapType::i8,
       .unit = UnitRule::none,
       .long_name = "trend that stands after all corrections",
       .meaning = "Rising or falling where the trend passes both the level in its cell and the false discovery rate "
                  "over the map; "
                  "else not established.",
       .formula = "stands if trend_p <= trend.alpha and trend_p_field <= field.rate",
       .source = "Wilks 2016, Bull. Am. Meteorol. Soc. 97:2263 (false discovery rate on maps)",
       .cautions = "Not established does not mean no trend: see detectable_trend for what the record could have shown. "
                   "Where people "
                   "could be hurt, leave the decision to qualified practice.",
       .standard_name = "status_flag",
       .value =
           [](const CellResult& cell) {
             return cell.trend_class < 0 ? kMissing : static_cast<double>(cell.trend_class);
           }},
      {.name = "detectable_trend",
       .group = MapGroup::trend,
       .standard = true,
       .unit = UnitRule::input_rate,
       .long_name = "smallest trend that this record would show with 90 % power",
       .meaning = "Trends smaller than this can be there without being found.",
       .formula = "(t_{1-alpha/2} + 1.2816) se, se and degrees of freedom of the test ols-neff",
       .source = "power of a slope test with the standard error of Santer et al. 2000; compare Weatherhead et al. "
                 "1998, J. Geophys. "
                 "Res. 103:17149",
       .cautions = "For one cell tested alone, under first-order memory.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.detectable; }},
      {.name = "years_to_detect",
       .group = MapGroup::trend,
       .standard = false,
       .long_name = "years of record needed to show the job's target trend with 90 % power",
       .meaning =
           "How long a record like this has to be before a trend of trend.target would be found. Needs trend.target.",
       .formula = "years (detectable_trend / target)^(2/3)",
       .source = "Tiao et al. 1990, J. Geophys. Res. 95:20507; Weatherhead et al. 1998, J. Geophys. Res. 103:17149",
       .cautions = "The power law holds for records much longer than their memory.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.years_to_detect; }},
  };
  const auto getters = p_getters(std::make_index_sequence<kMaxTrendTests>());
  for (std::size_t i = 0; i < trend_tests().size(); ++i) {
    const TrendTest& test = trend_tests()[i];
    measures.push_back({.name = test_map_texts()[i][0],
                        .group = MapGroup::trend,
                        .standard = false,
                        .long_name = test_map_texts()[i][1],
                        .meaning = test_map_texts()[i][2],
                        .formula = "two-sided p of the slope",
                        .source = test.source,
                        .cautions = test_map_texts()[i][3],
                        .ancillary = "status",
                        .valid_range = {0, 1},
                        .value = getters[i]});
  }
  return measures;
}

}  // namespace lagscape
