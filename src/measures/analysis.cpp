#include "lagscape/measures/analysis.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "lagscape/stats/effective_size.h"
#include "lagscape/stats/lag_scan.h"
#include "lagscape/stats/pair_counts.h"
#include "measures/status.h"

namespace lagscape {
namespace {

/// Values needed beyond the parameters of the preparation.
constexpr double kSpareValues = 10;
/// Below this many pairs an autocorrelation is not estimated.
double fewest_pairs(double values) { return std::max(10.0, values / 10); }
constexpr double kGapShare = 0.2, kShortYears = 10, kTiedShare = 0.5;
constexpr std::size_t kLagChunk = 24;
constexpr double kDetectionPower = 0.9;

double constant_range(double low, double high) {
  constexpr double kEps = 2.2e-16;
  return 8 * kEps * std::max(std::abs(low), std::abs(high));
}

/// Removes from `x` what a filter removes; a value is missing where the filter lacks one.
void filter_tile(const AnalysisSettings& settings, const double* x, const LaneSummary& summary, std::size_t steps,
                 double* y) {
  const std::size_t length = settings.filter_length;
  if (settings.filter == Filter::difference) {
    std::fill_n(y, std::min(length, steps) * kLanes, kMissing);
    for (std::size_t i = length * kLanes; i < steps * kLanes; ++i) y[i] = x[i] - x[i - length * kLanes];
    return;
  }
  // Centred running mean; at least half of its window must be valid, and the window is never shortened at the ends.
  const std::size_t half = length / 2;
  std::fill_n(y, steps * kLanes, kMissing);
  for (std::size_t lane = 0; lane < kLanes && steps >= length; ++lane) {
    const double middle = summary.count[lane] > 0 ? summary.sum[lane] / summary.count[lane] : 0;
    double sum = 0;
    std::size_t valid = 0;
    const auto add = [&](std::size_t t, double sign) {
      const double value = x[t * kLanes + lane];
      if (std::isnan(value)) return;
      sum += sign * (value - middle);
      valid = sign > 0 ? valid + 1 : valid - 1;
    };
    for (std::size_t t = 0; t + 1 < length; ++t) add(t, 1);
    for (std::size_t t = half; t + half < steps; ++t) {
      add(t + half, 1);
      if (2 * valid >= length) y[t * kLanes + lane] = x[t * kLanes + lane] - middle - sum / static_cast<double>(valid);
      add(t - half, -1);
    }
  }
}

}  // namespace

AnalysisSettings::AnalysisSettings(const DesignColumns& prepare, const DesignColumns& trend, double confidence,
                                   double alpha)
    : prepare_design(prepare),
      trend_design(trend),
      normal_quantile(lagscape::normal_quantile(0.5 + confidence / 2)),
      limits_quantile(0.5 + confidence / 2),
      test_quantile(1 - alpha / 2) {}

struct Analysis::Impl {
  explicit Impl(const AnalysisSettings& chosen)
      : settings(chosen),
        kernels(best_kernels()),
        steps(chosen.prepare_design.steps()),
        lags(std::max(steps / 2 + 2, chosen.cube_lags) + kLagChunk),
        orders(std::min(static_cast<std::size_t>(chosen.max_order), steps / 10)),
        detection_quantile(lagscape::normal_quantile(kDetectionPower)),
        bits(steps),
        work_bits(steps),
        trend_bits(steps),
        window(steps),
        filtered(chosen.filter == Filter::none ? 0 : steps * kLanes),
        residual((steps + kPadRows) * kLanes),
        trend_residual(chosen.separate_trend_fit ? (steps + kPadRows) * kLanes : 0),
        burg_work(2 * steps * kLanes),
        products(lags * kLanes),
        correlation(lags * kLanes),
        limit(lags * kLanes),
        covariance(lags * kLanes),
        count(lags * kLanes),
        partial(chosen.want_partial ? lags * kLanes : 0),
        partial_work(chosen.want_partial ? 2 * (lags + 1) * kLanes : 0),
        partials(std::max<std::size_t>(1, orders) * kLanes),
        usable(std::max<std::size_t>(1, orders) * kLanes),
        prepare_scratch(chosen.prepare_design),
        trend_scratch(chosen.trend_design) {
    pairs.reserve(kLanes);
    for (std::size_t lane = 0; lane < kLanes; ++lane)
      pairs.emplace_back(steps);  // copies would lose their reserved room
  }

