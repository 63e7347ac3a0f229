// Every kernel against a slow oracle written from its formula, on random series with many patterns of gaps; then the
// laws: lanes do not know each other, instruction sets agree, and lags may be asked for in any portions.
#include "lagscape/stats/kernels.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <array>

#include "support/series.h"

namespace lagscape::test {
namespace {

constexpr std::size_t kSteps = 1100;  // more than two blocks of time of lag_products, and no multiple of anything
constexpr double kRounding = 1e-12;   // sums of ~1000 terms of order 1, in another order

/// Eight lanes: complete, random gaps, late start and early end, a long gap, nothing at all, constant, one value, every
/// third value.
std::vector<Series> varied_lanes(std::uint64_t seed, std::size_t steps = kSteps) {
  Draw draw(seed);
  std::vector<Series> lanes(kLanes);
  for (Series& lane : lanes) lane = draw.autoregression(steps, {0.7});
  lanes[1] = draw.with_gaps(lanes[1], 0.2);
  std::fill(lanes[2].begin(), lanes[2].begin() + 37, kNaN);
  std::fill(lanes[2].end() - 51, lanes[2].end(), kNaN);
  std::fill(lanes[3].begin() + 250, lanes[3].begin() + 550, kNaN);
  std::fill(lanes[4].begin(), lanes[4].end(), kNaN);
  std::fill(lanes[5].begin(), lanes[5].end(), 3.25);
  std::fill(lanes[6].begin(), lanes[6].end(), kNaN);
  lanes[6][17] = -2.5;
  for (std::size_t t = 0; t < steps; ++t) {
    if (t % 3 != 1) lanes[7][t] = kNaN;
  }
  return lanes;
}

bool has(const Series& x, std::size_t t) { return !std::isnan(x[t]); }

/// Values less their mean, 0 where missing, with rows of zeros after the last: what the kernels after the fit are
/// given.
struct Centred {
  std::vector<Series> lanes;
  AlignedVector<double> rows;
  std::vector<std::uint8_t> bits;

  explicit Centred(const std::vector<Series>& raw) : lanes(raw), bits(raw[0].size(), 0) {
    const std::size_t steps = raw[0].size();
    rows.assign((steps + kPadRows) * kLanes, 0.0);
    for (std::size_t lane = 0; lane < raw.size(); ++lane) {
      double sum = 0, count = 0;
      for (std::size_t t = 0; t < steps; ++t) {
        if (!has(raw[lane], t)) continue;
        sum += raw[lane][t];
        ++count;
      }
      for (std::size_t t = 0; t < steps; ++t) {
        const bool there = has(raw[lane], t);
        lanes[lane][t] = there ? raw[lane][t] - sum / count : 0.0;
        rows[t * kLanes + lane] = lanes[lane][t];
        if (there) bits[t] = static_cast<std::uint8_t>(bits[t] | 1U << lane);
      }
    }
  }
  [[nodiscard]] bool valid(std::size_t t, std::size_t lane) const { return (bits[t] >> lane & 1) != 0; }
};

class EachKernelTable : public ::testing::TestWithParam<const KernelTable*> {
 protected:
  const KernelTable& kernels = *GetParam();
};

INSTANTIATE_TEST_SUITE_P(Isa, EachKernelTable, ::testing::ValuesIn(all_kernels()),
                         [](const auto& table) { return std::string(table.param->isa); });

TEST_P(EachKernelTable, SummaryCountsValuesRangesAndGaps) {
  const auto lanes = varied_lanes(1);
  const auto tile = tile_of(lanes);
  std::vector<std::uint8_t> bits(kSteps);
  LaneSummary summary{};
  kernels.summarise(tile.data(), kSteps, bits.data(), &summary);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    SCOPED_TRACE(lane);
    double count = 0, sum = 0, gap = 0, longest = 0, first = INFINITY, last = -1, low = INFINITY, high = -INFINITY;
    for (std::size_t t = 0; t < kSteps; ++t) {
      const double x = lanes[lane][t];
      EXPECT_EQ(bits[t] >> lane & 1, has(lanes[lane], t) ? 1 : 0);
      if (std::isnan(x)) {
        ++gap;
        continue;
      }
      if (count == 0) first = static_cast<double>(t);
      if (count > 0) longest = std::max(longest, gap);
      gap = 0;
      last = static_cast<double>(t);
      ++count;
      sum += x;
      low = std::min(low, x);
      high = std::max(high, x);
    }
    EXPECT_EQ(summary.count[lane], count);
    EXPECT_TRUE(close(summary.sum[lane], sum, kRounding, kRounding));
    EXPECT_EQ(summary.low[lane], low);
    EXPECT_EQ(summary.high[lane], high);
    EXPECT_EQ(summary.first[lane], first);
    EXPECT_EQ(summary.last[lane], last);
    EXPECT_EQ(summary.longest_gap[lane], longest);
  }
}

TEST_P(EachKernelTable, TheValueThatMakesUpMoreThanHalfIsFoundAndCounted) {
  Draw draw(2);
  std::vector<Series> lanes(kLanes, Series(kSteps));
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    for (double& value : lanes[lane])
      value = draw.uniform() < 0.52 + 0.05 * static_cast<double>(lane) ? 0.0 : draw.normal();
    lanes[lane] = draw.with_gaps(lanes[lane], 0.1);
  }
  const auto tile = tile_of(lanes);
  std::vector<std::uint8_t> bits(kSteps);
  LaneSummary summary{};
  kernels.summarise(tile.data(), kSteps, bits.data(), &summary);
  alignas(64) double equal[kLanes];
  kernels.count_equal(tile.data(), kSteps, summary.candidate, equal);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    const auto zeros = std::count(lanes[lane].begin(), lanes[lane].end(), 0.0);
    ASSERT_GT(2 * static_cast<double>(zeros), summary.count[lane]);  // or the draw proves nothing
    EXPECT_EQ(summary.candidate[lane], 0.0);
    EXPECT_EQ(equal[lane], static_cast<double>(zeros));
  }
}

