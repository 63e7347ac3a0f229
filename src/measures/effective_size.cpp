#include "lagscape/measures/cell_result.h"
#include "measures/groups.h"

namespace lagscape {

std::vector<Measure> effective_size_measures() {
  return {
      {.name = "effective_sample_size",
       .group = MapGroup::effective_size,
       .standard = true,
       .long_name = "effective sample size for a mean",
       .meaning = "How many independent values the record is worth when a mean is estimated.",
       .formula = "m^2/(m + 2 sum nu(k) rho(k)), rho of the fitted autoregression, nu(k) pairs; within 2 ... m",
       .source = "Bayley & Hammersley 1946, J. R. Stat. Soc. Suppl. 8:184; gaps by pair counts",
       .cautions = "Too large where memory is long-range. Not given for filtered series.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.effective_size; }},
      {.name = "effective_sample_size_for_variance",
       .group = MapGroup::effective_size,
       .standard = true,
       .long_name = "effective sample size for a variance",
       .meaning =
           "How many independent values the record is worth when a variance (or a correlation of two such records) is "
           "estimated.",
       .formula = "m^2/(m + 2 sum nu(k) rho(k)^2); within 2 ... m",
       .source = "Bayley & Hammersley 1946, J. R. Stat. Soc. Suppl. 8:184; gaps by pair counts",
       .cautions = "As for effective_sample_size.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.effective_size_variance; }},
      {.name = "effective_sample_size_for_trend",
       .group = MapGroup::effective_size,
       .standard = true,
       .long_name = "effective sample size for a trend (first-order memory)",
       .meaning = "How many independent values the record is worth when a straight trend is tested (test ols-neff).",
       .formula = "m (1-f)/(1+f)/I, f = corrected lag-1 autocorrelation of the trend's residuals, I = gap factor (1 if "
                  "complete)",
       .source = "Santer et al. 2000, J. Geophys. Res. 105:7337; gap factor measured by simulation",
       .cautions = "Assumes first-order memory.",
       .ancillary = "status",
       .value = [](const CellResult& cell) { return cell.effective_size_trend; }},
  };
}

}  // namespace lagscape