  const AnalysisSettings& settings;
  const KernelTable& kernels;
  const std::size_t steps, lags, orders;
  const double detection_quantile;
  std::vector<std::uint8_t> bits, work_bits, trend_bits, window;
  AlignedVector<double> filtered, residual, trend_residual, burg_work;
  AlignedVector<double> products, correlation, limit, covariance, count, partial, partial_work;
  AlignedVector<double> partials, usable;
  FitScratch prepare_scratch, trend_scratch;
  std::vector<PairCounts> pairs;
  std::array<CellResult, kLanes> results;
  LaneSummary raw{}, work{};
  LaneFit fit{}, trend_fit{};

  [[nodiscard]] static bool has(std::uint8_t lanes, std::size_t lane) noexcept { return (lanes >> lane & 1) != 0; }
  static void take(std::uint8_t& lanes, std::size_t lane) noexcept {
    lanes = static_cast<std::uint8_t>(lanes & ~(1U << lane));
  }
  void flag(std::size_t lane, std::int16_t bit) noexcept {
    results[lane].status = static_cast<std::int16_t>(results[lane].status | bit);
  }

  std::span<const CellResult> analyse(const double* tile, std::size_t cells) noexcept;
  std::uint8_t describe_record(const double* tile, std::size_t cells) noexcept;
  std::uint8_t prepare(const double* tile, std::uint8_t lanes) noexcept;
  void follow_lags(std::uint8_t lanes) noexcept;
  void fill_lags(std::size_t lane, std::size_t first, std::size_t end, double& squares) noexcept;
  void ljung_box(std::size_t lane) noexcept;
  void partial_cube(std::uint8_t lanes) noexcept;
  void fit_memory(std::size_t lane) noexcept;
  void mean_limits(std::size_t lane) noexcept;
  void trends(const double* tile, std::uint8_t lanes) noexcept;
  void judge_trend(std::size_t lane, const LaneFit& from, double lag1) noexcept;
};

std::span<const CellResult> Analysis::Impl::analyse(const double* tile, std::size_t cells) noexcept {
  std::uint8_t lanes = describe_record(tile, cells);
  if (lanes != 0) lanes = prepare(tile, lanes);
  if (lanes != 0) {
    kernels.burg(residual.data(), work_bits.data(), steps, orders, burg_work.data(), window.data(), partials.data(),
                 usable.data());
    for (std::size_t lane = 0; lane < cells; ++lane) {
      if (!has(lanes, lane)) continue;
      pairs[lane].start(work_bits.data(), lane, static_cast<std::size_t>(work.first[lane]),
                        static_cast<std::size_t>(work.last[lane]));
    }
    follow_lags(lanes);
    if (settings.want_partial) partial_cube(lanes);
    for (std::size_t lane = 0; lane < cells; ++lane) {
      if (!has(lanes, lane)) continue;
      ljung_box(lane);
      fit_memory(lane);
      if (settings.filter == Filter::none) mean_limits(lane);
    }
    trends(tile, lanes);
  }
  return {results.data(), cells};
}

/// What there is to work with, and which lanes can be analysed.
std::uint8_t Analysis::Impl::describe_record(const double* tile, std::size_t cells) noexcept {
  kernels.summarise(tile, steps, bits.data(), &raw);
  std::uint8_t lanes = 0;
  for (std::size_t lane = 0; lane < cells; ++lane) {
    CellResult& cell = results[lane];
    cell = CellResult{};
    cell.p_of_test.fill(kMissing);
    cell.valid_count = raw.count[lane];
    if (raw.count[lane] == 0) {
      flag(lane, kNoData);
      continue;
    }
    const double span = raw.last[lane] - raw.first[lane] + 1;
    cell.valid_share = raw.count[lane] / (settings.share_of_period ? static_cast<double>(steps) : span);
    cell.first_time = settings.step_times[static_cast<std::size_t>(raw.first[lane])];
    cell.last_time = settings.step_times[static_cast<std::size_t>(raw.last[lane])];
    cell.longest_gap = raw.longest_gap[lane] * settings.lag_units_per_step;
    if (1 - cell.valid_share > kGapShare) flag(lane, kManyGaps);
    if (span / settings.steps_per_year < kShortYears) flag(lane, kShortRecord);
    const double fewest = std::max(settings.min_count, static_cast<double>(kFewestValues));
    if (raw.count[lane] < fewest || cell.valid_share < settings.min_share) {
      flag(lane, kTooFew);
      continue;
    }
    if (raw.high[lane] - raw.low[lane] <= constant_range(raw.low[lane], raw.high[lane])) {
      flag(lane, kConstant);
      cell.mean = raw.low[lane];
      cell.slope = 0;
      cell.total = 0;
      continue;
    }
    lanes |= static_cast<std::uint8_t>(1U << lane);
  }
  if (lanes == 0) return lanes;
  alignas(64) double tied[kLanes];
  kernels.count_equal(tile, steps, raw.candidate, tied);
  for (std::size_t lane = 0; lane < cells; ++lane) {
    if (has(lanes, lane) && tied[lane] > kTiedShare * raw.count[lane]) flag(lane, kManyTies);
  }
  return lanes;
}

/// Filter, season and trend out; returns the lanes that still can be analysed.
std::uint8_t Analysis::Impl::prepare(const double* tile, std::uint8_t lanes) noexcept {
  const double* x = tile;
  work = raw;
  std::copy(bits.begin(), bits.end(), work_bits.begin());
  if (settings.filter != Filter::none) {
    filter_tile(settings, tile, raw, steps, filtered.data());
    kernels.summarise(filtered.data(), steps, work_bits.data(), &work);
    x = filtered.data();
  }
  for (std::size_t t = 0; t < steps; ++t) work_bits[t] &= lanes;
  fit = fit_lanes(kernels, settings.prepare_design, x, work_bits.data(), work, residual.data(), prepare_scratch);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    if (!has(lanes, lane)) continue;
    CellResult& cell = results[lane];
    cell.dropped_values = fit.dropped[lane];
    const double m = fit.count[lane];
    const double sd = std::sqrt(fit.sum_squares[lane] / std::max(1.0, m));
    const bool few =
        m < std::max({settings.min_count, static_cast<double>(kFewestValues), fit.parameters[lane] + kSpareValues});
    if (has(fit.incomplete, lane)) {
      flag(lane, kSeasonIncomplete);
    } else if (few) {
      flag(lane, kTooFew);
    } else if (sd <= constant_range(work.low[lane], work.high[lane])) {
      flag(lane, kConstant);  // nothing is left after preparation
    } else {
      cell.residual_sd = std::sqrt(fit.sum_squares[lane] / (m - fit.parameters[lane]));
      cell.share_season = fit.share_season[lane];
      cell.share_trend = fit.share_trend[lane];
      const bool all_used = settings.filter == Filter::none && fit.dropped[lane] == 0;
      cell.mean = all_used ? fit.mean[lane] : raw.sum[lane] / raw.count[lane];
      continue;
    }
    take(lanes, lane);
  }
  return lanes;
}

