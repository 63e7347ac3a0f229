#pragma once
#include <cstddef>

#include "io/grid_geometry.h"
#include "lagscape/grid/tile_io.h"

namespace lagscape {

/// Reads stored values of `count` time steps from `first` on of these cells of the panel, time-major and unchanged:
/// to[(t * cells.count + cell) * bytes]. One library call where the file has this order, else slabs of bounded size
/// whose edges follow the chunks; the dimensions may be in any order. panel_cols: columns of the panel.
void read_stored(const NcFile& file, const VariableLayout& layout, const CellMap& map, std::size_t panel_cols,
                 CellRange cells, std::size_t first, std::size_t count, std::size_t bytes, std::byte* to);

}  // namespace lagscape
