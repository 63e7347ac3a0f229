#pragma once
#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "lagscape/base/attribute.h"

namespace lagscape {

/// How cells lie in space. `index`: rows and columns without coordinates.
enum class GeometryKind { latlon, projected, curvilinear, index, sites };

/// One horizontal axis. values: cell centres, double; for latlon x they increase.
struct SpaceAxis {
  std::string name;            ///< dimension and variable name, e.g. "lat"
  std::string standard_name;   ///< "latitude", "longitude", "projection_x_coordinate", ... ; may be empty
  std::string units;           ///< "degrees_north", "km", ... ; may be empty
  std::vector<double> values;  ///< empty for an index axis
  std::vector<double> bounds;  ///< 2 per value, or empty
  Attributes extra;            ///< other attributes of the input worth carrying (long_name, ...)
};

/// The input's grid_mapping variable, all attributes kept (an ellipsoid is added for a rotated pole without one).
struct GridMapping {
  std::string name;
  Attributes attributes;
};

/// Where the cells are. Grids are row-major: cell = row * cols + col. Sites: rows = 1, cols = number of sites.
struct Geometry {
  GeometryKind kind = GeometryKind::index;
  SpaceAxis y, x;                ///< unused for sites
  std::vector<double> lat, lon;  ///< per cell: curvilinear, projected with 2-D coordinates, sites (empty if unknown)
  std::vector<double> altitude;  ///< sites only, may be empty
  std::vector<std::string> site_names;  ///< sites only
  std::optional<GridMapping> mapping;
  std::size_t rows = 0, cols = 0;

  [[nodiscard]] std::size_t cells() const noexcept { return rows * cols; }
  [[nodiscard]] bool is_sites() const noexcept { return kind == GeometryKind::sites; }
  /// For messages: "row 12, col 40 (lat 45.25, lon -3.75)" or "site 'Alder Weir'".
  [[nodiscard]] std::string describe_cell(std::size_t cell) const;
  /// For people: "180 x 360 cells, lat -89.5 to 89.5, lon -179.5 to 179.5", "12 sites".
  [[nodiscard]] std::string describe() const;
};

}  // namespace lagscape
