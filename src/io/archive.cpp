#include "lagscape/io/archive.h"

#include <algorithm>

#include "io/csv_panel.h"
#include "io/nc_archive.h"
#include "lagscape/base/error.h"

namespace lagscape {

std::unique_ptr<TileSource> open_archive(const InputRequest& request, const Log& log) {
  const auto panels = std::count_if(request.files.begin(), request.files.end(), is_csv_name);
  if (panels == 0) {
    if (request.sites)
      throw Error(ErrorKind::job, "[input] sites names coordinates for a CSV panel, but the input is netCDF", "",
                  "leave out sites");
    return open_nc_archive(request);
  }
  if (panels != std::ssize(request.files))
    throw Error(ErrorKind::job, "the input mixes CSV panels and netCDF files", "[input] files",
                "analyse them in jobs of their own");
  return open_csv_panel(request, log);
}

}  // namespace lagscape