TEST_P(EachKernelTable, CentringLeavesDeviationsAndSumsByGroup) {
  const auto lanes = varied_lanes(3);
  const auto tile = tile_of(lanes);
  const Centred expected(lanes);
  const Design design(monthly_columns(kSteps, 0));
  AlignedVector<double> d(kSteps * kLanes), sums(12 * kLanes), counts(12 * kLanes);
  alignas(64) const double centre[kLanes] = {0.5, -1, 2, 0, 4, 3.25, 0, -0.1};
  kernels.center(tile.data(), expected.bits.data(), design.view(), centre, d.data(), sums.data(), counts.data());
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    std::array<double, 12> sum{}, count{};
    for (std::size_t t = 0; t < kSteps; ++t) {
      const double deviation = has(lanes[lane], t) ? lanes[lane][t] - centre[lane] : 0.0;
      EXPECT_EQ(d[t * kLanes + lane], deviation);
      sum[t % 12] += deviation;
      count[t % 12] += has(lanes[lane], t) ? 1 : 0;
    }
    for (std::size_t g = 0; g < 12; ++g) {
      EXPECT_TRUE(close(sums[g * kLanes + lane], sum[g], kRounding, kRounding));
      EXPECT_EQ(counts[g * kLanes + lane], count[g]);
    }
  }
}

TEST_P(EachKernelTable, ProjectionIsTheDotProductWithEachColumn) {
  const Centred series(varied_lanes(4));
  for (const int harmonics : {0, 1, 2, 3}) {  // 1, 3, 5 and 7 columns: four at a time and the rest
    const Design design(harmonic_columns(kSteps, harmonics, 365.25, 1));
    const DesignView view = design.view();
    AlignedVector<double> dots(view.dense * kLanes), sums(kLanes);
    kernels.project(series.rows.data(), view, dots.data(), sums.data());
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      for (std::size_t j = 0; j < view.dense; ++j) {
        double dot = 0;
        for (std::size_t t = 0; t < kSteps; ++t) dot += series.lanes[lane][t] * view.columns[j * kSteps + t];
        EXPECT_TRUE(close(dots[j * kLanes + lane], dot, kRounding, kRounding));
      }
      double sum = 0;
      for (const double value : series.lanes[lane]) sum += value;
      EXPECT_TRUE(close(sums[lane], sum, kRounding, 1e-10));
    }
  }
}

