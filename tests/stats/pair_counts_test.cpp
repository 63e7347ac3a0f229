#include "lagscape/stats/pair_counts.h"

#include <gtest/gtest.h>

#include <set>

#include "support/series.h"

namespace lagscape::test {
namespace {

/// Counted pair by pair.
double slow_count(const std::vector<bool>& there, std::size_t lag) {
  double pairs = 0;
  for (std::size_t t = 0; t + lag < there.size(); ++t) pairs += there[t] && there[t + lag] ? 1 : 0;
  return pairs;
}

/// A record of `span` steps, first and last there, with this many steps missing between.
std::vector<bool> record(Draw& draw, std::size_t span, std::size_t gaps) {
  std::vector<bool> there(span, true);
  while (gaps > 0) {
    const auto t = 1 + static_cast<std::size_t>(draw.uniform() * static_cast<double>(span - 2));
    if (!there[t]) continue;
    there[t] = false;
    --gaps;
  }
  return there;
}

void expect_counts(PairCounts& pairs, const std::vector<bool>& there, std::size_t lane, std::size_t before) {
  std::vector<std::uint8_t> bits(before + there.size() + 3, static_cast<std::uint8_t>(~(1U << lane)));
  for (std::size_t t = 0; t < there.size(); ++t) {
    if (there[t]) bits[before + t] = 0xFF;
  }
  pairs.start(bits.data(), lane, before, before + there.size() - 1);
  EXPECT_EQ(pairs.span(), there.size());
  for (std::size_t lag = 0; lag < there.size() + 3; ++lag) {
    ASSERT_EQ(pairs.at(lag), slow_count(there, lag)) << "span " << there.size() << ", lag " << lag;
  }
}

TEST(PairCounts, AgreeWithCountingOneByOneForAnyNumberOfGaps) {
  Draw draw(1);
  PairCounts pairs(600);
  for (const std::size_t gaps : {0U, 1U, 2U, 63U, 64U, 65U, 66U, 128U, 400U, 498U}) {  // 64 is where the way changes
    for (std::size_t lane = 0; lane < kLanes; ++lane) expect_counts(pairs, record(draw, 500, gaps), lane, lane);
  }
}

TEST(PairCounts, AgreeAtTheBordersOfBitWords) {
  Draw draw(2);
  for (const std::size_t span : {3U, 63U, 64U, 65U, 127U, 128U, 129U, 192U}) {
    PairCounts pairs(span + 10);
    const std::size_t most = span - 2;
    for (const std::size_t gaps : {std::size_t{0}, std::size_t{1}, most / 2, most}) {
      expect_counts(pairs, record(draw, span, gaps), 3, 4);
    }
  }
}

TEST(PairCounts, ASingleValueHasOnePairWithItself) {
  PairCounts pairs(20);
  expect_counts(pairs, {true}, 0, 7);
}

TEST(PairCounts, MayBeAskedInAnyOrder) {
  Draw draw(3);
  const std::vector<bool> there = record(draw, 300, 50);
  std::vector<std::uint8_t> bits(300, 0);
  for (std::size_t t = 0; t < 300; ++t) bits[t] = there[t] ? 1 : 0;
  PairCounts pairs(300);
  pairs.start(bits.data(), 0, 0, 299);
  for (const std::size_t lag : {250U, 3U, 0U, 299U, 12U}) EXPECT_EQ(pairs.at(lag), slow_count(there, lag));
}

TEST(PairCounts, AKindOfRecordLeavesNothingForTheNext) {
  Draw draw(4);
  PairCounts pairs(600);
  for (const std::size_t gaps : {40U, 200U, 40U, 0U, 64U, 65U, 1U}) expect_counts(pairs, record(draw, 500, gaps), 1, 2);
}

}  // namespace
}  // namespace lagscape::test
