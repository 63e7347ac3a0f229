#include "lagscape/base/units.h"

#include <algorithm>
#include <array>

#include "lagscape/base/text.h"

namespace lagscape {

bool dimensionless(std::string_view unit) {
  const std::string name = lower(trim(unit));
  return name.empty() || name == "1" || name == "-" || name == "none" || name == "dimensionless" || name == "unitless";
}

std::string difference_unit(std::string_view unit) {
  static constexpr std::array<std::string_view, 10> celsius = {
      "degc",    "deg_c",          "celsius",         "degrees_c", "degree_c",
      "degreec", "degree_celsius", "degrees_celsius", "degreesc",  "deg c"};
  const std::string name = lower(trim(unit));
  if (std::find(celsius.begin(), celsius.end(), name) != celsius.end()) return "K";
  return dimensionless(unit) ? "1" : std::string(trim(unit));
}

std::string rate_unit(std::string_view unit, std::string_view per) {
  const std::string base = difference_unit(unit);
  const std::string time = per == "decade" ? "(10 year)-1" : "year-1";
  return base == "1" ? time : base + " " + time;
}

std::string squared_unit(std::string_view unit) {
  std::string base = difference_unit(unit);
  if (base == "1") return base;
  const bool simple = std::all_of(base.begin(), base.end(), [](unsigned char c) { return std::isalpha(c) != 0; });
  return simple ? base + "2" : "(" + base + ")2";
}

}  // namespace lagscape
