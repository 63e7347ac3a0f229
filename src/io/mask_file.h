#pragma once
#include <vector>

#include "lagscape/grid/geometry.h"
#include "lagscape/io/archive.h"

namespace lagscape {

/// Cells that the job's mask excludes: 1 where the mask's value is missing or not wanted, else 0. The mask lies on the
/// grid (or sites) of the files; it is cut and rolled as they are, and may have its rows upside down. Throws
/// Error{input}.
[[nodiscard]] std::vector<unsigned char> read_mask(const InputRequest& request, const Geometry& panel);

}  // namespace lagscape
