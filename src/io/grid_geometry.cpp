#include "io/grid_geometry.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>
#include <numeric>

#include "io/coordinate_roles.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();
constexpr double kDegreeSlack = 1e-6;    // of box edges and of longitudes computed modulo 360
constexpr double kSameCellShare = 1e-3;  // of a cell: coordinates of two files may differ by rounding
constexpr double kRadiusOfRotatedGrids =
    6371229.0;  // sphere of the weather models that use rotated poles; common practice

std::string place_of(const NcFile& file, const NcVariable& variable) {
  return fmt::format("file: {}, variable: {}", file.path(), variable.path);
}

// ---- reading --------------------------------------------------------------------------------------------------------

std::vector<double> read_bounds(const NcFile& file, const NcVariable& axis, const Attributes& attributes,
                                std::size_t size) {
  const std::string name = text_attribute(attributes, "bounds");
  if (name.empty()) return {};
  const auto variable = file.find(name, axis.group);  // often missing although it is named
  if (!variable || variable->dims.size() != 2 || variable->dims[0].length != size || variable->dims[1].length != 2 ||
      variable->type == NC_CHAR || variable->type == NC_STRING)
    return {};
  return coordinate_values(file, *variable);
}

SpaceAxis read_axis(const NcFile& file, const NcVariable& variable) {
  const Attributes attributes = file.attributes(variable);
  SpaceAxis axis;
  axis.name = variable.name();
  axis.standard_name = text_attribute(attributes, "standard_name");
  axis.units = text_attribute(attributes, "units");
  axis.values = coordinate_values(file, variable);
  axis.bounds = read_bounds(file, variable, attributes, axis.values.size());
  if (const std::string text = text_attribute(attributes, "long_name"); !text.empty())
    axis.extra.push_back({"long_name", text});
  return axis;
}

void require_monotone(const std::vector<double>& values, const std::string& where) {
  const bool up = values.size() < 2 || values[1] > values[0];
  for (std::size_t i = 0; i < values.size(); ++i) {
    const bool bad =
        !std::isfinite(values[i]) || (i > 0 && !(up ? values[i] > values[i - 1] : values[i] < values[i - 1]));
    if (bad)
      throw Error(
          ErrorKind::input,
          fmt::format("the coordinate does not run steadily up or down: value {} of {} is {}{}", i + 1, values.size(),
                      number_text(values[i]), i > 0 ? " after " + number_text(values[i - 1]) : ""),
          where, "correct the coordinate in the file; rows and columns must be in the order of their places");
  }
}

// 359.95, 0.05 -> 359.95, 360.05.
bool unwrap(std::vector<double>& longitudes) {
  bool changed = false;
  for (std::size_t i = 1; i < longitudes.size(); ++i) {
    const double turns = std::round((longitudes[i] - longitudes[i - 1]) / 360);
    const bool jump = std::fabs(longitudes[i] - longitudes[i - 1]) > 180;
    if (!jump || !std::isfinite(turns)) continue;
    longitudes[i] -= 360 * turns;
    changed = true;
  }
  return changed;
}

// Brings the bounds of longitudes to the turn of their cells; a cell may be as wide as the globe.
void fit_bounds(SpaceAxis& axis) {
  for (std::size_t i = 0; i < axis.bounds.size(); ++i) {
    const double away = axis.values[i / 2] - axis.bounds[i];
    if (std::fabs(away) > 180 + kDegreeSlack) axis.bounds[i] += 360 * std::round(away / 360);
  }
}