TEST_P(EachKernelTable, MissingRowsAreWhatGapsTakeFromTheNormalEquations) {
  const Centred series(varied_lanes(5));
  DesignColumns columns = harmonic_columns(kSteps, 2, 12, 2);
  columns.groups = 4;
  for (std::size_t t = 0; t < kSteps; ++t) columns.group[t] = static_cast<std::uint16_t>(t / 5 % 4);
  const Design design(columns);
  const DesignView view = design.view();
  AlignedVector<double> cross(view.dense * view.dense * kLanes), by_group(view.groups * view.dense * kLanes);
  kernels.missing_rows(series.bits.data(), view, cross.data(), by_group.data());
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    for (std::size_t i = 0; i < view.dense; ++i) {
      std::array<double, 4> groups{};
      for (std::size_t t = 0; t < kSteps; ++t) {
        if (!series.valid(t, lane)) groups[view.group[t]] += view.columns[i * kSteps + t];
      }
      for (std::size_t g = 0; g < view.groups; ++g) {
        EXPECT_TRUE(close(by_group[(g * view.dense + i) * kLanes + lane], groups[g], kRounding, kRounding));
      }
      for (std::size_t j = 0; j <= i; ++j) {
        double sum = 0;
        for (std::size_t t = 0; t < kSteps; ++t) {
          if (!series.valid(t, lane)) sum += view.columns[i * kSteps + t] * view.columns[j * kSteps + t];
        }
        EXPECT_TRUE(close(cross[(i * view.dense + j) * kLanes + lane], sum, kRounding, kRounding));
      }
    }
  }
}

TEST_P(EachKernelTable, SubtractingTheFitLeavesMissingStepsAtZero) {
  Centred series(varied_lanes(6));
  DesignColumns columns = harmonic_columns(kSteps, 1, 12, 1);
  columns.groups = 3;
  for (std::size_t t = 0; t < kSteps; ++t) columns.group[t] = static_cast<std::uint16_t>(t % 3);
  const Design design(columns);
  const DesignView view = design.view();
  Draw draw(7);
  AlignedVector<double> group_effect(view.groups * kLanes), effect(view.dense * kLanes);
  for (double& value : group_effect) value = draw.normal();
  for (double& value : effect) value = draw.normal();
  kernels.subtract_fit(series.rows.data(), series.bits.data(), view, group_effect.data(), effect.data());
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    for (std::size_t t = 0; t < kSteps; ++t) {
      double rest = series.lanes[lane][t] - group_effect[view.group[t] * kLanes + lane];
      for (std::size_t j = 0; j < view.dense; ++j) rest -= effect[j * kLanes + lane] * view.columns[j * kSteps + t];
      EXPECT_TRUE(close(series.rows[t * kLanes + lane], series.valid(t, lane) ? rest : 0.0, kRounding, kRounding));
    }
  }
}

TEST_P(EachKernelTable, ComponentSumsSplitTheFitIntoTrendAndRest) {
  const auto lanes = varied_lanes(8);
  const auto tile = tile_of(lanes);
  const Centred series(lanes);
  Draw draw(9);
  Series terms(2 * kSteps);
  for (double& value : terms) value = draw.normal();
  alignas(64) double mean[kLanes], coefficients[2 * kLanes], sums[4 * kLanes];
  for (double& value : mean) value = draw.normal();
  for (double& value : coefficients) value = draw.normal();
  AlignedVector<double> d(kSteps * kLanes);
  for (double& value : d) value = draw.normal();
  for (const std::size_t count : {0U, 1U, 2U}) {
    kernels.component_sums(tile.data(), d.data(), series.bits.data(), kSteps, mean, terms.data(), count, coefficients,
                           sums);
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      std::array<double, 4> expected{};
      for (std::size_t t = 0; t < kSteps; ++t) {
        if (!series.valid(t, lane)) continue;
        double trend = 0;
        for (std::size_t j = 0; j < count; ++j) trend += coefficients[j * kLanes + lane] * terms[j * kSteps + t];
        const double rest = lanes[lane][t] - mean[lane] - d[t * kLanes + lane] - trend;
        expected[0] += trend;
        expected[1] += trend * trend;
        expected[2] += rest;
        expected[3] += rest * rest;
      }
      for (std::size_t i = 0; i < 4; ++i) EXPECT_TRUE(close(sums[i * kLanes + lane], expected[i], 1e-11, 1e-11));
    }
  }
}

