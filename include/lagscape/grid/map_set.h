#pragma once
#include <cstddef>
#include <cstdint>
#include <string>
#include <vector>

#include "lagscape/base/attribute.h"
#include "lagscape/grid/geometry.h"
#include "lagscape/grid/time_axis.h"

namespace lagscape {

/// How a map is stored. f32 and f64 use NaN as fill, i32 -1, i16 -1, i8 127.
enum class MapType { f32, f64, i32, i16, i8 };

/// What the layers of a cube run over.
enum class LayerAxis { none, lag, order };

/// One output variable, described.
struct MapSpec {
  std::string name;
  MapType type = MapType::f32;
  LayerAxis axis = LayerAxis::none;
  std::string long_name, standard_name, units;  ///< units empty: attribute left out (flags)
  std::string cell_methods;                     ///< only where CF appendix E has the method ("time: mean")
  std::string comment, references;
  std::string ancillary;  ///< blank-separated names
  std::vector<std::int64_t> flag_values, flag_masks;
  std::string flag_meanings;
  std::vector<double> valid_range;  ///< empty, or the true bounds
};

/// A whole result, described: what a MapSink is created with.
struct MapSet {
  Geometry geometry;
  TimeAxis time;  ///< period covered: scalar time with bounds in the file
  std::vector<MapSpec> maps;
  std::size_t lags = 0;    ///< max_lag + 1, or 0 if no lag cube
  std::size_t orders = 0;  ///< layers over `order` = 1 .. orders
  int deflate = 1;
  Attributes global;  ///< in file order; Conventions, title, history ... all of them come from the pipeline
  [[nodiscard]] std::size_t layers(const MapSpec& map) const {
    return map.axis == LayerAxis::lag ? lags : map.axis == LayerAxis::order ? orders : 1;
  }
};

}  // namespace lagscape
