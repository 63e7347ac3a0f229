#include "forge/random.h"

#include <cmath>
#include <numbers>

#include "forge/philox.h"

namespace lagscape {
namespace {

// Middle of one of 2^52 equal parts of (0, 1): never 0 or 1, exact in a double.
double unit_interval(std::uint32_t high, std::uint32_t low) noexcept {
  const std::uint64_t bits = (std::uint64_t{high} << 32 | low) >> 12;
  return (static_cast<double>(bits) + 0.5) * 0x1p-52;
}

}  // namespace

RandomNumbers::RandomNumbers(std::uint64_t seed, std::uint32_t variable) noexcept
    : key_{static_cast<std::uint32_t>(seed), static_cast<std::uint32_t>(seed >> 32)}, variable_(variable) {}

std::array<double, 2> RandomNumbers::uniform(Draw draw, std::uint64_t cell, std::uint32_t pair) const noexcept {
  const std::uint32_t stream = variable_ << 8 | static_cast<std::uint32_t>(draw);
  const auto bits =
      philox4x32({pair, static_cast<std::uint32_t>(cell), static_cast<std::uint32_t>(cell >> 32), stream}, key_);
  return {unit_interval(bits[0], bits[1]), unit_interval(bits[2], bits[3])};
}

std::array<double, 2> RandomNumbers::normal(std::uint64_t cell, std::uint32_t pair) const noexcept {
  const auto [u, v] = uniform(Draw::noise, cell, pair);
  const double radius = std::sqrt(-2 * std::log(u));
  const double angle = 2 * std::numbers::pi * v;
  return {radius * std::cos(angle), radius * std::sin(angle)};
}

}  // namespace lagscape