TEST_P(EachKernelTable, LagProductsAreSumsOverPairs) {
  const Centred series(varied_lanes(10));
  AlignedVector<double> sums(kSteps * kLanes);
  kernels.lag_products(series.rows.data(), kSteps, 0, kSteps, sums.data());
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    for (std::size_t lag = 0; lag < kSteps; ++lag) {
      double sum = 0;
      for (std::size_t t = 0; t + lag < kSteps; ++t) sum += series.lanes[lane][t] * series.lanes[lane][t + lag];
      EXPECT_TRUE(close(sums[lag * kLanes + lane], sum, kRounding, 1e-11)) << lag;
    }
  }
}

TEST_P(EachKernelTable, LagProductsDoNotDependOnHowLagsAreCutIntoCalls) {
  const Centred series(varied_lanes(11));
  constexpr std::size_t kLags = 200;
  AlignedVector<double> whole(kLags * kLanes), parts(kLags * kLanes);
  kernels.lag_products(series.rows.data(), kSteps, 0, kLags, whole.data());
  for (const std::size_t portion : {1U, 5U, 7U, 24U}) {
    for (std::size_t first = 0; first < kLags; first += portion) {
      kernels.lag_products(series.rows.data(), kSteps, first, std::min<std::size_t>(portion, kLags - first),
                           parts.data() + first * kLanes);
    }
    EXPECT_EQ(parts, whole) << "in portions of " << portion;
  }
}

/// Burg's partials over the stretches in which x[t - p] .. x[t] are all there; with the count of such t.
std::pair<Series, Series> slow_burg(const Centred& series, std::size_t lane, std::size_t orders) {
  const std::size_t steps = series.bits.size();
  Series forward = series.lanes[lane], backward = forward, partials, usable;
  for (std::size_t p = 1; p <= orders; ++p) {
    double product = 0, power = 0, count = 0;
    for (std::size_t t = p; t < steps; ++t) {
      bool whole = true;
      for (std::size_t j = 0; j <= p; ++j) whole = whole && series.valid(t - j, lane);
      if (!whole) continue;
      product += forward[t] * backward[t - 1];
      power += forward[t] * forward[t] + backward[t - 1] * backward[t - 1];
      ++count;
    }
    const double k = power > 0 ? 2 * product / power : 0;
    const Series f = forward, b = backward;
    for (std::size_t t = p; t < steps; ++t) {
      forward[t] = f[t] - k * b[t - 1];
      backward[t] = b[t - 1] - k * f[t];
    }
    partials.push_back(k);
    usable.push_back(count);
  }
  return {partials, usable};
}

/// Burg 1975 as the textbooks have it: errors of a complete series, no masks.
Series plain_burg(const Series& d, std::size_t orders) {
  Series forward(d.begin() + 1, d.end()), backward(d.begin(), d.end() - 1), partials;
  for (std::size_t p = 1; p <= orders; ++p) {
    double product = 0, power = 0;
    for (std::size_t i = 0; i < forward.size(); ++i) {
      product += forward[i] * backward[i];
      power += forward[i] * forward[i] + backward[i] * backward[i];
    }
    const double k = 2 * product / power;
    Series next_forward, next_backward;
    for (std::size_t i = 0; i < forward.size(); ++i) {
      if (i > 0) next_forward.push_back(forward[i] - k * backward[i]);
      if (i + 1 < forward.size()) next_backward.push_back(backward[i] - k * forward[i]);
    }
    forward = next_forward;
    backward = next_backward;
    partials.push_back(k);
  }
  return partials;
}

struct BurgResult {
  AlignedVector<double> partial, usable;
};

BurgResult run_burg(const KernelTable& kernels, const Centred& series, std::size_t orders) {
  const std::size_t steps = series.bits.size();
  BurgResult out{AlignedVector<double>(orders * kLanes), AlignedVector<double>(orders * kLanes)};
  AlignedVector<double> work(2 * steps * kLanes);
  std::vector<std::uint8_t> window(steps);
  kernels.burg(series.rows.data(), series.bits.data(), steps, orders, work.data(), window.data(), out.partial.data(),
               out.usable.data());
  return out;
}

