#pragma once
#include <memory>

#include "io/archive_plan.h"
#include "lagscape/io/archive.h"

namespace lagscape {

/// Opens netCDF files and joins them: all that open_archive promises, up to the values. Notes stand in Panel::notes.
[[nodiscard]] std::shared_ptr<const ArchivePlan> plan_archive(const InputRequest& request);

/// open_archive for netCDF files.
[[nodiscard]] std::unique_ptr<TileSource> open_nc_archive(const InputRequest& request);

}  // namespace lagscape
