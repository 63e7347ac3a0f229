#pragma once
#include <map>
#include <string>

#include "support/csv_table.h"
#include "support/series.h"

// The series behind tests/reference/reference_values.csv with the design that the reference programs took out of each,
// and what becomes of each quantity of that file.
namespace lagscape::test {

struct ReferenceSeries {
  Series x;
  DesignColumns columns;
};

inline Series colorado_series(const std::string& station) {
  const CsvTable five = reference_table("colorado_tmin_monthly_5st.csv");
  if (five.has(station)) return five.numbers(station);
  return reference_table("colorado_tmin_monthly_gappy.csv").numbers(station);
}

inline Series without_month_means(Series x) {
  for (std::size_t month = 0; month < 12; ++month) {
    double sum = 0, count = 0;
    for (std::size_t t = month; t < x.size(); t += 12) {
      if (std::isnan(x[t])) continue;
      sum += x[t];
      ++count;
    }
    for (std::size_t t = month; t < x.size(); t += 12) x[t] -= sum / count;
  }
  return x;
}

inline bool begins_with(const std::string& text, std::string_view start) { return text.rfind(start, 0) == 0; }

/// The series of a data set and the columns of its own fit; trend: those of the plain straight line (`ols_*`,
/// `santer_*`), which R and Python fitted to the same series, or after the month means had been taken off.
inline ReferenceSeries reference_series(const std::string& dataset, bool trend = false) {
  if (begins_with(dataset, "wind_")) {
    const Series x = reference_table("irish_wind_daily_knots.csv").numbers(dataset.substr(5));
    return {x, harmonic_columns(x.size(), 3, 365.25, 1)};
  }
  if (begins_with(dataset, "CO_")) {
    Series x = colorado_series(dataset.substr(3, 7));
    if (dataset.find("_m181_540_") != std::string::npos) x = Series(x.begin() + 180, x.begin() + 540);
    const std::size_t steps = x.size();
    if (trend) return {without_month_means(x), plain_columns(steps, 1)};
    return {x, monthly_columns(steps, 1)};
  }
  const bool logarithm = begins_with(dataset, "log10");
  Series x = reference_table(dataset.substr(logarithm ? 5 : 0) + ".csv").numbers("x");
  if (logarithm) {
    for (double& value : x) value = std::log10(value);
  }
  const std::size_t steps = x.size();
  return {x, plain_columns(steps, trend ? 1 : 0)};
}

enum class Fate { kernels, analysis, trend_test, left_out };

/// Which test checks the rows of a quantity: stats/reference_values_test, measures/reference_analysis_test,
/// measures/reference_trend_test, or none. tests/reference/README.md says why some are left out.
inline const std::map<std::string, Fate>& reference_fates() {
  static const std::map<std::string, Fate> fates = [] {
    std::map<std::string, Fate> all;
    for (const char* name : {"n",
                             "nobs",
                             "mean",
                             "sd",
                             "var_biased",
                             "resid_var_biased",
                             "acf_biased",
                             "acf_pairwise",
                             "acf_psd",
                             "pacf_yw",
                             "pacf_burg[py only]",
                             "ar10_yw_coef",
                             "ar2_yw_coef",
                             "ar2_burg_coef",
                             "ar3_burg_coef",
                             "ar2_yw_var_pred",
                             "ar2_burg_var_pred",
                             "ar_aicdiff_yw",
                             "ar_aicdiff_burg",
                             "ar_aic_order10max_yw",
                             "ar_aic_order10max_burg",
                             "ar_aic_order15max_burg",
                             "ljung_box_Q",
                             "ljung_box_p",
                             "tau_efold",
                             "lag_zero_cross",
                             "tau_int_first_nonpos",
                             "tau_int_first_insig",
                             "tau_int_geyer_ips",
                             "tau_int_geyer_ims",
                             "tau_int_sokal_c5",
                             "tau_ar1",
                             "r1_corrected_mean",
                             "tau_ar1_corrected",
                             "n_eff_mean_ar1",
                             "joint_slope_per_day",
                             "joint_slope_per_month",
                             "ols_se_iid_joint",
                             "resid_r1",
                             "resid_r1_corrected_trend"}) {
      all[name] = Fate::kernels;
    }
    all["bartlett_se"] = Fate::analysis;
    for (const char* name :
         {"ols_slope_per_step", "ols_se_iid", "ols_t_iid", "santer_n_eff", "santer_se", "santer_t", "santer_p"}) {
      all[name] = Fate::trend_test;
    }
    for (const char* name : {"ar2_ols_coef",
                             "ar2_mle_coef",
                             "ar2_mle_mean",
                             "ar2_mle_sigma2",
                             "ar2_mle_loglik",
                             "pacf_ols[py only]",
                             "tau_int_sokal_c5_se",
                             "mk_S",
                             "mk_varS",
                             "mk_z",
                             "mk_tau_b",
                             "theil_sen_slope",
                             "seasonal_kendall_S",
                             "seasonal_kendall_var_indep",
                             "seasonal_kendall_var_hirsch_slack",
                             "seasonal_kendall_z_hirsch_slack",
                             "seasonal_sen_slope_per_year",
                             "gls_reml_ar1_phi",
                             "gls_reml_ar1_slope",
                             "gls_reml_ar1_se",
                             "newey_west_se",
                             "newey_west_se_joint",
                             "ccf_cor_x(t+k)_y(t)",
                             "n_eff_corr_bretherton_r1",
                             "n_eff_corr_pyper_peterman",
                             "coda_spec0_ar",
                             "coda_ess_ar"}) {
      all[name] = Fate::left_out;
    }
    return all;
  }();
  return fates;
}

/// The value of a row: Python's, else R's (which gives 0 for p-values below 1e-16; elsewhere they agree).
inline double reference_value(const CsvTable& table, std::size_t row) {
  const double python = table.number(row, "value_py");
  return std::isnan(python) ? table.number(row, "value_R") : python;
}

}  // namespace lagscape::test
