#include "forge/data_files.h"

#include <fmt/format.h>

#include <cmath>
#include <limits>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/version.h"

namespace lagscape {

std::vector<TimePiece> time_pieces(const Recipe& recipe) {
  const FileSplit split = recipe.output.split;
  if (split == FileSplit::none) return {{recipe.output.name, 0, recipe.axis.size()}};
  std::vector<TimePiece> pieces;
  for (std::size_t t = 0; t < recipe.axis.size(); ++t) {
    const int year = moment_of(recipe.axis.calendar(), recipe.axis.time(t)).date.year;
    const std::string stem = split == FileSplit::year
                                 ? fmt::format("{}_{}", recipe.output.name, year)
                                 : fmt::format("{}_{}s", recipe.output.name, floor_div(year, 10) * 10);
    if (pieces.empty() || pieces.back().stem != stem) pieces.push_back({stem, t, 0});
    ++pieces.back().steps;
  }
  return pieces;
}

double packed_number(const ForgedVariable& variable, double value) {
  const bool wide = variable.type == StoredType::i32;
  const double low = wide ? std::numeric_limits<std::int32_t>::min() : std::numeric_limits<std::int16_t>::min();
  const double high = wide ? std::numeric_limits<std::int32_t>::max() : std::numeric_limits<std::int16_t>::max();
  const double number = std::nearbyint((value - variable.offset) / variable.scale);
  if (number >= low && number <= high && number != variable.fill) return number;
  const std::string why = number == variable.fill ? "would be stored as the fill value of" : "does not fit into";
  throw Error(ErrorKind::job,
              fmt::format("a value of {} {} type {} with scale {} and offset {}", human_number(value, 6), why,
                          wide ? "int" : "short", number_text(variable.scale), number_text(variable.offset)),
              "variable: " + variable.name,
              "choose another scale, fill, or offset (in the middle of the values), or type = \"float\"");
}

double stored_value(const ForgedVariable& variable, double value) {
  if (variable.packed()) return packed_number(variable, value) * variable.scale + variable.offset;
  if (variable.type == StoredType::f64) return value;
  if (std::abs(value) <= static_cast<double>(std::numeric_limits<float>::max()))
    return static_cast<double>(static_cast<float>(value));
  throw Error(ErrorKind::job, fmt::format("a value of {} does not fit into type float", human_number(value, 6)),
              "variable: " + variable.name, "use type = \"double\"");
}

Attributes provenance(const Recipe& recipe, const std::string& summary) {
  Attributes attributes{{"Conventions", "CF-1.10"}};
  if (!recipe.title.empty()) attributes.push_back({"title", recipe.title});
  attributes.push_back({"summary", summary});
  attributes.push_back(
      {"source", fmt::format("invented data, made by lagscape {} forge, seed {}", LAGSCAPE_VERSION, recipe.seed)});
  if (recipe.geometry.is_sites()) attributes.push_back({"featureType", "timeSeries"});
  return attributes;
}

std::string truth_name(const Recipe& recipe, std::size_t variable) {
  const std::string which = recipe.variables.size() == 1 ? "" : "_" + recipe.variables[variable].name;
  return fmt::format("truth_{}{}.nc", recipe.output.name, which);
}

}  // namespace lagscape