void read_rectangle(const NcFile& file, const VariableLayout& layout, Geometry& geometry,
                    std::vector<std::string>& notes) {
  geometry.y = read_axis(file, *layout.y);
  geometry.x = read_axis(file, *layout.x);
  if (layout.kind == GeometryKind::latlon) {
    geometry.y.standard_name = "latitude";
    geometry.y.units = "degrees_north";
    geometry.x.standard_name = "longitude";
    geometry.x.units = "degrees_east";
    if (unwrap(geometry.x.values)) notes.emplace_back("longitudes wrap inside the grid; made to run on");
    fit_bounds(geometry.x);
  } else {
    if (geometry.y.standard_name.empty()) geometry.y.standard_name = "projection_y_coordinate";
    if (geometry.x.standard_name.empty()) geometry.x.standard_name = "projection_x_coordinate";
  }
  require_monotone(geometry.y.values, place_of(file, *layout.y));
  require_monotone(geometry.x.values, place_of(file, *layout.x));
}

// Values of a 2-D coordinate as row * cols + col, whatever the order of its dimensions.
std::vector<double> read_surface(const NcFile& file, const NcVariable& coordinate, const NcDim& row,
                                 const NcDim& column) {
  std::vector<double> values = coordinate_values(file, coordinate);
  if (coordinate.dims[0].id == row.id) return values;
  std::vector<double> turned(values.size());
  for (std::size_t c = 0; c < column.length; ++c)
    for (std::size_t r = 0; r < row.length; ++r) turned[r * column.length + c] = values[c * row.length + r];
  return turned;
}

std::vector<std::string> site_names(const NcFile& file, const VariableLayout& layout, const std::string& dim,
                                    std::size_t count, std::vector<std::string>& notes) {
  std::vector<std::string> names;
  if (layout.names) names = file.texts(*layout.names);
  names.resize(count);
  const bool coordinate =
      layout.names && layout.names->name() == dim && layout.names->type != NC_CHAR && layout.names->type != NC_STRING;
  std::map<std::string, int> seen;
  bool repeated = false;
  for (std::size_t i = 0; i < count; ++i) {
    if (names[i].empty())
      names[i] = dim.empty() ? layout.variable.name() : fmt::format("{} {}", dim, i + 1);
    else if (coordinate)
      names[i] = fmt::format("{} {}", dim, names[i]);
    if (const int times = ++seen[names[i]]; times > 1) {
      names[i] += fmt::format(" ({})", times);
      repeated = true;
    }
  }
  if (repeated) notes.emplace_back("some sites have the same name; later ones got a number");
  return names;
}

void read_sites(const NcFile& file, const VariableLayout& layout, Geometry& geometry, std::vector<std::string>& notes) {
  const auto at = layout.position(DimRole::column);
  const std::string dim = at ? layout.variable.dims[*at].name : "";
  geometry.site_names = site_names(file, layout, dim, geometry.cols, notes);
  if (layout.lat && layout.lon) {
    geometry.lat = coordinate_values(file, *layout.lat);
    geometry.lon = coordinate_values(file, *layout.lon);
  } else {
    notes.emplace_back("the sites have no coordinates in the file");
  }
  if (layout.altitude) geometry.altitude = coordinate_values(file, *layout.altitude);
}

GridMapping read_mapping(const NcFile& file, const NcVariable& variable, std::vector<std::string>& notes) {
  GridMapping mapping{variable.name(), file.attributes(variable)};
  std::erase_if(mapping.attributes,
                [](const Attribute& a) { return a.name == "_FillValue" || a.name.starts_with("_Chunk"); });
  const auto has = [&](const char* name) { return find_attribute(mapping.attributes, name) != nullptr; };
  const bool rotated = text_attribute(mapping.attributes, "grid_mapping_name") == "rotated_latitude_longitude";
  if (rotated && !has("earth_radius") && !has("semi_major_axis") && !has("crs_wkt")) {
    mapping.attributes.push_back({"earth_radius", std::vector<double>{kRadiusOfRotatedGrids}});
    notes.push_back(fmt::format("the rotated pole '{}' names no ellipsoid: a sphere of {} m is assumed", mapping.name,
                                kRadiusOfRotatedGrids));
  }
  return mapping;
}

// ---- comparing ------------------------------------------------------------------------------------------------------

