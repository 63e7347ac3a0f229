#include <fmt/format.h>

#include <cmath>
#include <fstream>

#include "forge/data_files.h"
#include "forge/generator.h"

namespace lagscape {
namespace {

void write_sites(const Geometry& geometry, const std::string& path) {
  std::ofstream file(path, std::ios::binary);
  file << (geometry.altitude.empty() ? "name,lon,lat\n" : "name,lon,lat,altitude\n");
  for (std::size_t i = 0; i < geometry.cols; ++i) {
    file << fmt::format("{},{},{}", geometry.site_names[i], geometry.lon[i], geometry.lat[i]);
    file << (geometry.altitude.empty() ? "\n" : fmt::format(",{}\n", geometry.altitude[i]));
  }
  close_text(file, path);
}

}  // namespace

MissingCounts write_csv(const Recipe& recipe, const PartFiles& files, const Checkpoint& check) {
  const Geometry& geometry = recipe.geometry;
  const ForgedVariable& variable = recipe.variables.front();
  Generator generator(recipe, 0, 0, geometry.cells());
  std::vector<double> values(geometry.cells());
  for (const TimePiece& piece : time_pieces(recipe)) {
    const std::string path = files.part(piece.stem + ".csv");
    std::ofstream file(path, std::ios::binary);
    file << fmt::format("# unit: {}\ndate,{}\n", variable.units, fmt::join(geometry.site_names, ","));
    for (std::size_t t = piece.first; t < piece.first + piece.steps; ++t) {
      check();
      generator.next(values);
      file << recipe.axis.label(t);
      for (const double value : values) {
        if (std::isnan(value))
          file << ',';
        else
          file << fmt::format(",{:.{}f}", stored_value(variable, value), recipe.output.decimals);
      }
      file << '\n';
    }
    close_text(file, path);
  }
  write_sites(geometry, files.part(recipe.output.sites_file));
  return {generator.missing()};
}

}  // namespace lagscape
