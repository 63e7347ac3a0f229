#pragma once
#include <array>
#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "io/variable_layout.h"
#include "lagscape/grid/geometry.h"
#include "lagscape/io/archive.h"

namespace lagscape {

/// Neighbouring columns of the panel that are neighbours in the file: panel column `panel` + i is file column `file` +
/// i, or `file` - i if reversed.
struct ColumnRun {
  std::size_t panel = 0, file = 0, count = 0;
  bool reversed = false;
};

/// Where the cells of a panel lie in the files: panel row r is file row first_row + r.
struct CellMap {
  std::size_t first_row = 0;
  std::vector<ColumnRun> runs;
};

/// Cells as the panel has them, and where they are in the files.
struct Arrangement {
  Geometry geometry;
  CellMap map;
  std::vector<unsigned char> excluded;  ///< empty, or 1 for cells outside the box
};

/// "lat 50 to 54.5, lon -4 to 1", NaN passed over.
[[nodiscard]] std::string extent_words(const std::vector<double>& lat, const std::vector<double>& lon);

/// Reads where the cells are, in the order of the file. Longitudes that wrap inside are made monotone. Throws
/// Error{input} where coordinates are not monotone.
[[nodiscard]] Geometry read_geometry(const NcFile& file, const VariableLayout& layout, std::vector<std::string>& notes);

/// Throws Error{input} naming both files unless their cells are the same (coordinates within a thousandth of a cell).
void require_same_geometry(const Geometry& first, const std::string& first_file, const Geometry& other,
                           const std::string& other_file);

/// Cuts to the box, makes x increase and rolls global grids to -180..180.
[[nodiscard]] Arrangement arrange(const Geometry& in_file, const std::optional<std::array<double, 4>>& box,
                                  LongitudeRule longitude, std::vector<std::string>& notes);

}  // namespace lagscape
