#pragma once
#include <memory>
#include <string>
#include <vector>

#include "lagscape/grid/tile_io.h"

namespace lagscape {

/// Files that a result under this name consists of: {path} for grids; {NAME.nc, NAME_cubes.nc (if there are cubes),
/// NAME.csv} for sites.
[[nodiscard]] std::vector<std::string> result_files(const std::string& path, const MapSet& set);

/// Creates the result as hidden .part files beside the final names; folders are made as needed. Written as netCDF-4
/// classic model with the conventions of DEVELOPERS.md ("Results that any GIS opens").
/// Refuses existing final names unless `replace`. Abandoned (destroyed without commit) results leave no file behind.
[[nodiscard]] std::unique_ptr<MapSink> create_result(const std::string& path, const MapSet& set, bool replace);

}  // namespace lagscape
