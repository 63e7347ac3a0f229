#include "lagscape/io/archive.h"

#include <algorithm>
#include <fstream>
#include <map>

#include "io/nc_sample.h"

namespace lagscape {
namespace {

using namespace test;

constexpr std::size_t kSteps = 6, kRows = 4, kCols = 5;

// The value that every sample file holds at a place: readable in failures.
double value_at(std::size_t t, std::size_t r, std::size_t c) { return static_cast<double>(t * 1000 + r * 10 + c); }

/// What to write; the defaults are a small monthly grid.
struct GridFile {
  std::string order = "tyx";  ///< order of the dimensions
  int mode = NC_NETCDF4;
  nc_type type = NC_FLOAT;
  std::vector<double> lat = range(50, 1, kRows), lon = range(10, 1, kCols);
  std::string time_units = "months since 2001-01-15";
  std::vector<double> times = range(0, 1, kSteps);
  std::vector<std::size_t> chunks;
  std::map<std::size_t, double> changed;  ///< flat index (time, row, col) -> value
  double first_step = 0;                  ///< step number that the first time stands for, in value_at
};

std::size_t size_of(const GridFile& grid, char dim) {
  return dim == 't' ? grid.times.size() : dim == 'y' ? grid.lat.size() : grid.lon.size();
}

std::vector<double> values_of(const GridFile& grid) {
  std::vector<double> values(grid.times.size() * grid.lat.size() * grid.lon.size());
  std::map<char, std::size_t> at;
  std::size_t flat = 0;
  const auto &a = grid.order[0], &b = grid.order[1], &c = grid.order[2];
  for (at[a] = 0; at[a] < size_of(grid, a); ++at[a])
    for (at[b] = 0; at[b] < size_of(grid, b); ++at[b])
      for (at[c] = 0; at[c] < size_of(grid, c); ++at[c]) {
        const std::size_t plain = (at['t'] * grid.lat.size() + at['y']) * grid.lon.size() + at['x'];
        const auto found = grid.changed.find(plain);
        values[flat++] = found != grid.changed.end()
                             ? found->second
                             : value_at(at['t'] + static_cast<std::size_t>(grid.first_step), at['y'], at['x']);
      }
  return values;
}

std::string write(const std::string& path, const GridFile& grid) {
  NcSample s(path, grid.mode);
  std::map<char, int> dims;
  for (const char dim : grid.order)
    dims[dim] = s.dim(dim == 't' ? "time" : dim == 'y' ? "lat" : "lon", size_of(grid, dim));
  s.coordinate("time", {dims['t']}, grid.times, grid.time_units, "time");
  s.coordinate("lat", {dims['y']}, grid.lat, "degrees_north");
  s.coordinate("lon", {dims['x']}, grid.lon, "degrees_east");
  const int var = s.var("wetness", grid.type, {dims[grid.order[0]], dims[grid.order[1]], dims[grid.order[2]]});
  if (!grid.chunks.empty()) ok(nc_def_var_chunking(s.id(), var, NC_CHUNKED, grid.chunks.data()));
  s.text(var, "units", "1");
  s.text(var, "long_name", "soil wetness");
  s.put(var, values_of(grid));
  return s.close();
}

std::vector<double> expected(std::size_t steps = kSteps, std::size_t rows = kRows, std::size_t cols = kCols) {
  std::vector<double> values;
  for (std::size_t t = 0; t < steps; ++t)
    for (std::size_t r = 0; r < rows; ++r)
      for (std::size_t c = 0; c < cols; ++c) values.push_back(value_at(t, r, c));
  return values;
}

std::unique_ptr<TileSource> open(const InputRequest& job) { return open_archive(job, {}); }

std::string refusal(const InputRequest& job, ErrorKind kind = ErrorKind::input) {
  return message_of([&] { open(job); }, kind);
}

// ---- reading --------------------------------------------------------------------------------------------------------

TEST(Archive, GridIsReadAsWrittenInEveryKindOfFile) {
  const Folder folder;
  for (const int mode : {0, NC_64BIT_OFFSET, NC_64BIT_DATA, NC_NETCDF4, NC_NETCDF4 | NC_CLASSIC_MODEL}) {
    GridFile grid;
    grid.mode = mode;
    const auto source = open(request({write(folder / "a.nc", grid)}, "wetness"));
    const Panel& panel = source->panel();
    EXPECT_EQ(panel.variable, "wetness");
    EXPECT_EQ(panel.long_name, "soil wetness");
    EXPECT_EQ(panel.units, "1");
    EXPECT_EQ(panel.geometry.kind, GeometryKind::latlon);
    EXPECT_EQ(panel.geometry.y.values, grid.lat);
    EXPECT_EQ(panel.geometry.x.values, grid.lon);
    EXPECT_EQ(panel.axis.size(), kSteps);
    EXPECT_EQ(panel.axis.step(), (TimeStep{StepKind::months, 1}));
    EXPECT_EQ(panel.axis.label(0), "2001-01-15");
    EXPECT_EQ(panel.stored_bytes_per_value, 4U);
    EXPECT_TRUE(source->excluded().empty());
    expect_same(all_values(*source), expected());
  }
}

TEST(Archive, AnyOrderOfDimensionsGivesTheSameValues) {
  const Folder folder;
  for (const nc_type type : {NC_BYTE, NC_SHORT, NC_FLOAT, NC_DOUBLE})
    for (const char* order : {"tyx", "txy", "ytx", "yxt", "xty", "xyt"}) {
      GridFile grid;
      grid.order = order;
      grid.type = type;
      std::vector<double> wanted = expected();
      if (type == NC_BYTE) {
        for (std::size_t i = 0; i < wanted.size(); ++i) grid.changed[i] = wanted[i] = static_cast<double>(i % 120);
      }
      const auto source = open(request({write(folder / "a.nc", grid)}, "wetness"));
      expect_same(all_values(*source), wanted);
      expect_same(all_values(*source, 1), wanted);
      expect_same(all_values(*source, 3), wanted);
    }
}

TEST(Archive, ChunkShapeDoesNotMatter) {
  const Folder folder;
  for (const std::vector<std::size_t>& chunks :
       {std::vector<std::size_t>{1, kRows, kCols}, {kSteps, 2, 2}, {4, 3, 2}}) {
    GridFile grid;
    grid.chunks = chunks;
    grid.lon = range(0.5, 72, kCols);  // global: rolled, so that slabs are copied
    const auto source = open(request({write(folder / "a.nc", grid)}, "wetness"));
    const auto whole = all_values(*source);
    EXPECT_EQ(whole[0], value_at(0, 0, 3));
    expect_same(all_values(*source, 1), whole);
    EXPECT_TRUE(has(source->panel().storage, "chunks"));
  }
}

TEST(Archive, LanesBeyondTheCountAreNanAndRowsBeyondTheStepsUntouched) {
  const Folder folder;
  const auto source = open(request({write(folder / "a.nc", {})}, "wetness"));
  const auto band = source->read({0, kRows * kCols});
  constexpr std::size_t kPitch = kSteps + 3;
  std::vector<double> out(2 * 4 * kPitch, -7);
  ValueCounts counts;
  band->gather(2, 6, 4, kPitch, out.data(), counts);
  for (std::size_t lane = 0; lane < 8; ++lane)
    for (std::size_t t = 0; t < kPitch; ++t) {
      const double got = out[(lane / 4 * kPitch + t) * 4 + lane % 4];
      if (t >= kSteps)
        EXPECT_EQ(got, -7);
      else if (lane >= 6)
        EXPECT_TRUE(std::isnan(got));
      else
        EXPECT_EQ(got, value_at(t, (2 + lane) / kCols, (2 + lane) % kCols));
    }
}

// ---- longitudes, latitudes, boxes -----------------------------------------------------------------------------------

TEST(Archive, GlobalGridIsRolledUnlessTheJobKeepsIt) {
  const Folder folder;
  GridFile grid;
  grid.lon = {0, 90, 180, 270};
  InputRequest job = request({write(folder / "a.nc", grid)}, "wetness");
  const auto rolled = open(job);
  EXPECT_EQ(rolled->panel().geometry.x.values, (std::vector<double>{-180, -90, 0, 90}));
  EXPECT_TRUE(noted(rolled->panel(), "rolled"));
  const auto values = all_values(*rolled, 2);
  EXPECT_EQ(values[0], value_at(0, 0, 2));
  EXPECT_EQ(values[3], value_at(0, 0, 1));
  EXPECT_EQ(values[5 * kRows * 4 + 3 * 4 + 2], value_at(5, 3, 0));
  job.longitude = LongitudeRule::as_input;
  EXPECT_EQ(open(job)->panel().geometry.x.values, grid.lon);
}

TEST(Archive, MeridianStoredTwiceIsReadOnce) {
  const Folder folder;
  GridFile grid;
  grid.lon = {0, 90, 180, 270, 360};
  InputRequest job = request({write(folder / "a.nc", grid)}, "wetness");
  const auto rolled = open(job);
  EXPECT_EQ(rolled->panel().geometry.x.values, (std::vector<double>{-180, -90, 0, 90}));
  EXPECT_EQ(rolled->panel().geometry.cols, 4U);
  EXPECT_TRUE(noted(rolled->panel(), "the column at longitude 360 repeats the one at 0"));
  const auto values = all_values(*rolled);
  EXPECT_EQ(values[2], value_at(0, 0, 0));
  EXPECT_EQ(values[3], value_at(0, 0, 1));
  EXPECT_EQ(values[4], value_at(0, 1, 2));
  job.longitude = LongitudeRule::as_input;
  EXPECT_EQ(open(job)->panel().geometry.x.values, (std::vector<double>{0, 90, 180, 270}));
  job.box = {{-90, -90, 90, 90}};
  EXPECT_EQ(open(job)->panel().geometry.x.values, (std::vector<double>{-90, 0, 90}));
  grid.lon = {-180, -90, 0, 90, 180};
  EXPECT_EQ(open(request({write(folder / "b.nc", grid)}, "wetness"))->panel().geometry.x.values,
            (std::vector<double>{-180, -90, 0, 90}));
  grid.lon = {0, 120, 240, 360, 480};
  const auto halo = open(request({write(folder / "c.nc", grid)}, "wetness"));
  EXPECT_EQ(halo->panel().geometry.x.values, (std::vector<double>{-120, 0, 120}));
  EXPECT_TRUE(noted(halo->panel(), "the last 2 columns"));
}

TEST(Archive, RegionalLongitudesStayAndWrappedOnesRunOn) {
  const Folder folder;
  GridFile grid;
  grid.lon = {185, 190, 195, 200, 205};
  EXPECT_EQ(open(request({write(folder / "a.nc", grid)}, "wetness"))->panel().geometry.x.values, grid.lon);
  grid.lon = {359.75, 359.85, 359.95, 0.05, 0.15};
  const auto source = open(request({write(folder / "b.nc", grid)}, "wetness"));
  EXPECT_NEAR(source->panel().geometry.x.values[3], 360.05, 1e-12);
  EXPECT_NEAR(source->panel().geometry.x.values[4], 360.15, 1e-12);
  expect_same(all_values(*source), expected());
}

TEST(Archive, DescendingLongitudesAreReversedAndLatitudesKept) {
  const Folder folder;
  GridFile grid;
  grid.lon = range(14, -1, kCols);
  grid.lat = range(60, -2, kRows);
  const auto source = open(request({write(folder / "a.nc", grid)}, "wetness"));
  EXPECT_EQ(source->panel().geometry.x.values, range(10, 1, kCols));
  EXPECT_EQ(source->panel().geometry.y.values, grid.lat);
  EXPECT_EQ(all_values(*source, 1)[kCols * 2 + 1], value_at(0, 2, 3));
}

TEST(Archive, BoundsGoWithTheirColumns) {
  const Folder folder;
  for (const bool descending : {false, true}) {
    NcSample s(folder / "a.nc");
    const int t = s.dim("time", 2), y = s.dim("lat", 1), x = s.dim("lon", 4), nv = s.dim("nv", 2);
    s.coordinate("time", {t}, {0, 1}, "days since 2001-01-01");
    s.coordinate("lat", {y}, {5}, "degrees_north");
    const std::vector<double> up = {0, 90, 180, 270}, up_edges = {-45, 45, 45, 135, 135, 225, 225, 315};
    const int lon = s.coordinate("lon", {x}, descending ? range(270, -90, 4) : up, "degrees_east");
    s.text(lon, "bounds", "lon_bnds");
    s.put(s.var("lon_bnds", NC_DOUBLE, {x, nv}),
          descending ? std::vector<double>{up_edges.rbegin(), up_edges.rend()} : up_edges);
    s.put(s.var("wetness", NC_FLOAT, {t, y, x}), range(0, 1, 8));
    const auto source = open(request({s.close()}, "wetness"));
    EXPECT_EQ(source->panel().geometry.x.values, (std::vector<double>{-180, -90, 0, 90}));
    EXPECT_EQ(source->panel().geometry.x.bounds, (std::vector<double>{-225, -135, -135, -45, -45, 45, 45, 135}));
    EXPECT_EQ(all_values(*source)[0], descending ? 1 : 2);
  }
}

TEST(Archive, CoordinatesOfFloatsBecomeTheirShortestDecimals) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 2), y = s.dim("lat", 2), x = s.dim("lon", 3);
  s.coordinate("time", {t}, {0, 1}, "days since 2001-01-01");
  s.coordinate("lat", {y}, {0.1, 0.2}, "degrees_north", "", NC_FLOAT);
  s.coordinate("lon", {x}, {0.7, 0.8, 0.9}, "degrees_east", "", NC_FLOAT);
  s.put(s.var("wetness", NC_FLOAT, {t, y, x}), range(0, 1, 12));
  const auto source = open(request({s.close()}, "wetness"));
  EXPECT_EQ(source->panel().geometry.x.values, (std::vector<double>{0.7, 0.8, 0.9}));
}

