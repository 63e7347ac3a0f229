#include "lagscape/forge/forge.h"

#include <fmt/format.h>

#include <algorithm>

#include "forge/data_files.h"
#include "forge/recipe.h"
#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr double kMostPastBytes = 1024.0 * 1024 * 1024;

std::vector<std::string> file_names(const Recipe& recipe) {
  std::vector<std::string> names;
  for (const FileFormat format : recipe.output.formats) {
    const std::string ending = format == FileFormat::csv ? ".csv" : ".nc";
    for (const TimePiece& piece : time_pieces(recipe)) names.push_back(piece.stem + ending);
    if (format == FileFormat::csv) names.push_back(recipe.output.sites_file);
  }
  for (std::size_t v = 0; recipe.output.truth && v < recipe.variables.size(); ++v)
    names.push_back(truth_name(recipe, v));
  return names;
}

/// Long memory keeps the whole past of its cells while all of them are made at once.
void check_memory(const Recipe& recipe) {
  if (recipe.output.layout == FileLayout::series && !recipe.geometry.is_sites()) return;
  std::size_t cells = 0;
  for (const ForgedVariable& variable : recipe.variables) {
    cells += static_cast<std::size_t>(
        std::count_if(variable.patch_of_cell.begin(), variable.patch_of_cell.end(), [&](int patch) {
          return patch != kLake && variable.patches[static_cast<std::size_t>(patch)].process.is_long_memory();
        }));
  }
  const double bytes = static_cast<double>(cells) * static_cast<double>(recipe.axis.size()) * sizeof(double);
  if (bytes <= kMostPastBytes) return;
  throw Error(ErrorKind::job,
              fmt::format("the past of {} cells with long memory would take {}, more than {}", grouped(cells),
                          human_bytes(bytes), human_bytes(kMostPastBytes)),
              "[output] layout", "use layout = \"series\", which makes the grid in bands, or fewer cells or steps");
}

std::string memory_words(const Process& process, const TimeAxis& axis) {
  if (process.is_long_memory()) return fmt::format("ARFIMA(0,d,0), d = {}", human_number(process.exponent()));
  std::vector<std::string> coefficients;
  for (const double value : process.coefficients()) coefficients.push_back(human_number(value, 4));
  const std::string kind =
      coefficients.empty() ? "white noise" : fmt::format("AR({}) {}", coefficients.size(), join(coefficients, ", "));
  return fmt::format("{}, decorrelation time {} {}s", kind,
                     human_number(process.decorrelation_time() * axis.lag_unit_per_step(), 4), axis.lag_unit());
}

std::string describe(const Recipe& recipe) {
  const TimeAxis& axis = recipe.axis;
  std::string text = recipe.title.empty() ? "" : recipe.title + "\n";
  text += fmt::format("{} steps, {}, {} to {}\n{}\n", grouped(axis.size()), step_words(axis.step()), axis.label(0),
                      axis.label(axis.size() - 1), recipe.geometry.describe());
  for (const ForgedVariable& variable : recipe.variables) {
    for (std::size_t i = 0; i < variable.patches.size(); ++i) {
      const Patch& patch = variable.patches[i];
      const auto cells = std::count(variable.patch_of_cell.begin(), variable.patch_of_cell.end(), static_cast<int>(i));
      text += fmt::format("{} in {} ({} {}): {}; trend {} {}\n", variable.name, patch.name,
                          grouped(static_cast<std::size_t>(cells)), recipe.geometry.is_sites() ? "sites" : "cells",
                          memory_words(patch.process, axis), human_number(patch.trend, 4),
                          variable.units == "1" ? "a year" : variable.units + " a year");
    }
  }
  return text;
}

}  // namespace

ForgeReport forge_recipe(const std::string& recipe_path, const std::vector<std::string>& overrides, bool replace,
                         const Log& log, const std::function<void()>& checkpoint) {
  const std::function<void()> check = checkpoint ? checkpoint : [] {};
  const Recipe recipe = read_recipe(recipe_path, overrides);
  check_memory(recipe);
  PartFiles files(recipe.output.folder, file_names(recipe), replace,
                  "choose another folder with --set output.folder=DIR");
  log.note(
      fmt::format("making {} values", grouped(recipe.axis.size() * recipe.geometry.cells() * recipe.variables.size())));
  MissingCounts missing;
  for (const FileFormat format : recipe.output.formats) {
    missing = format == FileFormat::csv ? write_csv(recipe, files, check) : write_netcdf(recipe, format, files, check);
  }
  for (std::size_t v = 0; recipe.output.truth && v < recipe.variables.size(); ++v) {
    write_truth(recipe, v, missing[v], files.part(truth_name(recipe, v)));
  }
  check();
  return {files.commit(), describe(recipe)};
}

}  // namespace lagscape
