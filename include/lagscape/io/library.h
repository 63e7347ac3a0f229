#pragma once
#include <string>

namespace lagscape {

/// Version of the netCDF library in use: "4.9.0".
[[nodiscard]] std::string netcdf_library_version();

}  // namespace lagscape
