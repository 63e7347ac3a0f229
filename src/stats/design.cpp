#include "lagscape/stats/design.h"

#include <algorithm>
#include <cmath>

namespace lagscape {
namespace {

/// A pivot this much smaller than its column's own length means that the gaps have made columns dependent.
constexpr double kDependent = 1e-8;

double dot(const double* a, const double* b, std::size_t steps) {
  double sum = 0;
  for (std::size_t t = 0; t < steps; ++t) sum += a[t] * b[t];
  return sum;
}

}  // namespace

Design::Design(const DesignColumns& in) : group_(in.group), groups_(in.groups), frequencies_(in.frequencies) {
  const std::size_t n = in.steps;
  std::vector<double> group_steps(groups_, 0.0);
  for (const std::uint16_t g : group_) group_steps[g] += 1;

  std::vector<std::vector<double>> raw = in.season;
  const auto degree = static_cast<std::size_t>(in.trend_degree);
  const double middle = (static_cast<double>(n) - 1) / 2;
  const double mean_square = (static_cast<double>(n) * static_cast<double>(n) - 1) / 12;  // of t - middle
  for (std::size_t j = 0; j < degree; ++j) {
    std::vector<double>& column = raw.emplace_back(n);
    for (std::size_t t = 0; t < n; ++t) {
      const double from_middle = static_cast<double>(t) - middle;
      column[t] = j == 0 ? from_middle : from_middle * from_middle - mean_square;
    }
    trend_terms_.insert(trend_terms_.end(), column.begin(), column.end());
  }

  triangle_.assign(degree * degree, 0.0);
  for (std::size_t source = 0; source < raw.size(); ++source) {
    std::vector<double>& column = raw[source];
    std::vector<double> means(groups_, 0.0);
    for (std::size_t t = 0; t < n; ++t) means[group_[t]] += column[t];
    for (std::size_t t = 0; t < n; ++t) column[t] -= means[group_[t]] / group_steps[group_[t]];
    // A sine at the Nyquist frequency is nothing but rounding: columns are of order one or larger.
    const double length = std::sqrt(std::max(dot(column.data(), column.data(), n), static_cast<double>(n)));
    const bool trend = source >= in.season.size();
    const std::size_t trend_index = trend ? source - in.season.size() : 0;
    for (int pass = 0; pass < 2; ++pass) {  // twice is enough: columns are then orthogonal to rounding
      for (std::size_t j = 0; j < dense_; ++j) {
        const double* earlier = columns_.data() + j * n;
        const double along = dot(earlier, column.data(), n);
        for (std::size_t t = 0; t < n; ++t) column[t] -= along * earlier[t];
        if (trend && j + trend_columns_ >= dense_)
          triangle_[(j + trend_columns_ - dense_) * degree + trend_index] += along;
      }
    }
    const double rest = std::sqrt(dot(column.data(), column.data(), n));
    if (!(rest > kDependent * length)) continue;
    if (trend) triangle_[trend_columns_ * degree + trend_index] = rest;
    for (double& value : column) value /= rest;
    columns_.insert(columns_.end(), column.begin(), column.end());
    ++dense_;
    if (trend) ++trend_columns_;
  }
}

FitScratch::FitScratch(const Design& design)
    : group_sums(design.groups() * kLanes),
      group_counts(design.groups() * kLanes),
      group_columns(design.groups() * design.dense() * kLanes),
      cross(design.dense() * design.dense() * kLanes),
      factor(design.dense() * design.dense() * kLanes),
      dots(design.dense() * kLanes),
      effect(design.dense() * kLanes),
      group_effect(design.groups() * kLanes) {}

/// The normal equations of a tile: season means eliminated, dense columns by Cholesky. Plain loops over lanes, which
/// compilers turn into vector code; sizes are small against the passes over time.
struct FitSolver {
  const Design& design;
  FitScratch& s;

