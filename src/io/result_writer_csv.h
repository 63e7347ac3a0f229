#pragma once
#include <cstddef>
#include <span>
#include <string>

#include "io/result_writer_spool.h"
#include "lagscape/grid/map_set.h"

namespace lagscape {

/// Writes the maps of a panel of sites as CSV (RFC 4180): one line a site, with its name and place; numbers with as
/// many digits as read back the same value, times as ISO 8601 dates, missing values empty. Throws Error{output}.
void write_result_csv(const std::string& path, const MapSet& set, std::span<const std::size_t> maps,
                      const ValueSpool& values);

}  // namespace lagscape
