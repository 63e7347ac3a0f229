#pragma once
#include <array>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "forge/process.h"
#include "lagscape/grid/geometry.h"
#include "lagscape/grid/time_axis.h"

namespace lagscape {

/// Values left out of a record. Every kind asked for applies; a value is missing if any of them takes it.
struct Gaps {
  double random = 0;        ///< share of the steps, exact in every cell
  std::vector<int> months;  ///< these months of each year, 1 .. 12
  double block = 0;         ///< share of the steps in one block, placed anew in every cell
  std::optional<std::pair<std::size_t, std::size_t>> period;  ///< steps [first, last], in every cell
};

/// Cells that share one truth: x(t) = mean + trend + season(t) + sd * process(t).
struct Patch {
  std::string name;
  Process process = Process::autoregression({});
  double mean = 0, sd = 1;              ///< in the variable's unit
  double trend = 0;                     ///< per year of the calendar; 0 in the middle of the record
  double season = 0, peak = 0;          ///< amplitude of a yearly wave and its crest, share of the year in [0, 1)
  double day_season = 0, day_peak = 0;  ///< the same within the day
  std::optional<std::array<double, 12>> month_values;  ///< added by calendar month
  Gaps gaps;
};

enum class StoredType { f32, f64, i16, i32 };

struct ForgedVariable {
  std::string name, long_name, standard_name, units;
  StoredType type = StoredType::f32;
  double scale = 1, offset = 0;  ///< packed types: value = stored * scale + offset
  double fill = 0;               ///< stored where a value is missing
  std::vector<Patch> patches;
  std::vector<int> patch_of_cell;  ///< index into patches; kLake: never valid
  [[nodiscard]] bool packed() const noexcept { return type == StoredType::i16 || type == StoredType::i32; }
};
constexpr int kLake = -1;

enum class FileFormat { netcdf4, classic, offset64, cdf5, csv };
enum class FileSplit { none, year, decade };
enum class FileLayout { map, series, contiguous };

/// A recipe, read and checked; what each key means: jobs/README.md.
struct Recipe {
  std::string title, text;
  std::uint64_t seed = 1;
  TimeAxis axis;
  std::string time_units;  ///< "days since 1900-01-01"
  Seconds time_unit_seconds = kDay, time_epoch = 0;
  Geometry geometry;
  std::vector<ForgedVariable> variables;
  struct Output {
    std::string folder, name, sites_file;
    std::vector<FileFormat> formats{FileFormat::netcdf4};
    FileSplit split = FileSplit::none;
    FileLayout layout = FileLayout::map;
    std::optional<std::array<std::size_t, 3>> chunks;  ///< time, row, column
    int deflate = 4, decimals = 4;
    bool unlimited = true, truth = true;
  } output;
};

/// Reads a recipe; throws one Error{job} that lists every problem.
[[nodiscard]] Recipe read_recipe(const std::string& path, const std::vector<std::string>& overrides);
/// The same from text (tests).
[[nodiscard]] Recipe parse_recipe(const std::string& text, const std::string& name, const std::string& folder,
                                  const std::vector<std::string>& overrides);
/// Every key a recipe may have, "patch[].ar" for those of tables that repeat.
[[nodiscard]] const std::vector<std::string>& recipe_keys();

}  // namespace lagscape
