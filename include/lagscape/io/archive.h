#pragma once
#include <array>
#include <cstddef>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "lagscape/base/log.h"
#include "lagscape/grid/tile_io.h"

namespace lagscape {

enum class DuplicateRule { refuse, first, mean };
enum class LongitudeRule { automatic, as_input };

/// Which values to read: the [input] table of a job, checked and with paths resolved.
struct InputRequest {
  std::vector<std::string> files;  ///< paths, globs already expanded
  std::string variable;
  std::vector<std::pair<std::string, double>> select;  ///< dimension -> coordinate value (nearest within 1e-6 relative)
  std::optional<std::pair<std::string, std::string>> period;  ///< ISO dates, both inclusive
  std::optional<std::array<double, 4>> box;                   ///< west, south, east, north in degrees
  struct Mask {
    std::string file, variable;
    std::optional<double> min, max;
    std::vector<double> values;
  };
  std::optional<Mask> mask;
  std::vector<double> missing_values;
  std::optional<std::array<double, 2>> valid_range;
  std::optional<std::string> sites;  ///< names and coordinates for a CSV panel
  DuplicateRule duplicates = DuplicateRule::refuse;
  LongitudeRule longitude = LongitudeRule::automatic;
  struct TimeMend {
    std::optional<std::string> unit, calendar, step;
  };
  std::optional<TimeMend> time;
};

/// Opens the files, joins them along time, and returns a source of their values. Metadata only; no data values are read
/// (except coordinates, the mask, and the overlapping steps that two files share, which are compared).
/// Throws Error{input} naming file, variable and remedy. Files are NetCDF (any kind) or, by the name's end, .csv/.txt
/// panels.
[[nodiscard]] std::unique_ptr<TileSource> open_archive(const InputRequest& request, const Log& log);

}  // namespace lagscape
