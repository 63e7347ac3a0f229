#pragma once
#include <cstddef>
#include <string>
#include <vector>

#include "lagscape/base/attribute.h"
#include "lagscape/grid/geometry.h"
#include "lagscape/grid/time_axis.h"

namespace lagscape {

/// One input variable described, without its values.
struct Panel {
  std::string variable;  ///< name in the files
  std::string long_name, standard_name, units;
  TimeAxis axis;  ///< full axis; steps no file holds are missing values
  Geometry geometry;
  std::size_t steps_present = 0;     ///< steps that some file holds
  std::vector<std::string> sources;  ///< one line per input file: "name, bytes, steps FROM to TO"
  std::string input_history;         ///< history attribute of the first file
  Attributes input_attributes;     ///< global attributes worth copying as source_* (creator, license, institution, ...)
  std::vector<std::string> notes;  ///< what was mended or decided while opening ("longitudes rolled to -180..180")
  std::string storage;             ///< for people: "netCDF-4, chunks 1 x 180 x 360, deflate 4 + shuffle"
  std::size_t stored_bytes_per_value = 4;  ///< size of a value as kept in a band
};

}  // namespace lagscape
