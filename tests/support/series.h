#pragma once
#include <gtest/gtest.h>

#include <cmath>
#include <cstdint>
#include <limits>
#include <numbers>
#include <random>
#include <string>
#include <vector>

#include "lagscape/base/aligned_buffer.h"
#include "lagscape/stats/design.h"
#include "lagscape/stats/kernels.h"

// Series to test with, and the way into and out of tiles. All inline: only the programs that use it link the kernels.
namespace lagscape::test {

inline constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
using Series = std::vector<double>;

/// The kernels that this processor can run; the best one comes last.
inline std::vector<const KernelTable*> all_kernels() {
  std::vector<const KernelTable*> tables;
  for (const Isa isa : {Isa::baseline, Isa::avx2, Isa::avx512}) {
    if (const KernelTable* table = kernels_for(isa)) tables.push_back(table);
  }
  return tables;
}

/// A raw tile; lanes that are not given hold no values.
inline AlignedVector<double> tile_of(const std::vector<Series>& lanes) {
  const std::size_t steps = lanes.at(0).size();
  AlignedVector<double> tile(steps * kLanes, kNaN);
  for (std::size_t lane = 0; lane < lanes.size(); ++lane) {
    for (std::size_t t = 0; t < steps; ++t) tile[t * kLanes + lane] = lanes[lane].at(t);
  }
  return tile;
}

inline Series lane_of(const AlignedVector<double>& rows, std::size_t steps, std::size_t lane) {
  Series values(steps);
  for (std::size_t t = 0; t < steps; ++t) values[t] = rows[t * kLanes + lane];
  return values;
}

/// Random numbers that are the same on every system (std::normal_distribution is not).
class Draw {
 public:
  explicit Draw(std::uint64_t seed) : engine_(seed) {}
  double uniform() { return (static_cast<double>(engine_() >> 11) + 0.5) * 0x1p-53; }
  double normal() {
    const double radius = std::sqrt(-2 * std::log(uniform()));
    return radius * std::cos(2 * std::numbers::pi * uniform());
  }
  /// A stationary AR(p): the first 1000 values are thrown away.
  Series autoregression(std::size_t steps, const std::vector<double>& coefficients) {
    Series x(steps + 1000);
    for (std::size_t t = 0; t < x.size(); ++t) {
      x[t] = normal();
      for (std::size_t j = 0; j < coefficients.size() && j < t; ++j) x[t] += coefficients[j] * x[t - 1 - j];
    }
    return {x.begin() + 1000, x.end()};
  }
  /// Each value goes missing with this chance.
  Series with_gaps(Series x, double share) {
    for (double& value : x) {
      if (uniform() < share) value = kNaN;
    }
    return x;
  }

 private:
  std::mt19937_64 engine_;
};

/// Mean only, or mean and straight line.
inline DesignColumns plain_columns(std::size_t steps, int trend_degree = 0) {
  DesignColumns columns;
  columns.steps = steps;
  columns.group.assign(steps, 0);
  columns.trend_degree = trend_degree;
  if (trend_degree > 0) columns.frequencies.push_back({0.0, trend_degree});
  return columns;
}

/// Twelve months, the first step being January, and a trend.
inline DesignColumns monthly_columns(std::size_t steps, int trend_degree) {
  DesignColumns columns = plain_columns(steps, trend_degree);
  columns.groups = 12;
  for (std::size_t t = 0; t < steps; ++t) columns.group[t] = static_cast<std::uint16_t>(t % 12);
  for (int h = 1; h <= 5; ++h) columns.frequencies.push_back({2 * std::numbers::pi * h / 12, 2});
  columns.frequencies.push_back({std::numbers::pi, 1});
  return columns;
}

/// Cosine and sine of 2 pi h t / period, h = 1 .. harmonics, and a trend.
inline DesignColumns harmonic_columns(std::size_t steps, int harmonics, double period, int trend_degree) {
  DesignColumns columns = plain_columns(steps, trend_degree);
  for (int h = 1; h <= harmonics; ++h) {
    const double omega = 2 * std::numbers::pi * h / period;
    std::vector<double> cosine(steps), sine(steps);
    for (std::size_t t = 0; t < steps; ++t) {
      cosine[t] = std::cos(omega * static_cast<double>(t));
      sine[t] = std::sin(omega * static_cast<double>(t));
    }
    columns.season.push_back(cosine);
    columns.season.push_back(sine);
    columns.frequencies.push_back({omega, 2});
  }
  return columns;
}

/// What the first stages make of a tile.
struct Prepared {
  LaneSummary summary{};
  LaneFit fit{};
  std::vector<std::uint8_t> bits;
  AlignedVector<double> residual;  ///< with the rows of zeros that kernels may read
};

inline Prepared prepare(const KernelTable& kernels, const Design& design, const AlignedVector<double>& tile) {
  const std::size_t steps = design.steps();
  Prepared out;
  out.bits.resize(steps);
  out.residual.assign((steps + kPadRows) * kLanes, 0.0);
  FitScratch scratch(design);
  kernels.summarise(tile.data(), steps, out.bits.data(), &out.summary);
  out.fit = fit_lanes(kernels, design, tile.data(), out.bits.data(), out.summary, out.residual.data(), scratch);
  return out;
}

/// |value - expected| <= relative * |expected|, or <= absolute.
inline ::testing::AssertionResult close(double value, double expected, double relative, double absolute) {
  const double off = std::abs(value - expected);
  if (off <= relative * std::abs(expected) || off <= absolute) return ::testing::AssertionSuccess();
  return ::testing::AssertionFailure() << value << " instead of " << expected << ", off by " << off << " ("
                                       << off / std::abs(expected) << " relative)";
}

}  // namespace lagscape::test
