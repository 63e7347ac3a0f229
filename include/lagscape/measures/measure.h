#pragma once
#include <cstddef>
#include <cstdint>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "lagscape/grid/map_set.h"

namespace lagscape {

struct CellResult;  // measures/cell_result.h: everything the stages computed for one cell

/// How a map's unit follows from the input's unit and the time axis.
enum class UnitRule {
  one,               ///< "1"
  none,              ///< flags: no unit
  input,             ///< the variable's unit
  input_difference,  ///< its difference ("degC" -> "K")
  input_squared,
  input_rate,     ///< difference per year or decade
  lag_time,       ///< unit of the lag axis (day, month, ...)
  calendar_time,  ///< "days since ..." with calendar
};

/// Groups by which maps are chosen in `output.maps` and listed in help.
enum class MapGroup { record, memory, effective_size, trend, cubes };

/// One map or cube: the single place from which file attributes, `explain`, `plan`, the README table and `output.maps`
/// follow.
struct Measure {
  std::string_view name;
  MapGroup group;
  bool standard;  ///< belongs to the group "standard"
  MapType type = MapType::f32;
  LayerAxis axis = LayerAxis::none;
  UnitRule unit = UnitRule::one;
  std::string_view long_name;  ///< goes into the file
  std::string_view meaning;    ///< a sentence or two for a practitioner (explain)
  std::string_view formula;    ///< in words and symbols, ASCII
  std::string_view source;     ///< published source, or "common practice, no published source"
  std::string_view cautions;   ///< may be empty
  std::string_view standard_name = {};
  std::string_view cell_methods = {};
  std::string_view ancillary = {};       ///< blank-separated map names
  std::vector<double> valid_range = {};  ///< true bounds only
  /// Picks the value from what the stages computed. Exactly one of these is set; cubes fill `layers`.
  double (*value)(const CellResult&) = nullptr;
  void (*layers)(const CellResult&, std::span<float> layers) = nullptr;
};

/// All measures, in the order in which they are listed and written.
[[nodiscard]] const std::vector<Measure>& measure_catalog();
[[nodiscard]] const Measure* find_measure(std::string_view name);
[[nodiscard]] std::string_view group_name(MapGroup group);  ///< "record", "memory", "effective-size", "trend", "cubes"
/// Words accepted in output.maps: "standard", "all", the group names, the names of maps that are not cubes.
[[nodiscard]] std::vector<std::string> map_words();
/// Words accepted in output.cubes: names of cubes.
[[nodiscard]] std::vector<std::string> cube_words();

/// A bit of the status map, declared once.
struct StatusBit {
  std::int16_t mask;
  std::string_view name;     ///< flag meaning in the file: "no_data"
  std::string_view words;    ///< in the summary: "no data"
  std::string_view meaning;  ///< explain
  bool fatal;                ///< the cell has no estimates
};
[[nodiscard]] std::span<const StatusBit> status_bits();

/// A class of the trend_class map.
struct TrendClass {
  std::int8_t value;
  std::string_view name, words;
};
[[nodiscard]] std::span<const TrendClass> trend_classes();

}  // namespace lagscape
