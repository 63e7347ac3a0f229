#pragma once
#include <memory>
#include <string>

#include "lagscape/io/archive.h"

namespace lagscape {

/// True if the name ends in .csv, .txt or .tsv.
[[nodiscard]] bool is_csv_name(const std::string& path);

/// Wide CSV panels: first column ISO dates or date-times (numbers if the job tells their time unit), one column a site,
/// empty or NA, NaN, null (any case) missing; separated by comma, semicolon or tab; decimal commas are refused. Lines
/// that begin with '#' are comments; our own convention "# unit: m3 s-1" states the unit of all columns. Several files
/// are joined along time by column name; sites come in the order in which they first appear. `duplicates` applies where
/// two rows give the same site and step. `request.variable` names the variable in the result (a column cannot be chosen
/// by it). `request.sites` is a CSV with columns name (or site, station, id), lon, lat and perhaps altitude (or
/// elevation); names are matched exactly but for blanks around them. `box` keeps the sites inside it and drops those
/// whose place is unknown; `mask` and `select` are refused. The whole table is held in memory as doubles.
[[nodiscard]] std::unique_ptr<TileSource> open_csv_panel(const InputRequest& request, const Log& log);

}  // namespace lagscape