double smallest_step(const std::vector<double>& values) {
  double step = std::numeric_limits<double>::infinity();
  for (std::size_t i = 1; i < values.size(); ++i) step = std::min(step, std::fabs(values[i] - values[i - 1]));
  return std::isfinite(step) ? step : 1;
}

std::string difference(const char* what, const std::vector<double>& a, const std::vector<double>& b, double slack) {
  if (a.size() != b.size()) return fmt::format("{} {} values against {}", what, b.size(), a.size());
  for (std::size_t i = 0; i < a.size(); ++i) {
    const bool same = std::fabs(a[i] - b[i]) <= slack || (std::isnan(a[i]) && std::isnan(b[i]));
    if (!same) return fmt::format("{} number {} is {} against {}", what, i + 1, number_text(b[i]), number_text(a[i]));
  }
  return {};
}

std::string difference(const Geometry& a, const Geometry& b) {
  if (a.kind != b.kind || a.rows != b.rows || a.cols != b.cols)
    return fmt::format("{} against {}", b.describe(), a.describe());
  for (std::size_t i = 0; i < a.site_names.size(); ++i)
    if (a.site_names[i] != b.site_names[i])
      return fmt::format("site {} is '{}' against '{}'", i + 1, b.site_names[i], a.site_names[i]);
  std::string found = difference("row coordinate", a.y.values, b.y.values, kSameCellShare * smallest_step(a.y.values));
  if (found.empty())
    found = difference("column coordinate", a.x.values, b.x.values, kSameCellShare * smallest_step(a.x.values));
  if (found.empty()) found = difference("latitude", a.lat, b.lat, kSameCellShare);
  if (found.empty()) found = difference("longitude", a.lon, b.lon, kSameCellShare);
  return found;
}

// ---- arranging ------------------------------------------------------------------------------------------------------

std::vector<ColumnRun> runs_of(const std::vector<std::size_t>& order) {
  std::vector<ColumnRun> runs;
  for (std::size_t i = 0; i < order.size(); ++i) {
    if (!runs.empty()) {
      ColumnRun& last = runs.back();
      const std::size_t previous = order[i - 1];
      const bool up = order[i] == previous + 1 && (last.count == 1 || !last.reversed);
      const bool down = order[i] + 1 == previous && (last.count == 1 || last.reversed);
      if (up || down) {
        last.reversed = down;
        ++last.count;
        continue;
      }
    }
    runs.push_back({i, order[i], 1, false});
  }
  return runs;
}

// "180 x 360 cells, lat ..., lon ..., 1 apart" or "12 sites, lat ..., lon ...".
std::string covered(const Geometry& geometry) {
  if (geometry.is_sites()) return fmt::format("{}, {}", geometry.describe(), extent_words(geometry.lat, geometry.lon));
  if (geometry.kind != GeometryKind::latlon) return geometry.describe();
  if (geometry.rows < 2 || geometry.cols < 2) return geometry.describe();
  return fmt::format("{}; their centres are {} by {} degrees apart", geometry.describe(),
                     human_number(smallest_step(geometry.y.values)), human_number(smallest_step(geometry.x.values)));
}

[[noreturn]] void refuse_box(const std::array<double, 4>& box, const Geometry& geometry, const char* what) {
  throw Error(ErrorKind::input,
              fmt::format("no {} lies in the box {}, {}, {}, {}: the data cover {}", what, box[0], box[1], box[2],
                          box[3], covered(geometry)),
              "[input] box", "the box is [west, south, east, north] in degrees; widen it or leave it out");
}

/// Degrees east of the west edge, 0 .. 360.
double east_of(double west, double longitude) {
  const double away = longitude - west - 360 * std::floor((longitude - west) / 360);
  return away > 360 - kDegreeSlack ? 0 : away;
}

bool in_box(const std::array<double, 4>& box, double lat, double lon) {
  const double width = box[2] - box[0] >= 360 ? 360 : east_of(box[0], box[2]);
  return lat >= box[1] - kDegreeSlack && lat <= box[3] + kDegreeSlack && east_of(box[0], lon) <= width + kDegreeSlack;
}

