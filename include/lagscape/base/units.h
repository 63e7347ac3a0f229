#pragma once
#include <string>
#include <string_view>

namespace lagscape {

/// Unit text of a difference of two values: "degC" and its spellings become "K", anything else stays.
[[nodiscard]] std::string difference_unit(std::string_view unit);
/// Unit text of a rate: ("K", "year") -> "K year-1"; ("K", "decade") -> "K (10 year)-1"; dimensionless -> "year-1".
[[nodiscard]] std::string rate_unit(std::string_view unit, std::string_view per);
/// Unit text of a square: "K" -> "K2", "m s-1" -> "(m s-1)2"; dimensionless stays "1".
[[nodiscard]] std::string squared_unit(std::string_view unit);
/// True for "", "1", "-", "none", "dimensionless".
[[nodiscard]] bool dimensionless(std::string_view unit);

}  // namespace lagscape