/// Autocorrelations lag by lag, in chunks, until the cubes and all definitions of all lanes have what they need (n/2 at
/// most).
void Analysis::Impl::follow_lags(std::uint8_t lanes) noexcept {
  std::array<LagScan, kLanes> scans{};
  std::array<double, kLanes> squares{};
  std::uint8_t scanning = lanes;
  for (std::size_t first = 0; first < lags && (scanning != 0 || first < settings.cube_lags); first += kLagChunk) {
    const std::size_t end = std::min({first + kLagChunk, lags, steps});
    if (first >= end) break;
    kernels.lag_products(residual.data(), steps, first, end - first, products.data() + first * kLanes);
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      if (!has(lanes, lane)) continue;
      fill_lags(lane, first, end, squares[lane]);
      const std::size_t farthest = pairs[lane].span() / 2;
      for (std::size_t lag = std::max<std::size_t>(1, first); lag < end && has(scanning, lane); ++lag) {
        const double r = correlation[lag * kLanes + lane];
        if (lag > farthest || std::isnan(r)) {
          take(scanning, lane);
          break;
        }
        scans[lane].feed(r, limit[lag * kLanes + lane]);
        if (scans[lane].complete()) take(scanning, lane);
      }
    }
  }
  const double unit = settings.lag_units_per_step;
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    if (!has(lanes, lane)) continue;
    CellResult& cell = results[lane];
    const LagScan& scan = scans[lane];
    cell.lag1 = correlation[kLanes + lane];
    cell.e_folding = scan.e_folding() * unit;
    cell.zero_crossing = scan.zero_crossing() * unit;
    if (!std::isnan(cell.lag1)) {  // sums over no lag at all would look like estimates
      cell.integral = scan.integral() / 2 * unit;
      cell.geyer = scan.geyer_monotone() * unit;
      cell.sokal = scan.sokal() * unit;
    }
    if (scan.first_inside_limits() > 0)
      cell.first_inside_limits = static_cast<double>(scan.first_inside_limits()) * unit;
    if (!scan.complete()) flag(lane, kBeyondLagRange);
    if (settings.cube_lags > 0) {
      const auto column = [&](const AlignedVector<double>& of) {
        return LagColumn{of.data() + lane, settings.cube_lags};
      };
      cell.autocorrelation = column(correlation);
      cell.autocorrelation_limit = column(limit);
      cell.autocovariance = column(covariance);
      cell.pair_count = column(count);
      if (settings.want_partial) cell.partial_autocorrelation = column(partial);
    }
  }
}