TEST_P(EachKernelTable, BurgUsesGapFreeStretchesOnly) {
  for (const std::size_t orders : {1U, 2U, 9U, 10U}) {
    const Centred series(varied_lanes(12));
    const BurgResult found = run_burg(kernels, series, orders);
    for (std::size_t lane = 0; lane < kLanes; ++lane) {
      const auto [partials, usable] = slow_burg(series, lane, orders);
      for (std::size_t p = 0; p < orders; ++p) {
        EXPECT_TRUE(close(found.partial[p * kLanes + lane], partials[p], 1e-11, kRounding)) << lane << ' ' << p;
        EXPECT_EQ(found.usable[p * kLanes + lane], usable[p]) << lane << ' ' << p;
      }
    }
  }
}

TEST_P(EachKernelTable, BurgOnACompleteRecordIsTheTextbookRecursion) {
  const Centred series(varied_lanes(13));
  const Series partials = plain_burg(series.lanes[0], 12);
  const BurgResult found = run_burg(kernels, series, 12);
  for (std::size_t p = 0; p < 12; ++p) EXPECT_TRUE(close(found.partial[p * kLanes], partials[p], 1e-11, kRounding));
}

TEST_P(EachKernelTable, BurgOfAsManyOrdersAsStepsStaysFinite) {
  std::vector<Series> lanes(kLanes, Series{1, -2, 3, kNaN, 0.5});
  const BurgResult found = run_burg(kernels, Centred(lanes), 5);
  for (const double k : found.partial) EXPECT_TRUE(std::abs(k) <= 1) << k;
  EXPECT_EQ(found.usable[4 * kLanes], 0);
}

TEST_P(EachKernelTable, DurbinLevinsonSolvesTheYuleWalkerEquations) {
  // Partial k is the last unknown of the k x k system R f = r: solved here by elimination.
  constexpr std::size_t kLags = 12;
  Draw draw(14);
  AlignedVector<double> r((kLags + 1) * kLanes, 1.0), work(2 * (kLags + 1) * kLanes), partial((kLags + 1) * kLanes);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {  // sample autocorrelations: positive definite
    const Series x = draw.autoregression(60, {0.9, -0.2});
    double squares = 0;
    for (const double value : x) squares += value * value;
    for (std::size_t k = 1; k <= kLags; ++k) {
      double sum = 0;
      for (std::size_t t = 0; t + k < x.size(); ++t) sum += x[t] * x[t + k];
      r[k * kLanes + lane] = sum / squares;
    }
  }
  kernels.durbin_levinson(r.data(), kLags, work.data(), partial.data());
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    const auto rho = [&](std::size_t k) { return k == 0 ? 1.0 : r[k * kLanes + lane]; };
    for (std::size_t order = 1; order <= kLags; ++order) {
      std::vector<Series> a(order, Series(order + 1));
      for (std::size_t i = 0; i < order; ++i) {
        for (std::size_t j = 0; j < order; ++j) a[i][j] = rho(i > j ? i - j : j - i);
        a[i][order] = rho(i + 1);
      }
      for (std::size_t c = 0; c < order; ++c) {
        for (std::size_t i = c + 1; i < order; ++i) {
          const double factor = a[i][c] / a[c][c];
          for (std::size_t j = c; j <= order; ++j) a[i][j] -= factor * a[c][j];
        }
      }
      EXPECT_TRUE(close(partial[order * kLanes + lane], a[order - 1][order] / a[order - 1][order - 1], 1e-10, 1e-11));
    }
  }
}

TEST_P(EachKernelTable, DurbinLevinsonEndsAtTheFirstMissingLag) {
  constexpr std::size_t kLags = 6;
  AlignedVector<double> r((kLags + 1) * kLanes, 0.5), work(2 * (kLags + 1) * kLanes), partial((kLags + 1) * kLanes);
  r[3 * kLanes + 1] = kNaN;
  kernels.durbin_levinson(r.data(), kLags, work.data(), partial.data());
  for (std::size_t k = 1; k <= kLags; ++k) {
    EXPECT_EQ(std::isnan(partial[k * kLanes + 1]), k >= 3) << k;
    EXPECT_FALSE(std::isnan(partial[k * kLanes + 2])) << k;
  }
}