TEST(Archive, BoxCutsRowsAndColumnsAlsoAcrossTheDateLine) {
  const Folder folder;
  GridFile grid;
  grid.lon = range(0, 60, 6);
  InputRequest job = request({write(folder / "a.nc", grid)}, "wetness");
  job.box = {{-70, 51, 65, 52}};
  auto source = open(job);
  EXPECT_EQ(source->panel().geometry.x.values, (std::vector<double>{-60, 0, 60}));
  EXPECT_EQ(source->panel().geometry.y.values, (std::vector<double>{51, 52}));
  auto values = all_values(*source, 1);
  EXPECT_EQ(values[0], value_at(0, 1, 5));
  EXPECT_EQ(values[1], value_at(0, 1, 0));
  EXPECT_EQ(values[5], value_at(0, 2, 1));
  job.box = {{110, -90, -110, 90}};
  source = open(job);
  EXPECT_EQ(source->panel().geometry.x.values, (std::vector<double>{120, 180, 240}));
  EXPECT_EQ(all_values(*source)[2], value_at(0, 0, 4));
  job.box = {{100, 0, 110, 10}};
  EXPECT_TRUE(has(refusal(job), "box"));
  EXPECT_TRUE(has(refusal(job), "degrees apart"));
}

// ---- other grids ----------------------------------------------------------------------------------------------------

