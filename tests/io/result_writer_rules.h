#pragma once
#include <string>
#include <vector>

namespace lagscape::test {

/// Everything in a netCDF file that breaks a rule our results keep: CF-1.10 (chapters 2-5, 7, appendix E; the numbers
/// stand beside each check) and the layout that GDAL 3.6 was found to need. Empty for a sound file. Reads with the
/// netCDF C API alone, nothing of ours.
[[nodiscard]] std::vector<std::string> broken_rules(const std::string& path);

}  // namespace lagscape::test
