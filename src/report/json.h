#pragma once
#include <cstddef>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

/// JSON values as text, put together from the inside out. Nested values are indented by two blanks.
namespace lagscape::json {

/// A string; bytes that are not UTF-8 are taken for Latin-1, so that the document is valid whatever a file's attributes
/// hold.
[[nodiscard]] std::string text(std::string_view value);
/// Reads back as the same double; null if it is not finite.
[[nodiscard]] std::string number(double value);
[[nodiscard]] std::string number(std::size_t value);
[[nodiscard]] std::string boolean(bool value);
[[nodiscard]] std::string list(std::span<const std::string> values);
[[nodiscard]] std::string texts(std::span<const std::string> values);
/// Members in the given order; their values are JSON already.
[[nodiscard]] std::string object(const std::vector<std::pair<std::string_view, std::string>>& members);

}  // namespace lagscape::json