TEST(Archive, ProjectedGridKeepsItsMapping) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 3), y = s.dim("y", 2), x = s.dim("x", 3);
  s.coordinate("time", {t}, {0, 1, 2}, "days since 2001-01-01");
  s.coordinate("y", {y}, {20, 10}, "km", "projection_y_coordinate");
  s.coordinate("x", {x}, {5, 15, 25}, "km", "projection_x_coordinate");
  const int crs = s.var("lcc", NC_INT, {});
  s.text(crs, "grid_mapping_name", "lambert_conformal_conic");
  s.numbers(crs, "standard_parallel", NC_DOUBLE, {25, 60});
  const int var = s.var("wetness", NC_FLOAT, {t, y, x});
  s.text(var, "grid_mapping", "lcc");
  s.put(var, range(0, 1, 18));
  const auto source = open(request({s.close()}, "wetness"));
  const Geometry& geometry = source->panel().geometry;
  EXPECT_EQ(geometry.kind, GeometryKind::projected);
  EXPECT_EQ(geometry.x.units, "km");
  EXPECT_EQ(geometry.y.values, (std::vector<double>{20, 10}));
  ASSERT_TRUE(geometry.mapping.has_value());
  EXPECT_EQ(geometry.mapping->name, "lcc");
  EXPECT_EQ(geometry.mapping->attributes.size(), 2U);
  expect_same(all_values(*source), range(0, 1, 18));
}