std::vector<double> picked(const std::vector<double>& values, const std::vector<std::size_t>& order) {
  std::vector<double> out;
  if (values.empty()) return out;
  out.reserve(order.size());
  for (const std::size_t i : order) out.push_back(values[i]);
  return out;
}

// Rows [first, first + count) and these columns of a grid.
Geometry cut(const Geometry& in, std::size_t first, std::size_t count, const std::vector<std::size_t>& order) {
  Geometry out = in;
  out.rows = count;
  out.cols = order.size();
  const auto rows = [&](std::vector<double>& values, std::size_t each) {
    if (values.empty()) return;
    values.erase(values.begin() + static_cast<std::ptrdiff_t>((first + count) * each), values.end());
    values.erase(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(first * each));
  };
  rows(out.y.values, 1);
  rows(out.y.bounds, 2);
  out.x.values = picked(in.x.values, order);
  out.x.bounds.clear();
  const bool reversed = in.x.values.size() > 1 && in.x.values[1] < in.x.values[0];
  if (!in.x.bounds.empty())
    for (const std::size_t i : order)
      for (const std::size_t side : {0U, 1U}) out.x.bounds.push_back(in.x.bounds[2 * i + (reversed ? 1 - side : side)]);
  for (auto [from, to] : {std::pair(&in.lat, &out.lat), std::pair(&in.lon, &out.lon)}) {
    if (from->empty()) continue;
    to->clear();
    for (std::size_t r = first; r < first + count; ++r)
      for (const std::size_t c : order) to->push_back((*from)[r * in.cols + c]);
  }
  return out;
}

std::vector<std::size_t> all_columns(const Geometry& geometry) {
  std::vector<std::size_t> order(geometry.cols);
  std::iota(order.begin(), order.end(), std::size_t{0});
  if (geometry.x.values.size() > 1 && geometry.x.values[1] < geometry.x.values[0])
    std::reverse(order.begin(), order.end());
  return order;
}

void shift_longitudes(Geometry& geometry, const std::vector<double>& values) {
  geometry.x.values = values;
  fit_bounds(geometry.x);
}

/// The longitudes span the globe once.
bool is_global(const std::vector<double>& ascending) {
  if (ascending.size() < 2) return false;
  const double span = ascending.back() - ascending.front(), step = span / static_cast<double>(ascending.size() - 1);
  return std::fabs(span + step - 360) < step / 2;
}

// Columns in order of longitude: leaves out those at the end that are the first ones once more, a turn further on (both
// 0 and 360), which would count twice in whatever is told about the map.
void drop_repeated(std::vector<std::size_t>& order, std::vector<double>& ascending, std::vector<std::string>& notes) {
  if (ascending.size() < 3) return;
  const double slack = kSameCellShare * smallest_step(ascending);
  const auto repeated = [&] {
    const double before = ascending.back() - 360;
    const auto at = std::lower_bound(ascending.begin(), ascending.end(), before - slack);
    return before >= ascending.front() - slack && *at <= before + slack;
  };
  const std::size_t all = ascending.size();
  const double last = ascending.back();
  while (ascending.size() > 1 && repeated()) {
    ascending.pop_back();
    order.pop_back();
  }
  if (const std::size_t dropped = all - ascending.size(); dropped == 1)
    notes.push_back(fmt::format("the column at longitude {} repeats the one at {}; it is left out", number_text(last),
                                number_text(ascending.front())));
  else if (dropped > 1)
    notes.push_back(fmt::format("the last {} columns, up to longitude {}, repeat the first ones; they are left out",
                                dropped, number_text(last)));
}

