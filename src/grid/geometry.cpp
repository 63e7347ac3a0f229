#include "lagscape/grid/geometry.h"

#include <fmt/format.h>
#include <cmath>
#include <limits>
#include <span>

#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr int kDigits = 7;  // enough for 1 m in a global projection and 1e-5 degrees

std::string coordinate(const SpaceAxis& axis, const char* fallback, double value) {
  const std::string name = axis.name.empty() ? fallback : axis.name;
  const std::string unit = axis.units.empty() ? "" : " " + axis.units;
  return fmt::format("{} {}{}", name, human_number(value, kDigits), unit);
}

std::string degrees(double lat, double lon) {
  return fmt::format("lat {}, lon {}", human_number(lat, kDigits), human_number(lon, kDigits));
}

// "lat -89.5 to 89.5", or nothing where no value is finite.
std::string range(const std::string& name, std::span<const double> values, const std::string& unit) {
  double low = std::numeric_limits<double>::quiet_NaN(), high = low;
  for (const double value : values) {
    low = std::fmin(low, value);  // fmin and fmax pass over NaN
    high = std::fmax(high, value);
  }
  if (std::isnan(low)) return {};
  return fmt::format(", {} {} to {}{}{}", name, human_number(low, kDigits), human_number(high, kDigits),
                     unit.empty() ? "" : " ", unit);
}

}  // namespace

std::string Geometry::describe_cell(std::size_t cell) const {
  if (is_sites())
    return cell < site_names.size() ? fmt::format("site '{}'", site_names[cell]) : fmt::format("site {}", cell);
  const std::size_t row = cell / cols, col = cell % cols;
  std::string place = fmt::format("row {}, col {}", row, col);
  if (kind == GeometryKind::latlon) return fmt::format("{} ({})", place, degrees(y.values[row], x.values[col]));
  if (kind == GeometryKind::projected)
    return fmt::format("{} ({}, {})", place, coordinate(y, "y", y.values[row]), coordinate(x, "x", x.values[col]));
  if (kind == GeometryKind::curvilinear) return fmt::format("{} ({})", place, degrees(lat[cell], lon[cell]));
  return place;
}

std::string Geometry::describe() const {
  if (is_sites()) return fmt::format("{} site{}", cells(), cells() == 1 ? "" : "s");
  const std::string size = fmt::format("{} x {} cells", rows, cols);
  if (kind == GeometryKind::latlon) return size + range("lat", y.values, "") + range("lon", x.values, "");
  if (kind == GeometryKind::projected) return size + range("y", y.values, y.units) + range("x", x.values, x.units);
  if (kind == GeometryKind::curvilinear) return size + ", curvilinear" + range("lat", lat, "") + range("lon", lon, "");
  return size + " without coordinates";
}

}  // namespace lagscape