TEST(Archive, RotatedPoleWithoutEllipsoidGetsASphereAndANote) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 2), y = s.dim("rlat", 2), x = s.dim("rlon", 2);
  s.coordinate("time", {t}, {0, 1}, "days since 2001-01-01");
  s.coordinate("rlat", {y}, {-1, 1}, "degrees", "grid_latitude");
  s.coordinate("rlon", {x}, {-1, 1}, "degrees", "grid_longitude");
  s.coordinate("lat", {y, x}, {50, 50, 52, 52}, "degrees_north");
  s.coordinate("lon", {y, x}, {9, 11, 9, 11}, "degrees_east");
  const int pole = s.var("rotated_pole", NC_CHAR, {});
  s.text(pole, "grid_mapping_name", "rotated_latitude_longitude");
  const int var = s.var("wetness", NC_FLOAT, {t, y, x});
  s.text(var, "grid_mapping", "rotated_pole");
  s.text(var, "coordinates", "lat lon");
  s.put(var, range(0, 1, 8));
  const auto source = open(request({s.close()}, "wetness"));
  const Geometry& geometry = source->panel().geometry;
  EXPECT_EQ(geometry.kind, GeometryKind::projected);
  EXPECT_EQ(geometry.lat, (std::vector<double>{50, 50, 52, 52}));
  EXPECT_EQ(geometry.mapping->attributes.back().name, "earth_radius");
  EXPECT_TRUE(noted(source->panel(), "sphere"));
}

// lat and lon over (x, y) beside data over (time, y, x): met in the wild, to be matched by name.
std::string write_curvilinear(const std::string& path, bool transposed) {
  NcSample s(path);
  const int t = s.dim("time", 3), y = s.dim("y", 2), x = s.dim("x", 3);
  s.coordinate("time", {t}, {0, 1, 2}, "hours since 2001-01-01");
  const std::vector<int> dims = transposed ? std::vector<int>{x, y} : std::vector<int>{y, x};
  s.coordinate("lat", dims, transposed ? std::vector<double>{1, 4, 2, 5, 3, 6} : std::vector<double>{1, 2, 3, 4, 5, 6},
               "degrees_north");
  s.coordinate("lon", dims,
               transposed ? std::vector<double>{10, 40, 20, 50, 30, 60} : std::vector<double>{10, 20, 30, 40, 50, 60},
               "degrees_east");
  const int var = s.var("wetness", NC_FLOAT, {t, y, x});
  s.text(var, "coordinates", "lat lon");
  s.put(var, range(0, 1, 18));
  return s.close();
}

TEST(Archive, CurvilinearCoordinatesAreMatchedByNameOfDimension) {
  const Folder folder;
  for (const bool transposed : {false, true}) {
    const auto source = open(request({write_curvilinear(folder / "a.nc", transposed)}, "wetness"));
    const Geometry& geometry = source->panel().geometry;
    EXPECT_EQ(geometry.kind, GeometryKind::curvilinear);
    EXPECT_EQ(geometry.lat, (std::vector<double>{1, 2, 3, 4, 5, 6}));
    EXPECT_EQ(geometry.lon, (std::vector<double>{10, 20, 30, 40, 50, 60}));
    EXPECT_EQ(geometry.y.name, "y");
    expect_same(all_values(*source, 1), range(0, 1, 18));
  }
}

TEST(Archive, BoxOnACurvilinearGridExcludesCells) {
  const Folder folder;
  InputRequest job = request({write_curvilinear(folder / "a.nc", false)}, "wetness");
  job.box = {{15, 0, 55, 5}};  // cells 2, 3, 4, 5 of 1..6; columns all needed
  const auto source = open(job);
  const std::vector<unsigned char> excluded(source->excluded().begin(), source->excluded().end());
  EXPECT_EQ(excluded, (std::vector<unsigned char>{1, 0, 0, 0, 0, 1}));
  expect_same(all_values(*source), range(0, 1, 18));
}

TEST(Archive, GridWithoutCoordinatesIsNumbered) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int y = s.dim("ny", 2), x = s.dim("nx", 3), t = s.dim("time", 3);
  s.coordinate("time", {t}, {0, 1, 2}, "days since 2001-01-01");
  s.put(s.var("wetness", NC_DOUBLE, {t, x, y}), range(0, 1, 18));
  const auto source = open(request({s.close()}, "wetness"));
  EXPECT_EQ(source->panel().geometry.kind, GeometryKind::index);
  EXPECT_EQ(source->panel().geometry.rows, 2U);
  EXPECT_TRUE(noted(source->panel(), "no coordinates"));
  EXPECT_EQ(all_values(*source)[1], 2);  // row 0, column 1 is stored after both rows of column 0
}

TEST(Archive, SelectHoldsLongerDimensionsAndSingleOnesAreDropped) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 2), l = s.dim("level", 3), m = s.dim("member", 1), y = s.dim("lat", 2),
            x = s.dim("lon", 2);
  s.coordinate("time", {t}, {0, 1}, "days since 2001-01-01");
  s.coordinate("level", {l}, {1000, 850.1, 500}, "hPa", "", NC_FLOAT);
  s.coordinate("lat", {y}, {1, 2}, "degrees_north");
  s.coordinate("lon", {x}, {1, 2}, "degrees_east");
  s.put(s.var("wetness", NC_FLOAT, {t, l, m, y, x}), range(0, 1, 24));
  InputRequest job = request({s.close()}, "wetness");
  const std::string message = refusal(job);
  EXPECT_TRUE(has(message, "level") && has(message, "1000, 850.1, 500 hPa") &&
              has(message, "select = { level = 1000 }"))
      << message;
  job.select = {{"level", 850.1}};
  expect_same(all_values(*open(job)), {4, 5, 6, 7, 16, 17, 18, 19});
  job.select = {{"level", 700}};
  EXPECT_TRUE(has(refusal(job), "not among its values"));
  job.select = {{"levl", 500}};
  EXPECT_TRUE(has(refusal(job), "did you mean 'level'?"));
}