Arrangement arrange_latlon_box(const Geometry& in, const std::array<double, 4>& box, std::vector<std::string>& notes) {
  std::size_t first = in.rows, end = 0;
  for (std::size_t r = 0; r < in.rows; ++r)
    if (in.y.values[r] >= box[1] - kDegreeSlack && in.y.values[r] <= box[3] + kDegreeSlack) {
      first = std::min(first, r);
      end = r + 1;
    }
  if (first >= end) refuse_box(box, in, "centre of a row of cells");
  const double width = box[2] - box[0] >= 360 ? 360 : east_of(box[0], box[2]);
  std::vector<std::size_t> single = all_columns(in);
  std::vector<double> ascending = picked(in.x.values, single);
  drop_repeated(single, ascending, notes);
  std::vector<std::pair<double, std::size_t>> inside;
  for (const std::size_t c : single)
    if (const double away = east_of(box[0], in.x.values[c]); away <= width + kDegreeSlack) inside.emplace_back(away, c);
  if (inside.empty()) refuse_box(box, in, "centre of a column of cells");
  std::sort(inside.begin(), inside.end());
  std::vector<std::size_t> order;
  std::vector<double> longitudes;
  for (const auto& [away, c] : inside) {
    order.push_back(c);
    // The longitude of the file itself wherever it lies in the frame of the box: exact, free of the arithmetic above.
    const double turns = std::round((box[0] + away - in.x.values[c]) / 360);
    longitudes.push_back(in.x.values[c] + 360 * turns);
  }
  Arrangement out{cut(in, first, end - first, order), {first, runs_of(order)}, {}};
  shift_longitudes(out.geometry, longitudes);
  return out;
}

Arrangement arrange_latlon(const Geometry& in, LongitudeRule longitude, std::vector<std::string>& notes) {
  std::vector<std::size_t> order = all_columns(in);
  std::vector<double> values = picked(in.x.values, order);
  const bool reversed = in.cols > 1 && order.front() > order.back();
  if (reversed) notes.emplace_back("columns reversed, so that longitudes increase");
  drop_repeated(order, values, notes);
  const bool beyond = values.back() >= 180 + kDegreeSlack;
  if (longitude == LongitudeRule::automatic && beyond && is_global(values)) {
    const auto from = std::lower_bound(values.begin(), values.end(), 180 - kDegreeSlack) - values.begin();
    for (auto at = values.begin() + from; at != values.end(); ++at) *at -= 360;
    std::rotate(values.begin(), values.begin() + from, values.end());
    std::rotate(order.begin(), order.begin() + from, order.end());
    notes.emplace_back("longitudes rolled from 0..360 to -180..180 (longitude = \"as-input\" keeps them)");
  }
  Arrangement out{cut(in, 0, in.rows, order), {0, runs_of(order)}, {}};
  shift_longitudes(out.geometry, values);
  return out;
}

// Cells whose 2-D latitude and longitude lie in the box; rows and columns without any are cut off, the rest excluded.
Arrangement arrange_surface_box(const Geometry& in, const std::array<double, 4>& box) {
  if (in.lat.empty())
    throw Error(ErrorKind::job,
                fmt::format("[input] box is in degrees and needs the latitude and longitude of each cell, and the file "
                            "has none{}",
                            in.x.units.empty() ? "" : fmt::format(", only coordinates in '{}'", in.x.units)),
                "", "leave out the box, or cut the file before by rows and columns");
  std::size_t first = in.rows, end = 0, left = in.cols, right = 0;
  for (std::size_t cell = 0; cell < in.cells(); ++cell) {
    if (!in_box(box, in.lat[cell], in.lon[cell])) continue;
    first = std::min(first, cell / in.cols);
    end = std::max(end, cell / in.cols + 1);
    left = std::min(left, cell % in.cols);
    right = std::max(right, cell % in.cols + 1);
  }
  if (first >= end) refuse_box(box, in, "centre of a cell");
  std::vector<std::size_t> order = all_columns(in);
  std::erase_if(order, [&](std::size_t c) { return c < left || c >= right; });
  Arrangement out{cut(in, first, end - first, order), {first, runs_of(order)}, {}};
  bool any = false;
  for (std::size_t cell = 0; cell < out.geometry.cells(); ++cell) {
    const bool outside = !in_box(box, out.geometry.lat[cell], out.geometry.lon[cell]);
    out.excluded.push_back(outside ? 1 : 0);
    any = any || outside;
  }
  if (!any) out.excluded.clear();
  return out;
}

