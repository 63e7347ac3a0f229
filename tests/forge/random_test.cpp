#include "forge/random.h"

#include <gtest/gtest.h>

#include <cmath>
#include <vector>

#include "forge/philox.h"

namespace lagscape {
namespace {

// Known answers of the Random123 library's kat_vectors file for philox4x32 with 10 rounds (authors' own distribution
// that goes with Salmon et al., SC11, 2011); quoted from memory: a wrong digit could not agree with 128 computed bits
// by chance.
TEST(Philox, KnownAnswersOfItsAuthors) {
  using Words = std::array<std::uint32_t, 4>;
  EXPECT_EQ(philox4x32({0, 0, 0, 0}, {0, 0}), (Words{0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8}));
  EXPECT_EQ(philox4x32({0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff}, {0xffffffff, 0xffffffff}),
            (Words{0x408f276d, 0x41c83b0e, 0xa20bc7c6, 0x6d5451fd}));
  EXPECT_EQ(philox4x32({0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344}, {0xa4093822, 0x299f31d0}),
            (Words{0xd16cfe09, 0x94fdcceb, 0x5001e420, 0x24126ea1}));
}

TEST(RandomNumbers, UniformNumbersAreInsideTheIntervalAndEven) {
  const RandomNumbers random(3, 0);
  constexpr std::size_t kBins = 20, kPairs = 100000;
  std::vector<double> counts(kBins, 0);
  for (std::uint32_t pair = 0; pair < kPairs; ++pair) {
    for (const double u : random.uniform(Draw::random_gap, 5, pair)) {
      ASSERT_GT(u, 0);
      ASSERT_LT(u, 1);
      ++counts[static_cast<std::size_t>(u * kBins)];
    }
  }
  double chi_squared = 0;
  const double expected = 2.0 * kPairs / kBins;
  for (const double count : counts) chi_squared += (count - expected) * (count - expected) / expected;
  EXPECT_LT(chi_squared, 43.8);  // 99.9 % point of chi-squared with 19 degrees of freedom
}

TEST(RandomNumbers, NormalNumbersFollowTheNormalLaw) {
  const RandomNumbers random(1, 0);
  constexpr std::uint32_t kCells = 1000, kPairs = 500;
  constexpr double kCount = 2.0 * kCells * kPairs;
  const std::vector<double> points{-3, -2, -1, -0.5, 0, 0.5, 1, 2, 3};
  std::vector<double> below(points.size(), 0);
  double within_pair = 0, between_cells = 0;
  for (std::uint32_t cell = 0; cell < kCells; ++cell) {
    for (std::uint32_t pair = 0; pair < kPairs; ++pair) {
      const auto z = random.normal(cell, pair);
      for (std::size_t i = 0; i < points.size(); ++i)
        below[i] += (z[0] < points[i] ? 1 : 0) + (z[1] < points[i] ? 1 : 0);
      within_pair += z[0] * z[1];
      between_cells += z[0] * random.normal(cell + 1, pair)[0];
    }
  }
  for (std::size_t i = 0; i < points.size(); ++i) {
    const double share = 0.5 * std::erfc(-points[i] / std::sqrt(2.0));
    EXPECT_NEAR(below[i] / kCount, share, 4 * std::sqrt(share * (1 - share) / kCount)) << points[i];
  }
  const double pairs = kCount / 2;
  EXPECT_NEAR(within_pair / pairs, 0, 4 / std::sqrt(pairs));
  EXPECT_NEAR(between_cells / pairs, 0, 4 / std::sqrt(pairs));
}

TEST(RandomNumbers, SeedVariablePurposeCellAndStepEachChangeTheNumber) {
  const double one = RandomNumbers(1, 0).uniform(Draw::noise, 7, 9)[0];
  EXPECT_EQ(RandomNumbers(1, 0).uniform(Draw::noise, 7, 9)[0], one);
  EXPECT_NE(RandomNumbers(2, 0).uniform(Draw::noise, 7, 9)[0], one);
  EXPECT_NE(RandomNumbers(1ULL + (1ULL << 32), 0).uniform(Draw::noise, 7, 9)[0], one);
  EXPECT_NE(RandomNumbers(1, 1).uniform(Draw::noise, 7, 9)[0], one);
  EXPECT_NE(RandomNumbers(1, 0).uniform(Draw::block_place, 7, 9)[0], one);
  EXPECT_NE(RandomNumbers(1, 0).uniform(Draw::noise, 8, 9)[0], one);
  EXPECT_NE(RandomNumbers(1, 0).uniform(Draw::noise, 7 + (1ULL << 32), 9)[0], one);
  EXPECT_NE(RandomNumbers(1, 0).uniform(Draw::noise, 7, 10)[0], one);
}

}  // namespace
}  // namespace lagscape