  /// Factor of (complete design - missing rows). Marks lanes whose columns the gaps have made dependent.
  std::uint8_t factorise() const noexcept {
    const std::size_t k = design.dense();
    std::uint8_t dependent = 0;
    for (std::size_t i = 0; i < k; ++i) {
      for (std::size_t j = 0; j <= i; ++j) {
        double* out = s.factor.data() + (i * k + j) * kLanes;
        const double* missing = s.cross.data() + (i * k + j) * kLanes;
        for (std::size_t lane = 0; lane < kLanes; ++lane) out[lane] = (i == j ? 1.0 : 0.0) - missing[lane];
        for (std::size_t g = 0; g < design.groups(); ++g) {
          const double* a = s.group_columns.data() + (g * k + i) * kLanes;
          const double* b = s.group_columns.data() + (g * k + j) * kLanes;
          const double* count = s.group_counts.data() + g * kLanes;
          for (std::size_t lane = 0; lane < kLanes; ++lane)
            out[lane] -= count[lane] > 0 ? a[lane] * b[lane] / count[lane] : 0.0;
        }
      }
    }
    for (std::size_t i = 0; i < k; ++i) {
      for (std::size_t j = 0; j <= i; ++j) {
        double* cell = s.factor.data() + (i * k + j) * kLanes;
        for (std::size_t lane = 0; lane < kLanes; ++lane) {
          const double own = cell[lane];
          double value = own;
          for (std::size_t c = 0; c < j; ++c) {
            value -= s.factor[(i * k + c) * kLanes + lane] * s.factor[(j * k + c) * kLanes + lane];
          }
          if (i == j) {
            const bool good = value > kDependent * own && own > kDependent * kDependent;
            if (!good) dependent |= static_cast<std::uint8_t>(1U << lane);
            cell[lane] = good ? std::sqrt(value) : 1.0;
          } else {
            cell[lane] = value / s.factor[(j * k + j) * kLanes + lane];
          }
        }
      }
    }
    return dependent;
  }

  /// Effects from `dots` and `group_sums` of what is left to fit.
  void solve() const noexcept {
    const std::size_t k = design.dense();
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      // Columns have mean zero in each complete group, so their sum over a group's valid steps is minus that over the
      // missing.
      for (std::size_t i = 0; i < k; ++i) {
        double right = s.dots[i * kLanes + lane];
        for (std::size_t g = 0; g < design.groups(); ++g) {
          const double count = s.group_counts[g * kLanes + lane];
          if (count > 0)
            right += s.group_columns[(g * k + i) * kLanes + lane] * s.group_sums[g * kLanes + lane] / count;
        }
        for (std::size_t c = 0; c < i; ++c)
          right -= s.factor[(i * k + c) * kLanes + lane] * s.effect[c * kLanes + lane];
        s.effect[i * kLanes + lane] = right / s.factor[(i * k + i) * kLanes + lane];
      }
      for (std::size_t i = k; i-- > 0;) {
        double value = s.effect[i * kLanes + lane];
        for (std::size_t c = i + 1; c < k; ++c)
          value -= s.factor[(c * k + i) * kLanes + lane] * s.effect[c * kLanes + lane];
        s.effect[i * kLanes + lane] = value / s.factor[(i * k + i) * kLanes + lane];
      }
      for (std::size_t g = 0; g < design.groups(); ++g) {
        const double count = s.group_counts[g * kLanes + lane];
        double sum = s.group_sums[g * kLanes + lane];
        for (std::size_t i = 0; i < k; ++i)
          sum += s.group_columns[(g * k + i) * kLanes + lane] * s.effect[i * kLanes + lane];
        s.group_effect[g * kLanes + lane] = count > 0 ? sum / count : 0.0;
      }
    }
  }

  /// Trend coefficients per step from the effects of the orthonormal columns, added to `out` (trend_columns lane
  /// arrays).
  void add_trend(double (&out)[2][kLanes]) const noexcept {
    const std::size_t terms = design.trend_columns(), before = design.dense() - terms;
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      double raw[2] = {0, 0};
      for (std::size_t row = terms; row-- > 0;) {
        raw[row] = s.effect[(before + row) * kLanes + lane];
        for (std::size_t col = row + 1; col < terms; ++col) raw[row] -= design.triangle(row, col) * raw[col];
        raw[row] /= design.triangle(row, row);
        out[row][lane] += raw[row];
      }
    }
  }
};

namespace {

/// Clears the bits of seasons that hold a single value; counts them.
void drop_single_seasons(const Design& design, std::uint8_t* bits, const AlignedVector<double>& counts, LaneFit& fit) {
  for (std::size_t g = 0; g < design.groups(); ++g) {
    std::uint8_t single = 0;
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      if (counts[g * kLanes + lane] == 1) {
        single |= static_cast<std::uint8_t>(1U << lane);
        fit.dropped[lane] += 1;
      }
    }
    if (single == 0) continue;
    const DesignView view = design.view();
    for (std::size_t t = 0; t < view.steps; ++t) {
      if (view.group[t] == g) bits[t] = static_cast<std::uint8_t>(bits[t] & ~single);
    }
  }
}

