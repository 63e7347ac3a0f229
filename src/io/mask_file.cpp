#include "io/mask_file.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/slab_reader.h"
#include "io/value_rules.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

Geometry upside_down(Geometry geometry) {
  std::reverse(geometry.y.values.begin(), geometry.y.values.end());
  return geometry;
}

bool runs_other_way(const Geometry& a, const Geometry& b) {
  return a.y.values.size() > 1 && a.y.values.size() == b.y.values.size() && a.lat.empty() &&
         (a.y.values[1] > a.y.values[0]) != (b.y.values[1] > b.y.values[0]);
}

bool wanted(const InputRequest::Mask& mask, double value) {
  if (std::isnan(value)) return false;
  if (mask.min && value < *mask.min) return false;
  if (mask.max && value > *mask.max) return false;
  return mask.values.empty() || std::find(mask.values.begin(), mask.values.end(), value) != mask.values.end();
}

}  // namespace

std::vector<unsigned char> read_mask(const InputRequest& request, const Geometry& panel) {
  const InputRequest::Mask& mask = *request.mask;
  const NcFile file = NcFile::open(mask.file);
  const VariableLayout layout = find_layout(file, mask.variable, {});
  const std::string where = fmt::format("file: {}, variable: {}", mask.file, layout.variable.path);
  if (layout.length(DimRole::time) > 1)
    throw Error(ErrorKind::input, fmt::format("the mask has {} time steps, expected one", layout.length(DimRole::time)),
                where, "write one step of it to a file of its own");
  std::vector<std::string> notes;
  const Geometry in_file = read_geometry(file, layout, notes);
  const Arrangement arranged = arrange(in_file, request.box, request.longitude, notes);
  const bool flip = runs_other_way(arranged.geometry, panel);
  require_same_geometry(panel, "the files of the job", flip ? upside_down(arranged.geometry) : arranged.geometry,
                        mask.file);

  InputRequest plain;  // the job's missing_values and valid_range are about the data, not about the mask
  const ValueRules rules = read_value_rules(file, layout.variable, plain, notes);
  std::vector<std::byte> stored(panel.cells() * rules.bytes());
  read_stored(file, layout, arranged.map, panel.cols, {0, panel.cells()}, 0, 1, rules.bytes(), stored.data());
  std::vector<double> values(panel.cells());
  ValueCounts counts;
  rules.decode(stored.data(), values.size(), values.data(), counts);

  std::vector<unsigned char> excluded(panel.cells());
  for (std::size_t cell = 0; cell < values.size(); ++cell) {
    const std::size_t row = cell / panel.cols, from = flip ? panel.rows - 1 - row : row;
    excluded[cell] = wanted(mask, values[from * panel.cols + cell % panel.cols]) ? 0 : 1;
  }
  return excluded;
}

}  // namespace lagscape
