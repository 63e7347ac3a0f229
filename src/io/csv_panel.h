#pragma once
#include <memory>
#include <string>

#include "lagscape/io/archive.h"

namespace lagscape {

/// True if the name ends in .csv, .txt or .tsv.
[[nodiscard]] bool is_csv_name(const std::string& path);

/// Wide CSV panels: first column ISO dates, one column a site, empty or NA (any case) or NaN missing. Several files are
/// joined along time by column name. `request.variable` names the variable in the result (a column cannot be chosen by it).
/// The whole table is held in memory as doubles.
[[nodiscard]] std::unique_ptr<TileSource> open_csv_panel(const InputRequest& request, const Log& log);

}  // namespace lagscape