/// Shares of variance: the trend's own, and the rest of the fit, which is the season's.
void variance_shares(const KernelTable& kernels, const Design& design, const double* x, const std::uint8_t* bits,
                     const double* d, const double (&trend)[2][kLanes], LaneFit& fit) {
  alignas(64) double sums[4][kLanes];
  kernels.component_sums(x, d, bits, design.steps(), fit.mean, design.trend_terms(), design.trend_columns(), trend[0],
                         sums[0]);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    const double m = fit.count[lane], total = fit.total_squares[lane];
    if (!(total > 0)) continue;
    fit.share_trend[lane] = std::max(0.0, sums[1][lane] - sums[0][lane] * sums[0][lane] / m) / total;
    fit.share_season[lane] = std::max(0.0, sums[3][lane] - sums[2][lane] * sums[2][lane] / m) / total;
  }
}

}  // namespace

LaneFit fit_lanes(const KernelTable& kernels, const Design& design, const double* x, std::uint8_t* bits,
                  const LaneSummary& summary, double* d, FitScratch& s) noexcept {
  const DesignView view = design.view();
  LaneFit fit{};
  alignas(64) double centre[kLanes], sum[kLanes];
  for (std::size_t lane = 0; lane < kLanes; ++lane)
    centre[lane] = summary.count[lane] > 0 ? summary.sum[lane] / summary.count[lane] : 0;
  const auto center = [&] {
    kernels.center(x, bits, view, centre, d, s.group_sums.data(), s.group_counts.data());
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      fit.count[lane] = sum[lane] = 0;
      for (std::size_t g = 0; g < view.groups; ++g) {
        fit.count[lane] += s.group_counts[g * kLanes + lane];
        sum[lane] += s.group_sums[g * kLanes + lane];
      }
    }
  };
  center();
  if (view.groups > 1) {
    drop_single_seasons(design, bits, s.group_counts, fit);
    if (std::any_of(fit.dropped, fit.dropped + kLanes, [](double count) { return count > 0; })) center();
  }
  // A second centring takes off the rounding of the first mean: the sums that follow are of small numbers.
  for (std::size_t lane = 0; lane < kLanes; ++lane)
    centre[lane] += fit.count[lane] > 0 ? sum[lane] / fit.count[lane] : 0;
  center();
  alignas(64) double trend[2][kLanes] = {};
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    fit.mean[lane] = centre[lane];
    std::size_t seasons = 0;
    for (std::size_t g = 0; g < view.groups; ++g)
      seasons += static_cast<std::size_t>(s.group_counts[g * kLanes + lane] > 0);
    fit.parameters[lane] = static_cast<double>(seasons + view.dense);
    if (view.groups > 1 && seasons < 2) fit.incomplete |= static_cast<std::uint8_t>(1U << lane);
  }
  kernels.lag_products(d, view.steps, 0, 1, fit.total_squares);
  kernels.missing_rows(bits, view, s.cross.data(), s.group_columns.data());
  const FitSolver solver{design, s};
  fit.incomplete |= solver.factorise();
  for (int pass = 0; pass < 2; ++pass) {  // the second pass refines: it fits what rounding left in the residuals
    kernels.project(d, view, s.dots.data(), s.group_sums.data());
    solver.solve();
    solver.add_trend(trend);
    kernels.subtract_fit(d, bits, view, s.group_effect.data(), s.effect.data());
  }
  kernels.lag_products(d, view.steps, 0, 1, fit.sum_squares);
  if (design.trend_columns() > 0) {
    const std::size_t last = view.dense - 1;
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      fit.slope[lane] = trend[0][lane];
      const double pivot = s.factor[(last * view.dense + last) * kLanes + lane];
      const double length = design.triangle(design.trend_columns() - 1, design.trend_columns() - 1);
      fit.slope_factor[lane] = 1 / (pivot * pivot * length * length);
    }
  }
  variance_shares(kernels, design, x, bits, d, trend, fit);
  return fit;
}

}  // namespace lagscape
