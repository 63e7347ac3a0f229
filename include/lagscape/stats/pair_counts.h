#pragma once
#include <cstddef>
#include <cstdint>
#include <vector>

namespace lagscape {

/// Number of pairs (t, t + k) with both values valid in one lane, lag by lag and only as far as asked. Counts are whole
/// numbers, so the two ways of counting (from the list of gaps when it is short, from bit words otherwise) agree
/// exactly.
class PairCounts {
 public:
  explicit PairCounts(std::size_t steps);
  /// Starts a lane. bits: one byte a step; first, last: its first and last valid step.
  void start(const std::uint8_t* bits, std::size_t lane, std::size_t first, std::size_t last);
  /// nu_k. Cheap for lags asked before; lags are counted in order.
  [[nodiscard]] double at(std::size_t lag);
  /// Steps from the lane's first to its last value.
  [[nodiscard]] std::size_t span() const noexcept { return span_; }

 private:
  [[nodiscard]] double count(std::size_t lag);

  static constexpr std::size_t kListed = 64;  ///< gaps up to which the list is cheaper
  std::size_t span_ = 0, before_head_ = 0, before_tail_ = 0;
  bool complete_ = true, listed_ = true;
  std::vector<std::uint32_t> missing_;   ///< steps, from the lane's first value, in order
  std::vector<std::int32_t> distances_;  ///< pairs of missing steps by distance
  std::vector<std::uint64_t> words_;
  std::vector<double> counts_;
};

}  // namespace lagscape
