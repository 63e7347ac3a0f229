#include "lagscape/measures/cell_result.h"
#include "measures/groups.h"

namespace lagscape {
namespace {

template <LagColumn CellResult::*column>
void copy_lags(const CellResult& cell, std::span<float> layers) {
  for (std::size_t lag = 0; lag < layers.size(); ++lag) layers[lag] = static_cast<float>((cell.*column)[lag]);
}

}  // namespace

std::vector<Measure> cube_measures() {
  return {
      {.name = "autocorrelation",
       .group = MapGroup::cubes,
       .standard = false,
       .axis = LayerAxis::lag,
       .long_name = "autocorrelation",
       .meaning = "Correlation of the prepared series with itself, lag by lag; 1 at lag 0.",
       .formula = "r(k) = c(k)/c(0), c(k) = S(k)/(nu(k) + k)",
       .source = "Box & Jenkins 1970, Time Series Analysis, ch. 2; with gaps the sum over valid pairs by nu(k) + k",
       .cautions = "Missing at lags with fewer than max(10, m/10) pairs.",
       .ancillary = "autocorrelation_limit status",
       .layers = copy_lags<&CellResult::autocorrelation>},
      {.name = "autocorrelation_limit",
       .group = MapGroup::cubes,
       .standard = false,
       .axis = LayerAxis::lag,
       .long_name = "limit within which the autocorrelation cannot be told from zero",
       .meaning = "Half width of the band around zero at memory.confidence, lag by lag.",
       .formula = "bartlett: z sqrt((1 + 2 sum_{j<k} r(j)^2)/n), n = nu(k) with gaps; independent: z/sqrt(m)",
       .source = "Bartlett 1946, J. R. Stat. Soc. Suppl. 8:27",
       .cautions = "For one lag at a time: over many lags some will stick out by chance.",
       .ancillary = "status",
       .layers = copy_lags<&CellResult::autocorrelation_limit>},
      {.name = "partial_autocorrelation",
       .group = MapGroup::cubes,
       .standard = false,
       .axis = LayerAxis::lag,
       .long_name = "partial autocorrelation",
       .meaning = "Correlation at a lag once the shorter lags are allowed for; missing at lag 0.",
       .formula = "Durbin-Levinson recursion on r(k); where gaps make those impossible together, on S(k)/S(0)",
       .source =
           "Durbin 1960, Rev. Int. Stat. Inst. 28:233; limits 1/sqrt(n): Quenouille 1949, J. R. Stat. Soc. B 11:68",
       .cautions = "Missing from the first lag on that has too few pairs.",
       .ancillary = "status",
       .layers = copy_lags<&CellResult::partial_autocorrelation>},
      {.name = "autocovariance",
       .group = MapGroup::cubes,
       .standard = false,
       .axis = LayerAxis::lag,
       .unit = UnitRule::input_squared,
       .long_name = "autocovariance",
       .meaning = "Covariance of the prepared series with itself, lag by lag; the variance at lag 0.",
       .formula = "c(k) = S(k)/(nu(k) + k)",
       .source = "Box & Jenkins 1970, Time Series Analysis, ch. 2",
       .cautions = "Divided by the number of pairs and lags, not by degrees of freedom.",
       .ancillary = "status",
       .layers = copy_lags<&CellResult::autocovariance>},
      {.name = "pair_count",
       .group = MapGroup::cubes,
       .standard = false,
       .axis = LayerAxis::lag,
       .long_name = "number of valid pairs",
       .meaning = "How many pairs of values each lag's autocorrelation rests on.",
       .formula = "nu(k)",
       .source = kCommonPractice,
       .cautions = "",
       .ancillary = "status",
       .layers = copy_lags<&CellResult::pair_count>},
      {.name = "ar_coefficients",
       .group = MapGroup::cubes,
       .standard = false,
       .axis = LayerAxis::order,
       .long_name = "coefficients of the fitted autoregression",
       .meaning = "Bias-corrected coefficients f(1) .. f(p); 0 beyond the cell's order. With innovation_sd they "
                  "reproduce the memory "
                  "elsewhere.",
       .formula = "x(t) = sum f(j) x(t-j) + e(t)",
       .source = "Burg 1975 (thesis, Stanford); correction after Shaman & Stine 1988, J. Am. Stat. Assoc. 83:842",
       .cautions = "",
       .ancillary = "ar_order innovation_sd status",
       .layers =
           [](const CellResult& cell, std::span<float> layers) {
             for (std::size_t j = 0; j < layers.size(); ++j) {
               layers[j] = static_cast<float>(cell.order > 0 ? cell.coefficients[j] : kMissing);
             }
           }},
  };
}

}  // namespace lagscape
