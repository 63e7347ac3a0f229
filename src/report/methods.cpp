#include "report/methods.h"

#include <array>

namespace lagscape {
namespace {

constexpr std::array kMethods = {
    Method{"preparation", "residual anomaly", "what is taken out before memory is measured",
           "Season (prepare.season) and slow change (prepare.remove) are fitted together, in one least-squares fit to "
           "the valid "
           "values of a cell; memory is measured on what is left. One joint fit keeps a trend from leaking into the "
           "season and "
           "back when the record has gaps. The number of fitted terms is carried on into every later variance. Seasons "
           "with "
           "fewer than two values are dropped and counted.",
           "least squares; the joint fit is common practice, no published source"},
    Method{"gaps", "missing missing_values", "how missing steps and values are treated",
           "The time axis is always complete: a step that no file holds is a missing value, never closed up and never "
           "interpolated, because both would change the memory. Pairs with a missing end are left out; autocovariances "
           "are "
           "sums over the valid pairs, divided by pairs plus lag, so that a complete record gives the usual biased "
           "estimate. "
           "Cells with too few values, or too small a share of them, have no estimates and say so in the status map.",
           "common practice, no published source"},
    Method{"autocorrelation_limits", "bartlett", "limits of the autocorrelation",
           "Bartlett's limits at lag k allow for the autocorrelation at shorter lags: variance (1 + 2 sum r(j)^2, j < "
           "k) / pairs. "
           "The limits of an independent series (memory.limits = \"independent\") are narrower and answer only whether "
           "one single lag "
           "differs from independence; the Ljung-Box map asks about several lags together.",
           "Bartlett (1946), Supplement to the Journal of the Royal Statistical Society 8, 27-41"},
    Method{"autoregression", "burg ar ar_model", "the model from which memory is computed",
           "Each cell's residual is described by an autoregression, fitted by Burg's method over the stretches without "
           "gaps, "
           "pooled. Its order is chosen by memory.order, 1 at least. Decorrelation time, effective sizes and the "
           "limits of the "
           "mean follow from the model, not from sums over a noisy sample autocorrelation.",
           // Both references are quoted from memory.
           "Burg (1975), thesis, Stanford University; de Waele and Broersen (2000), IEEE Transactions on Signal "
           "Processing 48, "
           "2876-2880 (segments)"},
    Method{"order_choice", "order bic aic aicc", "how many past steps the autoregression uses",
           "The order with the smallest criterion wins, among 1 to memory.max_order and as far as the record allows. "
           "bic keeps "
           "to few terms and serves estimates well; aicc and aic admit more terms.",
           // Quoted from memory.
           "Schwarz (1978), Annals of Statistics 6, 461-464 (bic); Hurvich and Tsai (1989), Biometrika 76, 297-307 "
           "(aicc); "
           "Akaike (1974), IEEE Transactions on Automatic Control 19, 716-723 (aic)"},
    Method{"bias_correction", "bias kendall", "why short records look forgetful, and what is done about it",
           "Fitted autoregressions of short records understate memory, and the more so the more terms (season, trend) "
           "were "
           "taken out. For orders 1 to 3 the bias to order 1/n, for exactly the terms that were fitted, is subtracted; "
           "models "
           "that would become non-stationary keep a bound and the status near_unit_root. From order 4 on nothing is "
           "corrected, "
           "and the summary counts those cells.",
           "Marriott and Pope (1954), Biometrika 41, 390-402; Kendall (1954), Biometrika 41, 403-404; Shaman and Stine "
           "(1988), "
           "Journal of the American Statistical Association 83, 842-848; the terms for season and trend are our own "
           "derivation, "
           "checked by simulation"},
    Method{"effective_size", "neff n_eff effective_sample_size_method", "how many independent values a record is worth",
           "m values with memory tell as much about the mean as n_eff independent ones: n_eff = m^2 / (m + 2 sum nu(k) "
           "rho(k)), "
           "nu(k) the number of valid pairs at lag k, rho the autocorrelation of the corrected model. For a variance "
           "rho(k)^2 "
           "stands in place of rho(k). A trend has an effective size of its own, from the first autocorrelation of the "
           "residual. All are kept between 2 and the number of values.",
           "Bayley and Hammersley (1946), Supplement to the Journal of the Royal Statistical Society 8, 184-197; Leith "
           "(1973), "
           "Journal of Applied Meteorology 12, 1066-1069; Santer et al. (2000), Journal of Geophysical Research 105, "
           "7337-7356 "
           "(trend)"},
    Method{"limits", "confidence delta_method", "limits of estimates",
           "Limits hold with memory.confidence. Those of the decorrelation time come from the delta method on its "
           "logarithm, so "
           "they are not symmetric; those of the mean and of the trend use Student's t with the effective sample size.",
           "delta method: common practice; mean: Zwiers and von Storch (1995), Journal of Climate 8, 336-351; trend: "
           "Santer et "
           "al. (2000), Journal of Geophysical Research 105, 7337-7356"},
    Method{"field_control", "bh by false_discovery_rate fdr stands standing", "testing many cells together",
           "Of many cells without any trend a share of alpha would still pass the test. bh adjusts the p-values so "
           "that among "
           "the trends that stand at most the share field.rate is expected to be false alarms, for cells that are "
           "independent "
           "or positively dependent; by holds under any dependence and is stricter. A trend stands if its own p is at "
           "most "
           "trend.alpha and its adjusted p at most field.rate. Cells tested are those with a p-value, and should be "
           "chosen "
           "beforehand: a map cut to where trends were seen says nothing.",
           "Benjamini and Hochberg (1995), Journal of the Royal Statistical Society B 57, 289-300; Benjamini and "
           "Yekutieli (2001), "
           "Annals of Statistics 29, 1165-1188; Wilks (2016), Bulletin of the American Meteorological Society 97, "
           "2263-2273"},
    Method{
        "year", "rates calendar", "what a year is",
        "Rates are per year of the calendar: 12 steps of a monthly axis, 365.2425 days in the standard calendar, 365 "
        "in "
        "noleap, 360 in 360_day. Lags of a calendar-month axis are counted in months, whatever their lengths in days.",
        "CF conventions 1.10, section 4.4.1 (calendars)"},
};

}  // namespace

std::span<const Method> methods() { return kMethods; }

}  // namespace lagscape
