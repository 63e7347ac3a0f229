// Writes one result of each kind of geometry through the result writer, with values from which a reader can tell the
// cell: row * 100 + col + 0.25 in `decorrelation_time` (last row, last column missing), lag * 1000 + row * 100 + col in
// the cube. Usage: make_result CASE FILE
#include <cmath>
#include <cstdio>
#include <exception>
#include <limits>
#include <string>
#include <vector>

#include "lagscape/io/result_writer.h"
#include "support/geometries.h"

namespace {

using namespace lagscape;

using test::degrees;
using test::steps;

Geometry projected(const std::string& unit, double scale) {
  Geometry place;
  place.kind = GeometryKind::projected;
  place.rows = 5;
  place.cols = 7;
  place.y = {"y", "projection_y_coordinate", unit, steps(-460 * scale, -10 * scale, 5), {}, {}};
  place.x = {"x", "projection_x_coordinate", unit, steps(600 * scale, 10 * scale, 7), {}, {}};
  place.mapping = GridMapping{"lambert",
                              {{"grid_mapping_name", "lambert_conformal_conic"},
                               {"standard_parallel", std::vector<double>{25, 60}},
                               {"latitude_of_projection_origin", std::vector<double>{42.5}},
                               {"longitude_of_central_meridian", std::vector<double>{-100}},
                               {"false_easting", std::vector<double>{0}},
                               {"false_northing", std::vector<double>{0}},
                               {"semi_major_axis", std::vector<double>{6378137}},
                               {"inverse_flattening", std::vector<double>{298.257223563}}}};
  return place;
}

Geometry rotated_pole() {
  Geometry place;
  place.kind = GeometryKind::projected;
  place.rows = 5;
  place.cols = 7;
  place.y = {"rlat", "grid_latitude", "degrees", steps(-2, 1, 5), {}, {}};
  place.x = {"rlon", "grid_longitude", "degrees", steps(-3, 1, 7), {}, {}};
  place.mapping = GridMapping{"rotated_pole",
                              {{"grid_mapping_name", "rotated_latitude_longitude"},
                               {"grid_north_pole_latitude", std::vector<double>{39.25}},
                               {"grid_north_pole_longitude", std::vector<double>{-162}},
                               {"earth_radius", std::vector<double>{6371229}}}};
  return place;
}

Geometry curvilinear() {
  Geometry place;
  place.kind = GeometryKind::curvilinear;
  place.rows = 30;
  place.cols = 40;
  place.y.name = "nj";
  place.x.name = "ni";
  for (std::size_t row = 0; row < place.rows; ++row)
    for (std::size_t col = 0; col < place.cols; ++col) {
      const double r = static_cast<double>(row), c = static_cast<double>(col);
      place.lat.push_back(40 + 0.2 * r + 0.02 * c);
      place.lon.push_back(5 + 0.25 * c - 0.03 * r);
    }
  return place;
}

Geometry index_grid() {
  Geometry place;
  place.rows = 5;
  place.cols = 7;
  place.y.name = "row";
  place.x.name = "col";
  return place;
}

Geometry sites() {
  Geometry place;
  place.kind = GeometryKind::sites;
  place.rows = 1;
  place.cols = 3;
  place.lat = {10, 20, 30};
  place.lon = {100, -110, 120};
  place.site_names = {"Alder Weir", "Birch, \"Upper\"", "Cold Spring"};
  return place;
}

Geometry geometry_of(const std::string& name) {
  if (name == "north_up") return degrees(steps(45, -10, 4), steps(5, 10, 6));
  if (name == "south_up") return degrees(steps(15, 10, 4), steps(5, 10, 6));
  if (name == "lon_0_360") return degrees(steps(75, -30, 6), steps(15, 30, 12));
  if (name == "lon_180") return degrees(steps(75, -30, 6), steps(-165, 30, 12));
  if (name == "across_180") return degrees(steps(45, -10, 4), steps(165, 10, 4));
  if (name == "tenths") return degrees(steps(59.95, -0.1, 20), steps(-9.95, 0.1, 30));
  if (name == "uneven_lat") return degrees({60, 50, 42, 36, 31, 27, 24}, steps(5, 10, 6));
  if (name == "projected_km") return projected("km", 1);
  if (name == "projected_m") return projected("m", 1000);
  if (name == "rotated_pole") return rotated_pole();
  if (name == "curvilinear") return curvilinear();
  if (name == "index") return index_grid();
  return sites();
}

MapSpec described(const std::string& name, MapType type, const std::string& units) {
  MapSpec map;
  map.name = name;
  map.type = type;
  map.long_name = name;
  map.units = units;
  return map;
}

MapSet result_set(const std::string& name) {
  MapSet set;
  set.geometry = geometry_of(name);
  set.time = TimeAxis(Calendar::standard, {StepKind::months, 1}, seconds_of(Calendar::standard, {1981, 1, 15}), 180);
  set.lags = 4;
  set.maps = {described("status", MapType::i16, ""),
              described("valid_count", MapType::i32, "1"),
              described("decorrelation_time", MapType::f32, "month"),
              described("first_time", MapType::f64, set.time.cf_units()),
              described("trend_class", MapType::i8, ""),
              described("autocorrelation", MapType::f32, "1")};
  set.maps[0].flag_masks = {1, 2, 4};
  set.maps[0].flag_meanings = "no_data too_few constant";
  set.maps[1].standard_name = "number_of_observations";
  set.maps[2].ancillary = "valid_count";
  set.maps[4].flag_values = {0, 1, 2};
  set.maps[4].flag_meanings = "not_established rising falling";
  set.maps[5].axis = LayerAxis::lag;
  set.global = {{"Conventions", "CF-1.10, ACDD-1.3"}, {"title", "Memory of the invented Harrow Basin"}};
  return set;
}

double value_of(const MapSet& set, const MapSpec& map, std::size_t layer, std::size_t cell) {
  const std::size_t row = cell / set.geometry.cols, col = cell % set.geometry.cols;
  const double place = static_cast<double>(row * 100 + col);
  if (cell + 1 == set.geometry.cells()) return std::numeric_limits<double>::quiet_NaN();
  if (map.name == "status") return static_cast<double>(cell % 2 == 0 ? 0 : 4);
  if (map.name == "trend_class") return static_cast<double>(cell % 3);
  if (map.name == "decorrelation_time") return place + 0.25;
  return static_cast<double>(layer) * 1000 + place;
}

}  // namespace

int main(int argc, char** argv) try {
  if (argc != 3) return 2;
  const MapSet set = result_set(argv[1]);
  const auto result = create_result(argv[2], set, true);
  const CellRange all{0, set.geometry.cells()};
  for (std::size_t map = 0; map < set.maps.size(); ++map) {
    std::vector<double> values;
    for (std::size_t layer = 0; layer < set.layers(set.maps[map]); ++layer)
      for (std::size_t cell = 0; cell < all.count; ++cell) values.push_back(value_of(set, set.maps[map], layer, cell));
    result->write(map, all, std::span<const double>(values));
  }
  result->commit();
  return 0;
} catch (const std::exception& error) {
  std::fprintf(stderr, "%s\n", error.what());
  return 1;
}
