#include "forge/generator.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numbers>
#include <utility>

#include "forge/recipes.h"

namespace lagscape {
namespace {

Recipe recipe_of(const RecipeText& text) { return parse_recipe(text.text(), "recipe.toml", ".", {}); }

/// One patch over rows x cols cells and so many monthly steps.
Recipe grid_of(const std::string& patch, int rows, int cols, int steps) {
  RecipeText text;
  text.space = fmt::format("[grid]\nkind = \"index\"\nrows = {}\ncols = {}\n", rows, cols);
  text.time = fmt::format("start = \"1981-01-15\"\nsteps = {}\nstep = \"P1M\"\n", steps);
  text.patches = "[[patch]]\nname = \"p\"\n" + patch;
  return recipe_of(text);
}

/// Time-major values of cells [first, first + count).
std::vector<double> make(const Recipe& recipe, std::size_t first, std::size_t count) {
  Generator generator(recipe, 0, first, count);
  std::vector<double> values(recipe.axis.size() * count);
  for (std::size_t t = 0; t < recipe.axis.size(); ++t) generator.next(std::span(values).subspan(t * count, count));
  return values;
}

struct Kind {
  const char* patch;
  Process process;
};
std::vector<Kind> kinds() {
  return {{"", Process::autoregression({})},
          {"ar = [0.9]\n", Process::autoregression({0.9})},
          {"ar = [0.5, 0.3]\n", Process::autoregression({0.5, 0.3})},
          {"ar = [1.2, -0.5]\n", Process::autoregression({1.2, -0.5})},
          {"ar = [0.3, 0.2, 0.2]\n", Process::autoregression({0.3, 0.2, 0.2})},
          {"d = 0.3\n", Process::long_memory(0.3)},
          {"d = -0.2\n", Process::long_memory(-0.2)}};
}

// Mean and variance are known (0 and 1), so products of values a lag apart have exactly the autocorrelation as their
// mean; the standard error comes from the spread over independent cells.
TEST(Generator, AutocorrelationOfLongSeriesIsThatOfTheory) {
  constexpr std::size_t kCells = 200, kSteps = 1200;
  for (const Kind& kind : kinds()) {
    const std::vector<double> x = make(grid_of(kind.patch, 10, 20, kSteps), 0, kCells);
    for (const std::size_t lag : {0U, 1U, 2U, 3U, 5U, 10U, 30U}) {
      double sum = 0, squares = 0;
      for (std::size_t c = 0; c < kCells; ++c) {
        double product = 0;
        for (std::size_t t = lag; t < kSteps; ++t) product += x[t * kCells + c] * x[(t - lag) * kCells + c];
        product /= static_cast<double>(kSteps - lag);
        sum += product;
        squares += product * product;
      }
      const double mean = sum / kCells;
      const double error = std::sqrt((squares / kCells - mean * mean) / (kCells - 1));
      EXPECT_NEAR(mean, kind.process.autocorrelation(lag)[lag], 4 * error) << kind.patch << "lag " << lag;
    }
  }
}

TEST(Generator, SeriesAreStationaryFromTheirFirstValue) {
  constexpr std::size_t kCells = 20000, kSteps = 12;
  for (const Kind& kind : kinds()) {
    const std::vector<double> x = make(grid_of(kind.patch, 100, 200, kSteps), 0, kCells);
    for (std::size_t t = 0; t < kSteps; ++t) {
      double square = 0, product = 0;
      for (std::size_t c = 0; c < kCells; ++c) {
        square += x[t * kCells + c] * x[t * kCells + c];
        product += x[c] * x[t * kCells + c];
      }
      const double rho = kind.process.autocorrelation(t)[t];
      EXPECT_NEAR(square / kCells, 1, 4 * std::sqrt(2.0 / kCells)) << kind.patch << "step " << t;
      EXPECT_NEAR(product / kCells, rho, 4 * std::sqrt((1 + rho * rho) / kCells)) << kind.patch << "step " << t;
    }
  }
}

TEST(Generator, ValuesDoNotDependOnTheRunOfCellsTheyAreMadeIn) {
  RecipeText text;
  text.patches +=
      "gaps = { random = 0.2, block = 0.1 }\n[[patch]]\nname = \"long\"\nrows = [2, 3]\nd = 0.3\n[[lake]]\ncircle = "
      "[4, 4, 1]\n";
  const Recipe recipe = recipe_of(text);
  const std::size_t cells = recipe.geometry.cells();
  const std::vector<double> whole = make(recipe, 0, cells);
  for (const auto& [first, count] : {std::pair<std::size_t, std::size_t>{0, 7}, {23, 1}, {17, 30}, {59, 1}}) {
    const std::vector<double> part = make(recipe, first, count);
    for (std::size_t t = 0; t < recipe.axis.size(); ++t) {
      for (std::size_t c = 0; c < count; ++c) {
        const double here = part[t * count + c], there = whole[t * cells + first + c];
        EXPECT_TRUE(here == there || (std::isnan(here) && std::isnan(there))) << "step " << t << ", cell " << first + c;
      }
    }
  }
}

TEST(Generator, TrendAndSeasonAreExactlyWhatTheRecipeSays) {
  const Recipe recipe = grid_of(
      "sd = 0\nar = [0.6]\nmean = 3\ntrend = 0.5\nseason = 2\npeak = 0.25\n"
      "month_values = [1, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, -1]\n",
      1, 2, 480);
  const std::vector<double> x = make(recipe, 0, 2);
  for (std::size_t t = 0; t < 480; ++t) {
    const std::size_t month = t % 12;  // January first
    double expected = 3 + 0.5 * (static_cast<double>(t) - 239.5) / 12;
    expected += 2 * std::cos(2 * std::numbers::pi * ((static_cast<double>(month) + 0.5) / 12 - 0.25));
    expected += month == 0 ? 1 : month == 11 ? -1 : 0;
    EXPECT_NEAR(x[2 * t], expected, 1e-12) << t;
    EXPECT_EQ(x[2 * t], x[2 * t + 1]);
  }
}

TEST(Generator, HourlyWavesFollowTheYearAndTheDayOfTheCalendar) {
  RecipeText text;
  text.time = "start = \"2000-01-01\"\nsteps = 8640\nstep = \"PT1H\"\ncalendar = \"360_day\"\n";
  text.patches = "[[patch]]\nname = \"p\"\nsd = 0\nseason = 1\npeak = 0\nday_season = 2\nday_peak = 0.5\n";
  const std::vector<double> x = make(recipe_of(text), 0, 1);
  EXPECT_NEAR(x[0], 1 - 2, 1e-12);                                      // New Year, midnight
  EXPECT_NEAR(x[12], std::cos(2 * std::numbers::pi / 720) + 2, 1e-12);  // noon
  EXPECT_NEAR(x[4320], -1 - 2, 1e-12);                                  // half a year on, midnight
}

std::vector<std::size_t> gap_counts(const std::vector<double>& x, std::size_t cells) {
  std::vector<std::size_t> counts(cells, 0);
  for (std::size_t i = 0; i < x.size(); ++i) counts[i % cells] += std::size_t{std::isnan(x[i])};
  return counts;
}

TEST(Gaps, RandomGapsAreExactlyTheShareAskedForInEveryCell) {
  const std::vector<double> x = make(grid_of("gaps = { random = 0.2 }\n", 10, 30, 601), 0, 300);
  for (const std::size_t count : gap_counts(x, 300)) EXPECT_EQ(count, 120U);  // 120.2, rounded
  // Every step is as likely as any other: the number of cells that miss it is binomial.
  for (std::size_t t = 0; t < 601; ++t) {
    double missing = 0;
    for (std::size_t c = 0; c < 300; ++c) missing += std::isnan(x[t * 300 + c]) ? 1 : 0;
    EXPECT_NEAR(missing, 60, 5 * std::sqrt(300 * 0.2 * 0.8)) << t;
  }
}

TEST(Gaps, ChosenMonthsAreMissingEachYearAndNoOthers) {
  const std::vector<double> x = make(grid_of("gaps = { months = [12, 1, 2] }\n", 1, 1, 600), 0, 1);
  for (std::size_t t = 0; t < 600; ++t) EXPECT_EQ(std::isnan(x[t]), t % 12 == 11 || t % 12 < 2) << t;
}

TEST(Gaps, ABlockIsOneRunOfTheLengthAskedForPlacedAnewInEveryCell) {
  constexpr std::size_t kCells = 400, kSteps = 100;
  const std::vector<double> x = make(grid_of("gaps = { block = 0.2 }\n", 20, 20, kSteps), 0, kCells);
  std::vector<int> first_seen(kSteps, 0);
  for (std::size_t c = 0; c < kCells; ++c) {
    std::size_t first = kSteps, last = 0;
    for (std::size_t t = 0; t < kSteps; ++t) {
      if (!std::isnan(x[t * kCells + c])) continue;
      first = std::min(first, t);
      last = t;
    }
    ASSERT_EQ(last - first + 1, 20U) << c;
    ++first_seen[first];
  }
  for (const std::size_t count : gap_counts(x, kCells)) EXPECT_EQ(count, 20U);
  EXPECT_GT(first_seen.front() + first_seen[1] + first_seen[2] + first_seen[3], 0);
  EXPECT_GT(first_seen[80] + first_seen[79] + first_seen[78] + first_seen[77], 0);
}

TEST(Gaps, APeriodIsMissingInclusiveOfBothDates) {
  const std::vector<double> x = make(grid_of("gaps = { period = [\"1982-03\", \"1982-05-31\"] }\n", 1, 1, 60), 0, 1);
  for (std::size_t t = 0; t < 60; ++t) EXPECT_EQ(std::isnan(x[t]), t >= 14 && t <= 16) << t;
}

TEST(Gaps, NoiseStaysTheSameWhenGapsAreAskedFor) {
  const std::vector<double> complete = make(grid_of("ar = [0.6]\n", 2, 5, 60), 0, 10);
  const std::vector<double> gappy = make(grid_of("ar = [0.6]\ngaps = { random = 0.3 }\n", 2, 5, 60), 0, 10);
  for (std::size_t i = 0; i < gappy.size(); ++i) EXPECT_TRUE(std::isnan(gappy[i]) || gappy[i] == complete[i]) << i;
}

TEST(Gaps, GapsOfAPatchReplaceThoseOfTheRecipe) {
  RecipeText text;
  text.patches =
      "[gaps]\nrandom = 0.5\n[[patch]]\nname = \"a\"\n[[patch]]\nname = \"b\"\nrows = [0, 0]\ngaps = { months = [7] "
      "}\n";
  const std::vector<double> x = make(recipe_of(text), 0, 20);
  const std::vector<std::size_t> counts = gap_counts(x, 20);
  for (std::size_t c = 0; c < 10; ++c) EXPECT_EQ(counts[c], 10U);
  for (std::size_t c = 10; c < 20; ++c) EXPECT_EQ(counts[c], 60U);
}

}  // namespace
}  // namespace lagscape
