#pragma once
#include <string>
#include <vector>

#include "forge/nc_file.h"
#include "lagscape/grid/geometry.h"

namespace lagscape {

/// The horizontal part of a file: its dimensions, and what every variable on them has to say.
struct Space {
  std::vector<int> dimensions;   ///< y and x, or station
  std::vector<int> coordinates;  ///< ids of the coordinate variables, in the order define_space() made them
  Attributes attributes;         ///< coordinates, grid_mapping
};

/// Declares dimensions, coordinate variables and grid mapping by CF-1.10.
[[nodiscard]] Space define_space(NcWriter& file, const Geometry& geometry);
/// Writes the coordinates; after end_definition().
void write_space(NcWriter& file, const Geometry& geometry, const Space& space);

}  // namespace lagscape
