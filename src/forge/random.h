#pragma once
#include <array>
#include <cstddef>
#include <cstdint>

namespace lagscape {

/// What a random number is for. Each purpose draws from a stream of its own, so that asking for gaps leaves the noise
/// as is.
enum class Draw : std::uint32_t { noise = 0, random_gap = 1, block_place = 2 };

/// Random numbers of one variable of a recipe, keyed by the recipe's seed; each number depends on (seed, variable,
/// purpose, cell, step) and nothing else. Immutable; safe to share between threads.
class RandomNumbers {
 public:
  RandomNumbers(std::uint64_t seed, std::uint32_t variable) noexcept;
  /// Two numbers, uniform in (0, 1) with 52 bits: those of steps 2 * pair and 2 * pair + 1.
  [[nodiscard]] std::array<double, 2> uniform(Draw draw, std::uint64_t cell, std::uint32_t pair) const noexcept;
  /// Two independent standard normal numbers, of steps 2 * pair and 2 * pair + 1, by the polar form of the bivariate
  /// normal (G. E. P. Box, M. E. Muller, Annals of Mathematical Statistics 29 (1958), 610).
  [[nodiscard]] std::array<double, 2> normal(std::uint64_t cell, std::uint32_t pair) const noexcept;

 private:
  std::array<std::uint32_t, 2> key_;
  std::uint32_t variable_;
};

}  // namespace lagscape
