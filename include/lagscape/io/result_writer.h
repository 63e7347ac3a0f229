#pragma once
#include <memory>
#include <string>
#include <vector>

#include "lagscape/grid/tile_io.h"

namespace lagscape {

/// Files that a result under this name consists of: {path} for grids; {NAME.nc, NAME_cubes.nc (if there are cubes),
/// NAME.csv} for sites.
[[nodiscard]] std::vector<std::string> result_files(const std::string& path, const MapSet& set);

/// Begins a result. Values may come in any order and in bands of any size, whole rows of the grid at a time: they are
/// kept in a nameless file beside the result, whose space is taken at once. commit() throws Error{internal} if a map is
/// not whole; it assembles hidden .part files, reads them back, waits for the disk and gives them their final names, so
/// equal values give equal bytes. Folders are made as needed. Written as netCDF-4 classic model with the conventions of
/// DEVELOPERS.md ("Results that any GIS opens").
/// Refuses existing final names unless `replace`, here and at commit. Abandoned (destroyed without commit) results
/// leave nothing behind. Throws Error{output} if a folder cannot be written to or has no room. Main thread only.
[[nodiscard]] std::unique_ptr<MapSink> create_result(const std::string& path, const MapSet& set, bool replace);

}  // namespace lagscape