/// r(k), its limit, c(k) and the pair count for lags first .. end - 1 of a lane. squares: running sum of r(j)^2, j
/// >= 1.
void Analysis::Impl::fill_lags(std::size_t lane, std::size_t first, std::size_t end, double& squares) noexcept {
  const double m = fit.count[lane], variance = fit.sum_squares[lane] / m;
  const double fewest = fewest_pairs(m);
  const bool gaps = m < static_cast<double>(pairs[lane].span());
  for (std::size_t lag = first; lag < end; ++lag) {
    const std::size_t at = lag * kLanes + lane;
    const double found = pairs[lane].at(lag);
    count[at] = found;
    if (found < fewest) {
      correlation[at] = limit[at] = covariance[at] = kMissing;
      continue;
    }
    covariance[at] = products[at] / (found + static_cast<double>(lag));
    const double r = lag == 0 ? 1.0 : covariance[at] / variance;
    correlation[at] = r;
    if (lag == 0) {
      limit[at] = kMissing;
      continue;
    }
    limit[at] = settings.normal_quantile *
                (settings.bartlett_limits ? std::sqrt((1 + 2 * squares) / (gaps ? found : m)) : 1 / std::sqrt(m));
    squares += r * r;
  }
}

/// Q = m (m + 2) sum r(k)^2 / nu_k over h = min(10, m/5) lags, against chi-squared with h degrees. [Ljung & Box 1978]
void Analysis::Impl::ljung_box(std::size_t lane) noexcept {
  const double m = fit.count[lane];
  const auto most = static_cast<std::size_t>(std::min(10.0, std::floor(m / 5)));
  double sum = 0;
  std::size_t used = 0;
  for (std::size_t lag = 1; lag <= most; ++lag) {
    const double r = correlation[lag * kLanes + lane];
    if (std::isnan(r)) break;
    sum += r * r / count[lag * kLanes + lane];
    ++used;
  }
  if (used > 0) results[lane].ljung_box_p = chi_squared_tail(m * (m + 2) * sum, static_cast<double>(used));
}

/// Durbin-Levinson on the biased autocorrelations. Gaps can make those impossible as a whole (a partial of magnitude 1
/// or more): then on S_k/S_0, which is always possible.
void Analysis::Impl::partial_cube(std::uint8_t lanes) noexcept {
  const std::size_t last = settings.cube_lags - 1;
  kernels.durbin_levinson(correlation.data(), last, partial_work.data(), partial.data());
  std::uint8_t impossible = 0;
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    partial[lane] = kMissing;  // lag 0
    for (std::size_t lag = 1; lag <= last && has(lanes, lane); ++lag) {
      const double value = partial[lag * kLanes + lane];
      if (std::isnan(value)) break;
      if (std::abs(value) >= 1) {
        impossible |= static_cast<std::uint8_t>(1U << lane);
        break;
      }
    }
  }
  if (impossible == 0) return;
  double* const replaced = burg_work.data();  // free by now; there are fewer lags than steps
  double* const again = burg_work.data() + steps * kLanes;
  for (std::size_t lag = 0; lag <= last; ++lag) {
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      const std::size_t at = lag * kLanes + lane;
      replaced[at] = std::isnan(correlation[at]) ? kMissing : products[at] / fit.sum_squares[lane];
    }
  }
  kernels.durbin_levinson(replaced, last, partial_work.data(), again);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    if (!has(impossible, lane)) continue;
    for (std::size_t lag = 1; lag <= last; ++lag) partial[lag * kLanes + lane] = again[lag * kLanes + lane];
  }
}

