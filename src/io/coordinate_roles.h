#pragma once
#include <string>
#include <string_view>
#include <vector>

#include "lagscape/io/nc_handle.h"

namespace lagscape {

/// What a coordinate variable measures. `y` and `x` are projected, rotated or plain grid coordinates.
enum class CoordinateRole { none, time, latitude, longitude, y, x, vertical };

/// The role that the attributes show (CF-1.10 chapter 4: standard_name, units, axis, positive; _CoordinateAxisType of
/// older tools), or nothing.
[[nodiscard]] CoordinateRole role_by_attributes(const Attributes& attributes);
/// The role that a name suggests ("time", "lat", "nx" ...), for files without attributes.
[[nodiscard]] CoordinateRole role_by_name(std::string_view name);

/// Values of a coordinate variable: unpacked, fills as NaN; floats become the double of their shortest decimal text, so
/// that 0.1f is 0.1 and spacings stay even.
[[nodiscard]] std::vector<double> coordinate_values(const NcFile& file, const NcVariable& variable);

}  // namespace lagscape
