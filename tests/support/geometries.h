#pragma once
#include <cstddef>
#include <utility>
#include <vector>

#include "lagscape/grid/geometry.h"

namespace lagscape::test {

/// first, first + step, ...
inline std::vector<double> steps(double first, double step, std::size_t count) {
  std::vector<double> out(count);
  for (std::size_t i = 0; i < count; ++i) out[i] = first + step * static_cast<double>(i);
  return out;
}

/// A grid of latitudes and longitudes in degrees.
inline Geometry degrees(std::vector<double> lat, std::vector<double> lon) {
  Geometry place;
  place.kind = GeometryKind::latlon;
  place.rows = lat.size();
  place.cols = lon.size();
  place.y = {"lat", "latitude", "degrees_north", std::move(lat), {}, {}};
  place.x = {"lon", "longitude", "degrees_east", std::move(lon), {}, {}};
  return place;
}

}  // namespace lagscape::test
