#pragma once
#include <functional>
#include <string>
#include <vector>

#include "lagscape/base/log.h"

namespace lagscape {

/// What `forge` made.
struct ForgeReport {
  std::vector<std::string> files;  ///< data files, then the truth file
  std::string description;         ///< a few lines for people
};

/// Makes the grid or panel of a recipe (DEVELOPERS.md, "Recipes"), truth maps beside it. Streams: memory does not grow
/// with the number of steps. Throws Error. Existing files are refused unless `replace`. `checkpoint` is called before
/// each step of the data and before files get their names; what it throws ends the work, and no file is left.
[[nodiscard]] ForgeReport forge_recipe(const std::string& recipe, const std::vector<std::string>& overrides,
                                       bool replace, const Log& log, const std::function<void()>& checkpoint = {});

}  // namespace lagscape