TEST(Archive, VariableInAGroupFindsCoordinatesOfItsParent) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 2), y = s.dim("lat", 2), x = s.dim("lon", 2);
  s.coordinate("time", {t}, {0, 1}, "days since 2001-01-01");
  s.coordinate("lat", {y}, {1, 2}, "degrees_north");
  s.coordinate("lon", {x}, {1, 2}, "degrees_east");
  int group = -1, var = -1;
  ok(nc_def_grp(s.id(), "soil", &group));
  const int dims[] = {t, y, x};
  ok(nc_def_var(group, "wetness", NC_DOUBLE, 3, dims, &var));
  ok(nc_put_var_double(group, var, range(0, 1, 8).data()));
  const std::string path = s.close();
  for (const char* name : {"wetness", "/soil/wetness", "soil/wetness"}) {
    const auto source = open(request({path}, name));
    EXPECT_EQ(source->panel().geometry.kind, GeometryKind::latlon);
    expect_same(all_values(*source), range(0, 1, 8));
  }
}

TEST(Archive, TextAttributesMayBeStrings) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 2), y = s.dim("lat", 1), x = s.dim("lon", 2);
  const auto put = [&](int var, const char* name, const char* value) {
    ok(nc_put_att_string(s.id(), var, name, 1, &value));
  };
  const int time = s.var("time", NC_DOUBLE, {t}), lat = s.var("lat", NC_DOUBLE, {y}),
            lon = s.var("lon", NC_DOUBLE, {x});
  put(time, "units", "days since 2001-01-01");
  put(lat, "units", "degrees_north");
  put(lon, "units", "degrees_east");
  s.put(time, {0, 1});
  s.put(lat, {5});
  s.put(lon, {6, 7});
  const int var = s.var("wetness", NC_DOUBLE, {t, y, x});
  put(var, "units", "m3 m-3");
  s.put(var, range(0, 1, 4));
  EXPECT_EQ(open(request({s.close()}, "wetness"))->panel().units, "m3 m-3");
}

// ---- sites ----------------------------------------------------------------------------------------------------------

enum class Names { characters, strings, integers, none };

std::string write_sites(const std::string& path, Names names, bool placed, bool time_first = false) {
  NcSample s(path);
  const int n = s.dim("station", 3), t = s.dim("time", 4), width = s.dim("width", 8);
  s.coordinate("time", {t}, range(0, 1, 4), "days since 2001-01-01");
  if (placed) {
    s.coordinate("lat", {n}, {50, 51, 52}, "degrees_north");
    s.coordinate("lon", {n}, {-3, -2, -1}, "degrees_east");
    s.coordinate("alt", {n}, {5, 15, 25}, "m", "height");
  }
  if (names == Names::characters) {
    const int v = s.var("station_name", NC_CHAR, {n, width});
    s.text(v, "cf_role", "timeseries_id");
    s.put_text(v, std::string("Alder\0\0\0Birch   Carr\0\0\0\0", 24));
  } else if (names == Names::strings) {
    const int v = s.var("station_name", NC_STRING, {n});
    const char* values[] = {"Alder", "Birch", "Carr"};
    ok(nc_put_var_string(s.id(), v, values));
  } else if (names == Names::integers) {
    const int v = s.var("num", NC_INT, {n});
    s.text(v, "cf_role", "timeseries_id");
    s.put(v, {11, 12, 13});
  }
  const std::vector<double> by_site = {0, 1, 2, 3, 10, 11, 12, 13, 20, 21, 22, 23};
  const std::vector<double> by_time = {0, 10, 20, 1, 11, 21, 2, 12, 22, 3, 13, 23};
  s.put(s.var("flow", NC_FLOAT, time_first ? std::vector<int>{t, n} : std::vector<int>{n, t}),
        time_first ? by_time : by_site);
  return s.close();
}

TEST(Archive, SitesHaveTheirNamesWhateverTheirType) {
  const Folder folder;
  const std::pair<Names, std::vector<std::string>> cases[] = {{Names::characters, {"Alder", "Birch", "Carr"}},
                                                              {Names::strings, {"Alder", "Birch", "Carr"}},
                                                              {Names::integers, {"11", "12", "13"}},
                                                              {Names::none, {"station 1", "station 2", "station 3"}}};
  for (const auto& [names, wanted] : cases)
    for (const bool placed : {true, false})
      for (const bool time_first : {true, false}) {
        const auto source = open(request({write_sites(folder / "a.nc", names, placed, time_first)}, "flow"));
        const Geometry& geometry = source->panel().geometry;
        EXPECT_EQ(geometry.kind, GeometryKind::sites);
        EXPECT_EQ(geometry.site_names, wanted);
        EXPECT_EQ(geometry.lat.size(), placed ? 3U : 0U);
        EXPECT_EQ(geometry.altitude.size(), placed ? 3U : 0U);
        expect_same(all_values(*source, 2), {0, 10, 20, 1, 11, 21, 2, 12, 22, 3, 13, 23});
      }
}