/// All numbers that the stages make of one lane of a tile, in a row.
Series everything_of(const KernelTable& kernels, const std::vector<Series>& lanes, std::size_t lane) {
  const std::size_t steps = lanes[0].size();
  constexpr std::size_t kLags = 40, kOrders = 10;
  const Design design(monthly_columns(steps, 2));
  const Prepared prepared = prepare(kernels, design, tile_of(lanes));
  AlignedVector<double> products(kLags * kLanes), work(2 * steps * kLanes), burg(kOrders * kLanes),
      usable(kOrders * kLanes), partial(kLags * kLanes), levinson_work(2 * kLags * kLanes), r(kLags * kLanes);
  std::vector<std::uint8_t> window(steps);
  kernels.lag_products(prepared.residual.data(), steps, 0, kLags, products.data());
  kernels.burg(prepared.residual.data(), prepared.bits.data(), steps, kOrders, work.data(), window.data(), burg.data(),
               usable.data());
  for (std::size_t i = 0; i < kLags * kLanes; ++i) r[i] = products[i] / products[i % kLanes];
  kernels.durbin_levinson(r.data(), kLags - 1, levinson_work.data(), partial.data());
  Series all = lane_of(prepared.residual, steps, lane);
  const LaneFit& fit = prepared.fit;
  const LaneSummary& summary = prepared.summary;
  for (const double* values :
       {summary.count, summary.sum, summary.low, summary.high, summary.longest_gap, fit.count, fit.mean, fit.slope,
        fit.slope_factor, fit.sum_squares, fit.total_squares, fit.share_trend, fit.share_season}) {
    all.push_back(values[lane]);
  }
  for (std::size_t k = 0; k < kLags; ++k) all.push_back(products[k * kLanes + lane]);
  for (std::size_t k = 1; k < kLags; ++k) all.push_back(partial[k * kLanes + lane]);
  for (std::size_t p = 0; p < kOrders; ++p) all.push_back(burg[p * kLanes + lane]);
  return all;
}

TEST_P(EachKernelTable, ALaneDoesNotKnowItsPlaceNorItsNeighbours) {
  Draw draw(15);
  const Series series = draw.with_gaps(draw.autoregression(600, {0.6}), 0.15);
  const Series alone = everything_of(kernels, {series}, 0);
  for (std::size_t lane = 0; lane < kLanes; ++lane) {
    std::vector<Series> lanes = varied_lanes(16 + lane, 600);
    lanes[lane] = series;
    EXPECT_EQ(everything_of(kernels, lanes, lane), alone) << "lane " << lane;
  }
}

TEST(KernelTables, Avx2AndAvx512GiveTheSameBits) {
  const KernelTable *avx2 = kernels_for(Isa::avx2), *avx512 = kernels_for(Isa::avx512);
  if (avx2 == nullptr || avx512 == nullptr) return;  // nothing to compare on this processor
  const auto lanes = varied_lanes(30);
  for (const std::size_t lane : {0U, 1U, 2U, 3U, 7U}) {
    EXPECT_EQ(everything_of(*avx2, lanes, lane), everything_of(*avx512, lanes, lane)) << lane;
  }
}

TEST(KernelTables, TheBaselineAgreesToRounding) {
  const auto lanes = varied_lanes(31);
  for (const std::size_t lane : {0U, 1U, 2U, 3U, 7U}) {
    const Series baseline = everything_of(*kernels_for(Isa::baseline), lanes, lane);
    const Series best = everything_of(best_kernels(), lanes, lane);
    ASSERT_EQ(baseline.size(), best.size());
    // Sums of 1000 products cancel: what counts is the size of their terms.
    for (std::size_t i = 0; i < best.size(); ++i)
      EXPECT_TRUE(close(baseline[i], best[i], 1e-12, 1e-11)) << lane << ' ' << i;
  }
}

TEST(KernelTables, TheBestOneIsTheLastThatThisProcessorHas) {
  EXPECT_EQ(&best_kernels(), all_kernels().back());
  EXPECT_NE(kernels_for(Isa::baseline), nullptr);
}

}  // namespace
}  // namespace lagscape::test
