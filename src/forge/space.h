#pragma once
#include <string>
#include <vector>

#include "lagscape/grid/geometry.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {

/// The horizontal part of a file: its dimensions, and what every variable on them has to say.
struct Space {
  std::vector<int> dimensions;   ///< y and x, or station
  std::vector<int> coordinates;  ///< ids of the coordinate variables, in the order define_space() made them
  Attributes attributes;         ///< coordinates, grid_mapping
};

/// Declares dimensions, coordinate variables and grid mapping by CF-1.10.
[[nodiscard]] Space define_space(NcFile& file, const Geometry& geometry);
/// Writes the coordinates; after end_define().
void write_space(NcFile& file, const Geometry& geometry, const Space& space);

}  // namespace lagscape
