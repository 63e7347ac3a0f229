#include "io/coordinate_roles.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <limits>

#include "io/value_rules.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

template <std::size_t N>
bool one_of(std::string_view word, const std::array<std::string_view, N>& words) {
  return std::find(words.begin(), words.end(), word) != words.end();
}

constexpr std::array<std::string_view, 6> kNorth = {"degrees_north", "degree_north", "degrees_n",
                                                    "degree_n",      "degreesn",     "degreen"};
constexpr std::array<std::string_view, 6> kEast = {"degrees_east", "degree_east", "degrees_e",
                                                   "degree_e",     "degreese",    "degreee"};

CoordinateRole role_by_standard_name(const std::string& name) {
  if (name == "time") return CoordinateRole::time;
  if (name == "latitude") return CoordinateRole::latitude;
  if (name == "longitude") return CoordinateRole::longitude;
  if (name == "grid_latitude" || name == "projection_y_coordinate" || name == "projection_y_angular_coordinate")
    return CoordinateRole::y;
  if (name == "grid_longitude" || name == "projection_x_coordinate" || name == "projection_x_angular_coordinate")
    return CoordinateRole::x;
  constexpr std::array<std::string_view, 7> kVertical = {
      "height", "altitude", "depth", "air_pressure", "pressure", "model_level_number", "surface_altitude"};
  return one_of(name, kVertical) ? CoordinateRole::vertical : CoordinateRole::none;
}

CoordinateRole role_by_axis(const std::string& axis, const std::string& type) {
  if (axis == "t" || type == "time") return CoordinateRole::time;
  if (type == "lat") return CoordinateRole::latitude;
  if (type == "lon") return CoordinateRole::longitude;
  if (axis == "y" || type == "geoy") return CoordinateRole::y;
  if (axis == "x" || type == "geox") return CoordinateRole::x;
  if (axis == "z") return CoordinateRole::vertical;
  return CoordinateRole::none;
}

double shortest(double value) {
  std::array<char, 32> text{};
  const auto end = std::to_chars(text.data(), text.data() + text.size(), static_cast<float>(value)).ptr;
  return to_number(std::string_view(text.data(), static_cast<std::size_t>(end - text.data()))).value_or(value);
}

}  // namespace

CoordinateRole role_by_attributes(const Attributes& attributes) {
  const std::string standard = lower(text_attribute(attributes, "standard_name"));
  if (const auto role = role_by_standard_name(standard); role != CoordinateRole::none) return role;
  // Times of another meaning (forecast_reference_time, forecast_period) are no time axis.
  if (standard.starts_with("forecast_")) return CoordinateRole::none;
  const std::string units = lower(text_attribute(attributes, "units"));
  if (units.find(" since ") != std::string::npos || units.find("%y%m%d") != std::string::npos)
    return CoordinateRole::time;
  if (one_of(units, kNorth)) return CoordinateRole::latitude;
  if (one_of(units, kEast)) return CoordinateRole::longitude;
  const auto role =
      role_by_axis(lower(text_attribute(attributes, "axis")), lower(text_attribute(attributes, "_CoordinateAxisType")));
  if (role != CoordinateRole::none) return role;
  return find_attribute(attributes, "positive") != nullptr ? CoordinateRole::vertical : CoordinateRole::none;
}

CoordinateRole role_by_name(std::string_view name) {
  const std::string word = lower(name);
  constexpr std::array<std::string_view, 4> kTime = {"time", "t", "times", "valid_time"};
  constexpr std::array<std::string_view, 4> kLatitude = {"lat", "latitude", "nav_lat", "lats"};
  constexpr std::array<std::string_view, 4> kLongitude = {"lon", "longitude", "nav_lon", "lons"};
  constexpr std::array<std::string_view, 10> kY = {"y",    "j",           "ny",  "nj",   "yc",
                                                   "rlat", "south_north", "row", "rows", "nrow"};
  constexpr std::array<std::string_view, 10> kX = {"x",    "i",         "nx",  "ni",   "xc",
                                                   "rlon", "west_east", "col", "cols", "ncol"};
  constexpr std::array<std::string_view, 10> kVertical = {"lev",  "level",  "plev", "depth",    "z",
                                                          "zlev", "height", "alt",  "altitude", "elevation"};
  if (one_of(word, kTime)) return CoordinateRole::time;
  if (one_of(word, kLatitude)) return CoordinateRole::latitude;
  if (one_of(word, kLongitude)) return CoordinateRole::longitude;
  if (one_of(word, kY)) return CoordinateRole::y;
  if (one_of(word, kX)) return CoordinateRole::x;
  if (one_of(word, kVertical)) return CoordinateRole::vertical;
  return CoordinateRole::none;
}

std::vector<double> coordinate_values(const NcFile& file, const NcVariable& variable) {
  std::vector<double> values = file.doubles(variable);
  const Attributes attributes = file.attributes(variable);
  const std::vector<double> fill = number_attribute(attributes, "_FillValue");
  const std::vector<double> scale = number_attribute(attributes, "scale_factor");
  const std::vector<double> offset = number_attribute(attributes, "add_offset");
  for (double& value : values) {
    if (!fill.empty() && value == fill.front()) {
      value = std::numeric_limits<double>::quiet_NaN();
      continue;
    }
    if (variable.type == NC_FLOAT && std::isfinite(value)) value = shortest(value);
    if (!scale.empty()) value *= scale.front();
    if (!offset.empty()) value += offset.front();
  }
  return values;
}

}  // namespace lagscape
