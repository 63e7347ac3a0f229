#pragma once
#include <cstddef>
#include <functional>
#include <string>
#include <vector>

#include "forge/recipe.h"
#include "lagscape/io/part_file.h"

namespace lagscape {

/// A stretch of the time axis that goes into a file of its own.
struct TimePiece {
  std::string stem;  ///< "harrow_1980s"
  std::size_t first = 0, steps = 0;
};
[[nodiscard]] std::vector<TimePiece> time_pieces(const Recipe& recipe);

/// Missing values by variable and cell, counted while the data are made.
using MissingCounts = std::vector<std::vector<std::size_t>>;

/// Called before each step that is made; may throw to end the work.
using Checkpoint = std::function<void()>;

/// Writes the data as NetCDF. Grids in maps are made step after step over all cells, so that memory does not grow with
/// the record; grids in series are made in bands of whole chunks over the whole record.
MissingCounts write_netcdf(const Recipe& recipe, FileFormat format, const PartFiles& files, const Checkpoint& check);
/// Writes a panel as wide CSV (first column the date, one column a site), and the file of its sites.
MissingCounts write_csv(const Recipe& recipe, const PartFiles& files, const Checkpoint& check);
/// Writes the truth of one variable as NetCDF maps of the same geometry.
void write_truth(const Recipe& recipe, std::size_t variable, const std::vector<std::size_t>& missing,
                 const std::string& path);
/// Names of what the above write.
[[nodiscard]] std::string truth_name(const Recipe& recipe, std::size_t variable);

/// The value as it is stored: rounded to the quantum of packed types, cut to float precision for float. Throws
/// Error{job} if the type cannot hold it.
[[nodiscard]] double stored_value(const ForgedVariable& variable, double value);
/// The whole number stored for a value of a packed variable.
[[nodiscard]] double packed_number(const ForgedVariable& variable, double value);

/// Global attributes of every file made from the recipe.
[[nodiscard]] Attributes provenance(const Recipe& recipe, const std::string& summary);

}  // namespace lagscape