/// The autoregression, the decorrelation time with its limits, and the effective sizes.
void Analysis::Impl::fit_memory(std::size_t lane) noexcept {
  CellResult& cell = results[lane];
  const double m = fit.count[lane], unit = settings.lag_units_per_step;
  const auto n = static_cast<double>(pairs[lane].span());
  const auto& frequencies = settings.prepare_design.frequencies();

  if (!std::isnan(cell.lag1)) {
    const double first[] = {cell.lag1};
    const ArModel lag1 = bias_corrected(model_from_coefficients(first), m, frequencies);
    cell.lag1_corrected = lag1.coefficient[0];
    cell.ar1_time = (1 + cell.lag1_corrected) / (1 - cell.lag1_corrected) * unit;
    if (lag1.near_unit_root) flag(lane, kNearUnitRoot);
  }

  std::array<double, kMaxOrder> k{}, terms{};
  for (std::size_t p = 0; p < orders; ++p) {
    k[p] = partials[p * kLanes + lane];
    terms[p] = usable[p * kLanes + lane];
  }
  const int largest = largest_order({terms.data(), orders}, m, settings.max_order);
  const OrderChoice choice{settings.criterion, settings.fixed_order, m, fit.parameters[lane]};
  const int order = choose_order({k.data(), orders}, largest, choice);
  if (order == 0) {
    flag(lane, kManyGaps);  // not even the first order has enough gap-free terms
    return;
  }
  const auto p = static_cast<std::size_t>(order);
  const ArModel model = bias_corrected(model_from_partials({k.data(), p}), m, frequencies);
  if (model.near_unit_root) flag(lane, kNearUnitRoot);
  cell.order = order;
  cell.order_uncorrected = order > 3;
  cell.coefficients = model.coefficient;
  cell.innovation_sd = cell.residual_sd * std::sqrt(model.innovation_share());

  const double raw_time = model.decorrelation_time();
  const double time = std::clamp(raw_time, 1 / n, n / 2);
  if (time != raw_time) flag(lane, kBeyondLagRange);
  const double error = log_time_error(model, terms[p - 1]);
  const double factor = std::isnan(error) ? n * n : std::exp(settings.normal_quantile * error);
  cell.time = time * unit;
  cell.time_low = std::max(time / factor, 1 / n) * unit;
  cell.time_high = std::min(time * factor, n) * unit;
  if (settings.filter != Filter::none) return;  // a filtered series says nothing on the mean of the raw one
  const EffectiveSizes sizes = effective_sizes(model, pairs[lane], m);
  cell.effective_size = sizes.mean;
  cell.effective_size_variance = sizes.variance;
}

/// xbar +- t_{n_eff - 1} sqrt(s^2 / (n_eff - 1)), s^2 = SSE/m (m - 1)/(m - q): the mean square of the noise, with the
/// degrees of freedom of season and trend given back.
void Analysis::Impl::mean_limits(std::size_t lane) noexcept {
  CellResult& cell = results[lane];
  constexpr double kFewestIndependent = 10;  // with fewer, limits by Student's t are too narrow to be shown
  if (!(cell.effective_size >= kFewestIndependent)) return;
  const double m = fit.count[lane], degrees = cell.effective_size - 1;
  const double square = fit.sum_squares[lane] / m * (m - 1) / (m - fit.parameters[lane]);
  const double half_width = settings.limits_quantile(degrees) * std::sqrt(square / degrees);
  cell.mean_low = cell.mean - half_width;
  cell.mean_high = cell.mean + half_width;
}

