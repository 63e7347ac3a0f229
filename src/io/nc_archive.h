#pragma once
#include <memory>
#include <string>
#include <vector>

#include "lagscape/io/archive.h"

namespace lagscape {

/// open_archive for netCDF files.
[[nodiscard]] std::unique_ptr<TileSource> open_nc_archive(const InputRequest& request, const Log& log);

}  // namespace lagscape
