#pragma once
#include <array>
#include <cstdint>

namespace lagscape {

/// Philox4x32 with 10 rounds: a bijection of the 128-bit counter for each 64-bit key, whose outputs for different
/// counters are as good as independent. No state, so a number depends on its counter only, never on tiling, order or
/// threads. Source: J. K. Salmon, M. A. Moraes, R. O. Dror, D. E. Shaw, "Parallel random numbers: as easy as 1, 2, 3",
/// SC11 (2011).
[[nodiscard]] constexpr std::array<std::uint32_t, 4> philox4x32(std::array<std::uint32_t, 4> counter,
                                                                std::array<std::uint32_t, 2> key) noexcept {
  for (int round = 0; round < 10; ++round) {
    const std::uint64_t a = std::uint64_t{0xD2511F53U} * counter[0];
    const std::uint64_t b = std::uint64_t{0xCD9E8D57U} * counter[2];
    counter = {static_cast<std::uint32_t>(b >> 32) ^ counter[1] ^ key[0], static_cast<std::uint32_t>(b),
               static_cast<std::uint32_t>(a >> 32) ^ counter[3] ^ key[1], static_cast<std::uint32_t>(a)};
    key[0] += 0x9E3779B9U;
    key[1] += 0xBB67AE85U;
  }
  return counter;
}

}  // namespace lagscape
