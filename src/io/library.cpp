#include "lagscape/io/library.h"

#include <netcdf.h>

namespace lagscape {

std::string netcdf_library_version() {
  const std::string text = nc_inq_libvers();  // "4.9.0 of Sep  5 2022 ..."
  return text.substr(0, text.find(' '));
}

}  // namespace lagscape
