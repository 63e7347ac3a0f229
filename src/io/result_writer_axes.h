#pragma once
#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "lagscape/base/attribute.h"
#include "lagscape/grid/geometry.h"
#include "lagscape/grid/time_axis.h"

namespace lagscape {

/// Which horizontal axis this is, and of what kind of grid.
struct AxisRole {
  char letter = 'Y';  ///< 'Y' or 'X'
  GeometryKind kind = GeometryKind::latlon;
};

[[nodiscard]] Attributes latitude_attributes();
[[nodiscard]] Attributes longitude_attributes();
/// Without an axis where a site's altitude is unknown, for GIS would make points of unknown height.
[[nodiscard]] Attributes altitude_attributes(std::span<const double> altitude);
/// Of a 1-D axis: what CF and GDAL need, then what the input said beside it.
[[nodiscard]] Attributes axis_attributes(const SpaceAxis& axis, AxisRole role);
[[nodiscard]] Attributes lag_attributes(const TimeAxis& axis, std::size_t lags);
/// Of the scalar time that stands for the period covered.
[[nodiscard]] Attributes time_attributes(const TimeAxis& axis);

/// Begin and end of the time that the axis covers, whole months, years or days where its steps are such.
struct Period {
  Seconds begin = 0, end = 0;
};
[[nodiscard]] Period covered_period(const TimeAxis& axis);

/// The centres as meant: equal steps where they are equal but for rounding to float32 (files often keep coordinates
/// so), which would make GDAL find no raster at 0.01 degrees (it allows a thousandth of a step); others unchanged.
[[nodiscard]] std::vector<double> without_float_noise(std::span<const double> centres);
/// True if a raster with one cell size places every cell right, within 1e-4 of a cell (one value: true).
[[nodiscard]] bool evenly_spaced(std::span<const double> centres);
/// Cell ends half way between centres, two a cell; latitudes end at the poles.
[[nodiscard]] std::vector<double> bounds_between(std::span<const double> centres, AxisRole role);
/// Latitude, longitude of each cell of a grid with 1-D axes.
[[nodiscard]] std::vector<double> spread_rows(const Geometry& place);
[[nodiscard]] std::vector<double> spread_cols(const Geometry& place);

/// The grid_mapping to write: the input's for projected grids; for degrees the input's if it names an ellipsoid that is
/// not the one of WGS 84, else ours, with a WKT that lets GIS name it EPSG:4326; none without coordinates.
[[nodiscard]] std::optional<GridMapping> mapping_of(const Geometry& place);

}  // namespace lagscape
