#pragma once
#include <fmt/format.h>

#include <string>

namespace lagscape {

/// A small recipe in parts that tests exchange.
struct RecipeText {
  std::string top = "seed = 5\n";
  std::string time = "start = \"1981-01-15\"\nsteps = 120\nstep = \"P1M\"\n";
  std::string space = "[grid]\nkind = \"latlon\"\nrows = 6\ncols = 10\nlat = [50, 45]\nlon = [0, 9]\n";
  std::string variable = "[[variable]]\nname = \"wetness\"\nunits = \"1\"\ntype = \"double\"\n";
  std::string patches = "[[patch]]\nname = \"loam\"\nar = [0.6]\n";
  std::string output = "folder = \"out\"\nname = \"made\"\n";

  [[nodiscard]] std::string text() const {
    return fmt::format("{}[time]\n{}{}{}{}[output]\n{}", top, time, space, variable, patches, output);
  }
};

}  // namespace lagscape