Arrangement arrange_sites(const Geometry& in, const std::optional<std::array<double, 4>>& box,
                          std::vector<std::string>& notes) {
  std::vector<std::size_t> order(in.cols);
  std::iota(order.begin(), order.end(), std::size_t{0});
  if (box) {
    if (in.lat.empty())
      throw Error(ErrorKind::job, "[input] box needs the coordinates of the sites, and the file has none", "",
                  "leave out the box");
    std::erase_if(order, [&](std::size_t i) { return !in_box(*box, in.lat[i], in.lon[i]); });  // NaN is in no box
    if (order.empty()) refuse_box(*box, in, "site");
    notes.push_back(fmt::format("{} of {} sites lie in the box", order.size(), in.cols));
  }
  Arrangement out{in, {0, runs_of(order)}, {}};
  out.geometry.cols = order.size();
  out.geometry.lat = picked(in.lat, order);
  out.geometry.lon = picked(in.lon, order);
  out.geometry.altitude = picked(in.altitude, order);
  out.geometry.site_names.clear();
  for (const std::size_t i : order) out.geometry.site_names.push_back(in.site_names[i]);
  return out;
}

}  // namespace

std::string extent_words(const std::vector<double>& lat, const std::vector<double>& lon) {
  const auto span = [](const std::vector<double>& values) {
    double low = kInfinity, high = -kInfinity;
    for (const double value : values) {
      low = std::fmin(low, value);
      high = std::fmax(high, value);
    }
    return low <= high ? fmt::format("{} to {}", human_number(low, 6), human_number(high, 6)) : "unknown";
  };
  return fmt::format("lat {}, lon {}", span(lat), span(lon));
}

Geometry read_geometry(const NcFile& file, const VariableLayout& layout, std::vector<std::string>& notes) {
  Geometry geometry;
  geometry.kind = layout.kind;
  geometry.rows = layout.length(DimRole::row);
  geometry.cols = layout.length(DimRole::column);
  if (layout.mapping) geometry.mapping = read_mapping(file, *layout.mapping, notes);
  if (layout.kind == GeometryKind::sites) {
    read_sites(file, layout, geometry, notes);
    return geometry;
  }
  const NcDim& row = layout.variable.dims[*layout.position(DimRole::row)];
  const NcDim& column = layout.variable.dims[*layout.position(DimRole::column)];
  geometry.y.name = row.name;
  geometry.x.name = column.name;
  if (layout.y && layout.x) read_rectangle(file, layout, geometry, notes);
  if (layout.lat && layout.lon) {
    geometry.lat = read_surface(file, *layout.lat, row, column);
    geometry.lon = read_surface(file, *layout.lon, row, column);
  }
  return geometry;
}

void require_same_geometry(const Geometry& first, const std::string& first_file, const Geometry& other,
                           const std::string& other_file) {
  const std::string found = difference(first, other);
  if (!found.empty())
    throw Error(ErrorKind::input, fmt::format("the files do not have the same cells: {}", found),
                fmt::format("file: {}, compared with {}", other_file, first_file),
                "bring the files to one grid first, or leave out those that differ");
}

Arrangement arrange(const Geometry& in_file, const std::optional<std::array<double, 4>>& box, LongitudeRule longitude,
                    std::vector<std::string>& notes) {
  if (in_file.is_sites()) return arrange_sites(in_file, box, notes);
  if (in_file.kind == GeometryKind::latlon)
    return box ? arrange_latlon_box(in_file, *box, notes) : arrange_latlon(in_file, longitude, notes);
  if (box) return arrange_surface_box(in_file, *box);
  const std::vector<std::size_t> order = all_columns(in_file);
  return {cut(in_file, 0, in_file.rows, order), {0, runs_of(order)}, {}};
}

}  // namespace lagscape