TEST(Archive, BoxKeepsTheSitesInIt) {
  const Folder folder;
  InputRequest job = request({write_sites(folder / "a.nc", Names::strings, true)}, "flow");
  job.box = {{-3.5, 0, -2.5, 90}};
  EXPECT_EQ(open(job)->panel().geometry.site_names, (std::vector<std::string>{"Alder"}));
  job.box = {{-2.5, 0, 0, 90}};
  const auto source = open(job);
  EXPECT_EQ(source->panel().geometry.site_names, (std::vector<std::string>{"Birch", "Carr"}));
  expect_same(all_values(*source), {10, 20, 11, 21, 12, 22, 13, 23});
  job.box = {{60, 0, 70, 10}};
  EXPECT_TRUE(has(refusal(job), "the data cover 3 sites, lat ")) << refusal(job);
}

TEST(Archive, FileOfOneSeriesIsASiteWithTheNameAndPlaceOfItsScalars) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 3), width = s.dim("width", 8);
  s.coordinate("time", {t}, {0, 1, 2}, "days since 2001-01-01");
  s.coordinate("lat", {}, {51.5}, "degrees_north");
  s.coordinate("lon", {}, {-2.5}, "degrees_east");
  const int name = s.var("name", NC_CHAR, {width});
  s.text(name, "cf_role", "timeseries_id");
  s.put_text(name, std::string("Alder\0\0\0", 8));
  s.put(s.var("flow", NC_FLOAT, {t}), {4, 5, 6});
  const auto source = open(request({s.close()}, "flow"));
  const Geometry& geometry = source->panel().geometry;
  EXPECT_EQ(geometry.site_names, (std::vector<std::string>{"Alder"}));
  EXPECT_EQ(geometry.lat, (std::vector<double>{51.5}));
  EXPECT_EQ(geometry.lon, (std::vector<double>{-2.5}));
  expect_same(all_values(*source), {4, 5, 6});
}

TEST(Archive, RaggedArraysAreRefusedWithWhatToDo) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int o = s.dim("obs", 4), n = s.dim("station", 2);
  s.coordinate("time", {o}, {0, 1, 0, 1}, "days since 2001-01-01");
  const int counts = s.var("row_size", NC_INT, {n});
  s.text(counts, "sample_dimension", "obs");
  s.put(s.var("flow", NC_FLOAT, {o}), {1, 2, 3, 4});
  EXPECT_TRUE(has(refusal(request({s.close()}, "flow")), "ragged"));
}

// ---- many files -----------------------------------------------------------------------------------------------------

// Two years of months, with epochs of their own; `missing` months lie between them.
std::vector<std::string> write_years(const Folder& folder, std::size_t missing) {
  GridFile first, second;
  second.time_units = "months since 2001-02-15";
  second.times = range(static_cast<double>(kSteps + missing) - 1, 1, kSteps);
  second.first_step = static_cast<double>(kSteps + missing);
  return {write(folder / "late.nc", second), write(folder / "early.nc", first)};
}

TEST(Archive, FilesInAnyOrderWithOwnEpochsAreJoinedAndMissingStepsAreNan) {
  const Folder folder;
  constexpr std::size_t kMissing = 2;
  const auto source = open(request(write_years(folder, kMissing), "wetness"));
  EXPECT_EQ(source->panel().axis.size(), 2 * kSteps + kMissing);
  EXPECT_EQ(source->panel().steps_present, 2 * kSteps);
  EXPECT_EQ(source->panel().sources.size(), 2U);
  std::vector<double> wanted = expected(2 * kSteps + kMissing);
  std::fill_n(wanted.begin() + kSteps * kRows * kCols, kMissing * kRows * kCols, kNaN);
  ValueCounts counts;
  expect_same(all_values(*source, 3, &counts), wanted);
  EXPECT_EQ(counts.fill, 0U);  // steps that no file holds are no values
}

TEST(Archive, PeriodCutsTheAxis) {
  const Folder folder;
  InputRequest job = request(write_years(folder, 0), "wetness");
  job.period = {"2001-03-01", "2001-09-30"};
  const auto source = open(job);
  EXPECT_EQ(source->panel().axis.label(0), "2001-03-15");
  EXPECT_EQ(source->panel().axis.size(), 7U);
  const std::vector<double> all = expected(2 * kSteps);
  expect_same(all_values(*source), {all.begin() + 2 * kRows * kCols, all.begin() + 9 * kRows * kCols});
}

TEST(Archive, FilesMayDifferInPackingAndType) {
  const Folder folder;
  GridFile first;
  NcSample s(folder / "b.nc");
  const int t = s.dim("time", 2), y = s.dim("lat", kRows), x = s.dim("lon", kCols);
  s.coordinate("time", {t}, {6, 7}, "months since 2001-01-15");
  s.coordinate("lat", {y}, first.lat, "degrees_north");
  s.coordinate("lon", {x}, first.lon, "degrees_east");
  const int var = s.var("wetness", NC_SHORT, {t, y, x});
  s.text(var, "units", "1");
  s.numbers(var, "scale_factor", NC_DOUBLE, {2});
  s.numbers(var, "_FillValue", NC_SHORT, {3});
  s.put(var, range(0, 1, 2 * kRows * kCols));
  const auto source = open(request({write(folder / "a.nc", first), s.close()}, "wetness"));
  std::vector<double> wanted = expected();
  for (const double v : range(0, 2, 2 * kRows * kCols)) wanted.push_back(v == 6 ? kNaN : v);
  ValueCounts counts;
  expect_same(all_values(*source, 1, &counts), wanted);
  EXPECT_EQ(counts.fill, 1U);
}

