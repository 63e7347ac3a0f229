#pragma once
#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace lagscape {

[[nodiscard]] std::string_view trim(std::string_view text);
[[nodiscard]] std::string lower(std::string_view text);
[[nodiscard]] std::vector<std::string> split(std::string_view text, char separator);
[[nodiscard]] std::string join(std::span<const std::string> parts, std::string_view separator);

/// The candidate with the smallest edit distance to the word, if it is near enough to be a slip of the pen
/// (distance <= 2, or <= a third of the word's length).
[[nodiscard]] std::optional<std::string> nearest_name(std::string_view word, std::span<const std::string> candidates);

/// ", did you mean 'NAME'?" or nothing.
[[nodiscard]] std::string did_you_mean(std::string_view word, std::span<const std::string> candidates);

/// Whole text as a number, or nothing ("1e20", " 3 ", "-5"); no trailing words.
[[nodiscard]] std::optional<double> to_number(std::string_view text);

/// Shortest text that reads back as the same double.
[[nodiscard]] std::string number_text(double value);
/// For people: `digits` significant digits, no trailing zeros, "-" for NaN.
[[nodiscard]] std::string human_number(double value, int digits = 3);
/// 64800 -> "64 800".
[[nodiscard]] std::string grouped(std::size_t value);
/// 1536 -> "1.5 KiB".
[[nodiscard]] std::string human_bytes(double bytes);
/// "4GiB", "500 MB", "1000000" -> bytes.
[[nodiscard]] std::optional<std::size_t> parse_bytes(std::string_view text);

}  // namespace lagscape
