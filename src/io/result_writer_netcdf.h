#pragma once
#include <cstddef>
#include <span>
#include <string>
#include <vector>

#include "io/result_writer_spool.h"
#include "lagscape/grid/map_set.h"

namespace lagscape {

/// Writes one netCDF file of a result: these maps of the set, in this order, with their coordinates. CF-1.10, and laid
/// out so that GDAL finds place, reference system and missing values of every map (DEVELOPERS.md, "Results that any GIS
/// opens"). The path must not exist. Throws Error{output}.
void write_result_netcdf(const std::string& path, const MapSet& set, std::span<const std::size_t> maps,
                         const ValueSpool& values);

/// Opens the file again and compares shape and last values of every map with what was to be written.
/// Throws Error{output}.
void check_result_netcdf(const std::string& path, const MapSet& set, std::span<const std::size_t> maps,
                         const ValueSpool& values);

}  // namespace lagscape
