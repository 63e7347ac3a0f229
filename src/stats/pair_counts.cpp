#include "lagscape/stats/pair_counts.h"

#include <algorithm>
#include <bit>

namespace lagscape {

PairCounts::PairCounts(std::size_t steps) : distances_(steps + 1, 0), words_(steps / 64 + 2, 0) {
  missing_.reserve(steps);
  counts_.reserve(steps + 1);
}

void PairCounts::start(const std::uint8_t* bits, std::size_t lane, std::size_t first, std::size_t last) {
  const auto pairs_of_gaps = [this](auto&& act) {
    for (std::size_t b = 1; b < missing_.size(); ++b) {
      for (std::size_t a = 0; a < b; ++a) act(distances_[missing_[b] - missing_[a]]);
    }
  };
  if (listed_) pairs_of_gaps([](std::int32_t& count) { count = 0; });  // undo the lane before
  span_ = last - first + 1;
  counts_.clear();
  missing_.clear();
  for (std::size_t t = 0; t < span_; ++t) {
    if ((bits[first + t] >> lane & 1) == 0) missing_.push_back(static_cast<std::uint32_t>(t));
  }
  complete_ = missing_.empty();
  listed_ = missing_.size() <= kListed;
  if (listed_) {
    pairs_of_gaps([](std::int32_t& count) { ++count; });
    before_head_ = missing_.size();
    before_tail_ = 0;
    return;
  }
  std::fill(words_.begin(), words_.end(), ~std::uint64_t{0});
  for (const std::uint32_t t : missing_) words_[t / 64] &= ~(std::uint64_t{1} << (t % 64));
  words_[span_ / 64] &= (std::uint64_t{1} << (span_ % 64)) - 1;
  for (std::size_t word = span_ / 64 + 1; word < words_.size(); ++word) words_[word] = 0;
}

double PairCounts::at(std::size_t lag) {
  if (complete_) return lag < span_ ? static_cast<double>(span_ - lag) : 0;
  while (counts_.size() <= lag && counts_.size() < span_) counts_.push_back(count(counts_.size()));
  return lag < span_ ? counts_[lag] : 0;
}

double PairCounts::count(std::size_t lag) {
  if (listed_) {  // both ends valid = all - (early end missing) - (late end missing) + (both missing)
    while (before_head_ > 0 && missing_[before_head_ - 1] >= span_ - lag) --before_head_;
    while (before_tail_ < missing_.size() && missing_[before_tail_] < lag) ++before_tail_;
    const std::size_t late = missing_.size() - before_tail_;
    const auto both = lag == 0 ? missing_.size() : static_cast<std::size_t>(distances_[lag]);
    return static_cast<double>(span_ - lag + both) - static_cast<double>(before_head_ + late);
  }
  const std::size_t offset = lag / 64, shift = lag % 64;
  int pairs = 0;
  for (std::size_t word = 0; word + offset + 1 < words_.size(); ++word) {
    std::uint64_t later = words_[word + offset] >> shift;
    if (shift != 0) later |= words_[word + offset + 1] << (64 - shift);
    pairs += std::popcount(words_[word] & later);
  }
  return pairs;
}

}  // namespace lagscape
