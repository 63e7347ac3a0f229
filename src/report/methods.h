#pragma once
#include <span>
#include <string_view>

namespace lagscape {

/// A method that several maps share, as `explain` tells it. What belongs to one map only stands in the catalogue.
struct Method {
  std::string_view name;
  std::string_view also;   ///< blank-separated other words for it
  std::string_view title;  ///< one line of the index
  std::string_view text;
  std::string_view source;
};
[[nodiscard]] std::span<const Method> methods();

}  // namespace lagscape