/// The trend, from the joint fit of mean, season and straight line to the unfiltered series.
void Analysis::Impl::trends(const double* tile, std::uint8_t lanes) noexcept {
  const bool separate = settings.separate_trend_fit;
  if (separate) {
    for (std::size_t t = 0; t < steps; ++t) trend_bits[t] = bits[t] & lanes;
    trend_fit =
        fit_lanes(kernels, settings.trend_design, tile, trend_bits.data(), raw, trend_residual.data(), trend_scratch);
    alignas(64) double lagged[kLanes];
    kernels.lag_products(trend_residual.data(), steps, 1, 1, lagged);
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      if (!has(lanes, lane)) continue;
      if (has(trend_fit.incomplete, lane)) {
        flag(lane, kSeasonIncomplete);
        continue;
      }
      pairs[lane].start(trend_bits.data(), lane, static_cast<std::size_t>(raw.first[lane]),
                        static_cast<std::size_t>(raw.last[lane]));
      const double variance = trend_fit.sum_squares[lane] / trend_fit.count[lane];
      const double found = pairs[lane].at(1);
      judge_trend(lane, trend_fit,
                  found < fewest_pairs(trend_fit.count[lane]) ? kMissing : lagged[lane] / (found + 1) / variance);
    }
    return;
  }
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    if (has(lanes, lane)) judge_trend(lane, fit, results[lane].lag1);
  }
}

void Analysis::Impl::judge_trend(std::size_t lane, const LaneFit& from, double lag1) noexcept {
  CellResult& cell = results[lane];
  const double m = from.count[lane], rate = settings.steps_per_rate;
  if (m < from.parameters[lane] + 3) return;
  cell.slope = from.slope[lane] * rate;
  cell.total = from.slope[lane] * (raw.last[lane] - raw.first[lane]);
  const double first[] = {lag1};
  const ArModel corrected = bias_corrected(model_from_coefficients(first), m, settings.trend_design.frequencies());
  if (std::isnan(lag1)) return;
  const TrendInput input{
      .slope = from.slope[lane],
      .slope_factor = from.slope_factor[lane],
      .sum_squares = from.sum_squares[lane],
      .values = m,
      .parameters = from.parameters[lane],
      .effective_size =
          effective_size_for_trend(corrected.coefficient[0], pairs[lane], m, static_cast<double>(pairs[lane].span())),
      .quantile = &settings.limits_quantile,
  };
  cell.effective_size_trend = input.effective_size;
  const std::span<const TrendTest> tests = trend_tests();
  for (std::size_t i = 0; i < tests.size(); ++i) {
    const TrendVerdict verdict = tests[i].verdict(input);
    cell.p_of_test[i] = verdict.p;
    if (tests[i].name == "ols") cell.p_independent = verdict.p;
    if (&tests[i] == settings.tests.front()) {
      cell.p = verdict.p;
      const double half_width = verdict.half_width * rate;
      if (half_width <
          static_cast<double>(std::numeric_limits<float>::max())) {  // hardly any degrees of freedom: no limits
        cell.slope_low = cell.slope - half_width;
        cell.slope_high = cell.slope + half_width;
      }
    }
    if (tests[i].name == "ols-neff") {
      if (std::isnan(verdict.standard_error)) flag(lane, kNearUnitRoot);
      const double needed = settings.test_quantile(input.effective_size - 2) + detection_quantile;
      cell.detectable = needed * verdict.standard_error * rate;
    }
  }
  if (settings.target) {
    // The standard error of a slope falls with (length)^(3/2). [Tiao et al. 1990; Weatherhead et al. 1998]
    const double years = (raw.last[lane] - raw.first[lane] + 1) / settings.steps_per_year;
    cell.years_to_detect = years * std::pow(cell.detectable / *settings.target, 2.0 / 3.0);
  }
}

Analysis::Analysis(const AnalysisSettings& settings) : impl_(std::make_unique<Impl>(settings)) {}
Analysis::~Analysis() = default;
Analysis::Analysis(Analysis&&) noexcept = default;
std::span<const CellResult> Analysis::analyse(const double* tile, std::size_t cells) noexcept {
  return impl_->analyse(tile, cells);
}

}  // namespace lagscape