TEST(Archive, OverlapOfEqualValuesIsDroppedAndOfOthersRefusedNamingBoth) {
  const Folder folder;
  GridFile first, second;
  second.times = range(4, 1, kSteps);
  second.first_step = 4;
  InputRequest job = request({write(folder / "first.nc", first), write(folder / "second.nc", second)}, "wetness");
  const auto source = open(job);
  EXPECT_EQ(source->panel().axis.size(), 10U);
  expect_same(all_values(*source), expected(10));
  EXPECT_TRUE(noted(source->panel(), "the values are the same"));

  second.changed[1 * kRows * kCols + 7] = 5014;  // 2001-06, row 1, column 2: 5012 in the first file
  write(folder / "second.nc", second);
  const std::string message = refusal(job);
  for (const char* part : {"first.nc", "second.nc", "2001-06-15", "5012 and 5014", "row 1, col 2", "duplicates = "})
    EXPECT_TRUE(has(message, part)) << message;

  job.duplicates = DuplicateRule::first;
  expect_same(all_values(*open(job)), expected(10));
  job.duplicates = DuplicateRule::mean;
  std::vector<double> wanted = expected(10);
  wanted[5 * kRows * kCols + 7] = 5013;
  expect_same(all_values(*open(job), 1), wanted);
}

TEST(Archive, MeanOfDuplicatesPassesOverMissingCopies) {
  const Folder folder;
  GridFile first, second;
  second.changed[3] = NC_FILL_FLOAT;
  first.changed[4] = second.changed[4] = NC_FILL_FLOAT;
  InputRequest job = request({write(folder / "a.nc", first), write(folder / "b.nc", second)}, "wetness");
  job.duplicates = DuplicateRule::mean;
  std::vector<double> wanted = expected();
  wanted[4] = kNaN;
  expect_same(all_values(*open(job)), wanted);
}

TEST(Archive, OneMapAFileWithAScalarTimeIsRead) {
  const Folder folder;
  std::vector<std::string> files;
  for (int month = 0; month < 3; ++month) {
    NcSample s(folder / ("m" + std::to_string(month) + ".nc"));
    const int y = s.dim("lat", 2), x = s.dim("lon", 2);
    s.coordinate("time", {}, {static_cast<double>(month)}, "months since 2001-01-01", "time");
    s.coordinate("lat", {y}, {1, 2}, "degrees_north");
    s.coordinate("lon", {x}, {1, 2}, "degrees_east");
    s.put(s.var("wetness", NC_FLOAT, {y, x}), range(10.0 * month, 1, 4));
    files.push_back(s.close());
  }
  expect_same(all_values(*open(request(files, "wetness"))), {0, 1, 2, 3, 10, 11, 12, 13, 20, 21, 22, 23});
}

TEST(Archive, FilesOnOtherCellsOrInOtherUnitsAreRefusedByName) {
  const Folder folder;
  GridFile first, second;
  second.times = range(6, 1, kSteps);
  second.lat[2] += 0.25;
  const std::string a = write(folder / "a.nc", first);
  std::string message = refusal(request({a, write(folder / "shifted.nc", second)}, "wetness"));
  EXPECT_TRUE(has(message, "shifted.nc") && has(message, "row coordinate number 3 is 52.25 against 52")) << message;
  second.lat = range(50, 1, kRows + 1);
  EXPECT_TRUE(has(refusal(request({a, write(folder / "larger.nc", second)}, "wetness")), "larger.nc"));
}

// ---- masks ----------------------------------------------------------------------------------------------------------

std::string write_mask(const std::string& path, const std::vector<double>& lat, const std::vector<double>& lon,
                       const std::vector<double>& values) {
  NcSample s(path);
  const int y = s.dim("lat", lat.size()), x = s.dim("lon", lon.size());
  s.coordinate("lat", {y}, lat, "degrees_north");
  s.coordinate("lon", {x}, lon, "degrees_east");
  const int var = s.var("land", NC_FLOAT, {y, x});
  s.numbers(var, "_FillValue", NC_FLOAT, {-1});
  s.put(var, values);
  return s.close();
}

std::vector<unsigned char> excluded_by(const InputRequest& job) {
  const auto source = open(job);
  return {source->excluded().begin(), source->excluded().end()};
}

TEST(Archive, MaskKeepsCellsByMinimumMaximumAndValues) {
  const Folder folder;
  GridFile grid;
  grid.lat = {50, 51};
  grid.lon = {10, 11, 12};
  InputRequest job = request({write(folder / "a.nc", grid)}, "wetness");
  const std::string mask = write_mask(folder / "mask.nc", grid.lat, grid.lon, {0, 1, 2, 3, -1, 5});
  job.mask = InputRequest::Mask{mask, "land", 2.0, std::nullopt, {}};
  EXPECT_EQ(excluded_by(job), (std::vector<unsigned char>{1, 1, 0, 0, 1, 0}));
  job.mask = InputRequest::Mask{mask, "land", std::nullopt, 1.0, {}};
  EXPECT_EQ(excluded_by(job), (std::vector<unsigned char>{0, 0, 1, 1, 1, 1}));
  job.mask = InputRequest::Mask{mask, "land", std::nullopt, std::nullopt, {0, 5}};
  EXPECT_EQ(excluded_by(job), (std::vector<unsigned char>{0, 1, 1, 1, 1, 0}));
  job.mask = InputRequest::Mask{mask, "land", 9.0, std::nullopt, {}};
  EXPECT_TRUE(has(refusal(job), "leaves no cell"));
}

TEST(Archive, MaskIsRolledCutAndTurnedAsTheGridIs) {
  const Folder folder;
  GridFile grid;
  grid.lat = {50, 51};
  grid.lon = {0, 90, 180, 270};
  InputRequest job = request({write(folder / "a.nc", grid)}, "wetness");
  // The same cells from the other end: north first, -180 first.
  const std::string mask = write_mask(folder / "mask.nc", {51, 50}, {-180, -90, 0, 90}, {1, 0, 0, 0, 0, 0, 0, 1});
  job.mask = InputRequest::Mask{mask, "land", 1.0, std::nullopt, {}};
  EXPECT_EQ(excluded_by(job), (std::vector<unsigned char>{1, 1, 1, 0, 0, 1, 1, 1}));
  const std::string other = write_mask(folder / "other.nc", {50, 51.5}, {-180, -90, 0, 90}, range(0, 1, 8));
  job.mask = InputRequest::Mask{other, "land", 1.0, std::nullopt, {}};
  EXPECT_TRUE(has(refusal(job), "other.nc"));
}

// ---- what cannot be read --------------------------------------------------------------------------------------------

void write_bytes(const std::string& path, const std::string& bytes) { std::ofstream(path, std::ios::binary) << bytes; }

TEST(Archive, FilesThatAreNoNetcdfAreRefusedInPlainWords) {
  const Folder folder;
  write_bytes(folder / "text.nc", "this is no netCDF file, only some text\n");
  write_bytes(folder / "empty.nc", "");
  EXPECT_TRUE(has(refusal(request({folder / "text.nc"}, "wetness")), "not netCDF or HDF5"));
  EXPECT_TRUE(has(refusal(request({folder / "empty.nc"}, "wetness")), "empty"));
  EXPECT_TRUE(has(refusal(request({folder / "absent.nc"}, "wetness")), "does not exist"));
  EXPECT_TRUE(has(refusal(request({folder / ""}, "wetness")), "folder"));
}

TEST(Archive, FilesCutShortAreRefused) {
  const Folder folder;
  for (const int mode : {0, NC_64BIT_OFFSET, NC_64BIT_DATA, NC_NETCDF4}) {
    GridFile grid;
    grid.mode = mode;
    const std::string path = write(folder / "cut.nc", grid);
    std::filesystem::resize_file(path, std::filesystem::file_size(path) / 2);
    EXPECT_TRUE(has(refusal(request({path}, "wetness")), "cut short"));
  }
}

TEST(Archive, UnknownVariablesAndMissingTimesAreNamed) {
  const Folder folder;
  const std::string path = write(folder / "a.nc", {});
  EXPECT_TRUE(has(refusal(request({path}, "wetnes")), "did you mean 'wetness'?"));
  const std::string mask = write_mask(folder / "mask.nc", {1, 2}, {1, 2}, range(0, 1, 4));
  const std::string message = refusal(request({mask}, "land"));
  EXPECT_TRUE(has(message, "no time axis") && has(message, "lat 2, lon 2")) << message;
}

TEST(Archive, CoordinatesThatJumpAreRefused) {
  const Folder folder;
  GridFile grid;
  grid.lat = {50, 52, 51, 53};
  EXPECT_TRUE(has(refusal(request({write(folder / "a.nc", grid)}, "wetness")), "value 3 of 4 is 51 after 52"));
}

TEST(Archive, BrokenTimeUnitsAreMendedByTheJob) {
  const Folder folder;
  GridFile grid;
  grid.time_units = "hours";
  InputRequest job = request({write(folder / "a.nc", grid)}, "wetness");
  EXPECT_TRUE(has(refusal(job), "time = { unit = "));
  job.time = InputRequest::TimeMend{"days since 2001-01-01", "noleap", std::nullopt};
  const auto source = open(job);
  EXPECT_EQ(source->panel().axis.label(5), "2001-01-06");
  EXPECT_EQ(source->panel().axis.calendar(), Calendar::noleap);
}

TEST(Archive, TimeDimensionWithoutCoordinateIsCountedAsTheJobSays) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const int t = s.dim("time", 3), n = s.dim("station", 2);
  s.put(s.var("flow", NC_FLOAT, {t, n}), range(0, 1, 6));
  InputRequest job = request({s.close()}, "flow");
  EXPECT_TRUE(has(refusal(job), "'time' has no coordinate"));
  job.time = InputRequest::TimeMend{"months since 1981-01-01", std::nullopt, std::nullopt};
  const auto source = open(job);
  EXPECT_EQ(source->panel().axis.label(2), "1981-03-01");
  EXPECT_TRUE(noted(source->panel(), "counted from 0"));
  expect_same(all_values(*source), range(0, 1, 6));
}

TEST(Archive, TimesThatAreMissingAreRefused) {
  const Folder folder;
  GridFile grid;
  grid.times[3] = kNaN;
  EXPECT_TRUE(has(refusal(request({write(folder / "a.nc", grid)}, "wetness")), "a.nc"));
}

TEST(Archive, KindsOfFileAreNotMixed) {
  const Folder folder;
  write_bytes(folder / "a.csv", "date,Alder\n2001-01-01,1\n2001-01-02,2\n");
  EXPECT_TRUE(
      has(refusal(request({folder / "a.csv", write(folder / "a.nc", {})}, "wetness"), ErrorKind::job), "mixes"));
  expect_same(all_values(*open(request({folder / "a.csv"}, "flow"))), {1, 2});
}

}  // namespace
}  // namespace lagscape
