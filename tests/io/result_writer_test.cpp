#include "lagscape/io/result_writer.h"

#include <fmt/format.h>
#include <gtest/gtest.h>
#include <netcdf.h>
#include <sys/resource.h>
#include <unistd.h>

#include <cmath>
#include <csignal>
#include <filesystem>
#include <fstream>
#include <functional>
#include <limits>
#include <numeric>

#include "io/result_writer_axes.h"
#include "io/result_writer_netcdf.h"
#include "io/result_writer_rules.h"
#include "lagscape/base/error.h"
#include "support/geometries.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;
constexpr double kMissing = std::numeric_limits<double>::quiet_NaN();

// ---- results to write ----
using test::steps;

Geometry degrees(std::vector<double> lat, std::vector<double> lon) {
  Geometry place = test::degrees(std::move(lat), std::move(lon));
  place.y.extra = {{"long_name", "latitude of centre"}};
  return place;
}

Geometry small_grid() { return degrees(steps(45, -10, 4), steps(5, 10, 6)); }

Geometry lambert() {
  Geometry place;
  place.kind = GeometryKind::projected;
  place.rows = 3;
  place.cols = 4;
  place.y = {"y", "", "km", steps(-460, -10, 3), {}, {}};
  place.x = {"x", "projection_x_coordinate", "km", steps(600, 10, 4), {}, {}};
  place.lat = std::vector<double>(12, 38);
  place.lon = std::vector<double>(12, -92);
  place.mapping = GridMapping{"lcc",
                              {{"grid_mapping_name", "lambert_conformal_conic"},
                               {"standard_parallel", std::vector<double>{25, 60}},
                               {"_ChunkSizes", std::vector<std::int64_t>{1}},
                               {"GeoTransform", "595 10 0 -455 0 -10"},
                               {"earth_radius", std::vector<double>{6371229}}}};
  return place;
}

Geometry curvilinear() {
  Geometry place;
  place.kind = GeometryKind::curvilinear;
  place.rows = 3;
  place.cols = 4;
  place.lat = steps(40, 0.1, 12);
  place.lon = steps(5, 0.1, 12);
  return place;
}

Geometry sites() {
  Geometry place;
  place.kind = GeometryKind::sites;
  place.rows = 1;
  place.cols = 3;
  place.lat = {10, 20, 30};
  place.lon = {100.5, -110, 120};
  place.altitude = {1, 2, 3};
  place.site_names = {"Alder Weir", "Birch, \"Upper\"", "Cold Spring"};
  return place;
}

TimeAxis months(std::size_t size = 180) {
  return {Calendar::standard, {StepKind::months, 1}, seconds_of(Calendar::standard, {1981, 1, 15}), size};
}

MapSpec map_of(const std::string& name, MapType type, const std::string& units, LayerAxis axis = LayerAxis::none) {
  MapSpec map;
  map.name = name;
  map.type = type;
  map.axis = axis;
  map.long_name = "the " + name;
  map.units = units;
  return map;
}

// A map of every type and both cubes.
MapSet full_set(Geometry place) {
  MapSet set;
  set.geometry = std::move(place);
  set.time = months();
  set.lags = 4;
  set.orders = 2;
  set.maps = {map_of("status", MapType::i16, ""),
              map_of("valid_count", MapType::i32, "1"),
              map_of("mean", MapType::f32, "K"),
              map_of("trend_slope", MapType::f32, "K (10 year)-1"),
              map_of("first_time", MapType::f64, set.time.cf_units()),
              map_of("trend_class", MapType::i8, ""),
              map_of("autocorrelation", MapType::f32, "1", LayerAxis::lag),
              map_of("ar_coefficients", MapType::f32, "1", LayerAxis::order)};
  set.maps[0].flag_masks = {1, 2, 4};
  set.maps[0].flag_meanings = "no_data too_few constant";
  set.maps[2].cell_methods = "time: mean";
  set.maps[2].ancillary = "mean_low valid_count mean_high";
  set.maps[5].flag_values = {0, 1, 2};
  set.maps[5].flag_meanings = "not_established rising falling";
  set.maps[6].valid_range = {-1, 1};
  set.global = {{"Conventions", "CF-1.10, ACDD-1.3"}, {"title", "Memory"}, {"seeds", std::vector<std::int64_t>{1, 2}}};
  return set;
}

// Values from which layer and cell can be told; the last cell is missing.
double value_at(const MapSet& set, const MapSpec& map, std::size_t layer, std::size_t cell) {
  if (cell + 1 == set.geometry.cells()) return kMissing;
  if (map.type == MapType::i8) return static_cast<double>(cell % 3);
  return static_cast<double>(layer) * 1000 + static_cast<double>(cell % 700) + (map.type == MapType::f32 ? 0.1 : 0);
}

std::vector<double> values_of(const MapSet& set, const MapSpec& map, CellRange cells) {
  std::vector<double> out;
  for (std::size_t layer = 0; layer < set.layers(map); ++layer)
    for (std::size_t c = 0; c < cells.count; ++c) out.push_back(value_at(set, map, layer, cells.first + c));
  return out;
}

void fill(MapSink& sink, const MapSet& set, std::size_t rows_at_once, bool backwards = false) {
  const std::size_t unit = set.geometry.is_sites() ? 1 : set.geometry.cols;
  std::vector<CellRange> bands;
  for (std::size_t first = 0; first < set.geometry.cells(); first += rows_at_once * unit)
    bands.push_back({first, std::min(rows_at_once * unit, set.geometry.cells() - first)});
  if (backwards) std::reverse(bands.begin(), bands.end());
  for (const CellRange cells : bands)
    for (std::size_t map = 0; map < set.maps.size(); ++map) {
      const std::vector<double> values = values_of(set, set.maps[map], cells);
      const std::vector<float> floats(values.begin(), values.end());
      if (set.maps[map].type == MapType::f64)
        sink.write(map, cells, std::span<const double>(values));
      else
        sink.write(map, cells, std::span<const float>(floats));
    }
}

// ---- files ----
class ResultWriter : public testing::Test {
 protected:
  ResultWriter() : folder_(fs::temp_directory_path() / fmt::format("lagscape_result_{}_{}", getpid(), counter_++)) {
    fs::create_directories(folder_);
  }
  ~ResultWriter() override { fs::remove_all(folder_); }

  std::string path(const std::string& name) const { return (folder_ / name).string(); }
  std::string write(const std::string& name, const MapSet& set, std::size_t rows_at_once = 1,
                    bool backwards = false) const {
    const auto sink = create_result(path(name), set, false);
    fill(*sink, set, rows_at_once, backwards);
    sink->commit();
    return path(name);
  }
  std::vector<std::string> names() const {
    std::vector<std::string> out;
    for (const auto& entry : fs::directory_iterator(folder_)) out.push_back(entry.path().filename().string());
    std::sort(out.begin(), out.end());
    return out;
  }

  fs::path folder_;
  static inline int counter_ = 0;
};

std::string bytes_of(const std::string& path) {
  std::ifstream in(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

// The little of the netCDF C API that reading back needs; kept apart from the code under test.
class Reader {
 public:
  explicit Reader(const std::string& path) { EXPECT_EQ(nc_open(path.c_str(), NC_NOWRITE, &file_), NC_NOERR) << path; }
  Reader(const Reader&) = delete;
  Reader& operator=(const Reader&) = delete;
  ~Reader() { nc_close(file_); }

  bool has(const std::string& name) const {
    int id = 0;
    return nc_inq_varid(file_, name.c_str(), &id) == NC_NOERR;
  }
  std::vector<std::string> dims(const std::string& name) const {
    int rank = 0, ids[NC_MAX_VAR_DIMS] = {};
    nc_inq_varndims(file_, id(name), &rank);
    nc_inq_vardimid(file_, id(name), ids);
    std::vector<std::string> out;
    for (int d = 0; d < rank; ++d) {
      char dim[NC_MAX_NAME + 1] = {};
      nc_inq_dimname(file_, ids[d], dim);
      out.emplace_back(dim);
    }
    return out;
  }
  std::vector<double> values(const std::string& name) const {
    std::size_t size = 1;
    for (const std::string& dim : dims(name)) {
      int dim_id = 0;
      std::size_t length = 0;
      nc_inq_dimid(file_, dim.c_str(), &dim_id);
      nc_inq_dimlen(file_, dim_id, &length);
      size *= length;
    }
    std::vector<double> out(size);
    EXPECT_EQ(nc_get_var_double(file_, id(name), out.data()), NC_NOERR) << name;
    return out;
  }
  std::string text(const std::string& name, const std::string& att) const {
    std::size_t length = 0;
    if (nc_inq_attlen(file_, id(name), att.c_str(), &length) != NC_NOERR) return "(none)";
    std::string out(length, '\0');
    EXPECT_EQ(nc_get_att_text(file_, id(name), att.c_str(), out.data()), NC_NOERR) << name << ":" << att;
    return out;
  }
  std::vector<double> numbers(const std::string& name, const std::string& att) const {
    std::size_t length = 0;
    if (nc_inq_attlen(file_, id(name), att.c_str(), &length) != NC_NOERR) return {};
    std::vector<double> out(length);
    nc_get_att_double(file_, id(name), att.c_str(), out.data());
    return out;
  }
  std::vector<std::size_t> chunks(const std::string& name) const {
    std::vector<std::size_t> out(dims(name).size());
    int storage = 0;
    nc_inq_var_chunking(file_, id(name), &storage, out.data());
    return out;
  }

 private:
  int id(const std::string& name) const {
    if (name.empty()) return NC_GLOBAL;
    int found = -1;
    EXPECT_EQ(nc_inq_varid(file_, name.c_str(), &found), NC_NOERR) << name;
    return found;
  }
  int file_ = -1;
};

std::string error_of(const std::function<void()>& action, ErrorKind kind = ErrorKind::output) {
  try {
    action();
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), kind) << error.what();
    EXPECT_TRUE(kind == ErrorKind::internal || !error.fix().empty()) << error.what();
    return error.what();
  }
  ADD_FAILURE() << "nothing was thrown";
  return {};
}

testing::AssertionResult contains(const std::string& text, const std::string& part) {
  if (text.find(part) != std::string::npos) return testing::AssertionSuccess();
  return testing::AssertionFailure() << "no '" << part << "' in: " << text;
}

// No file of this process may grow beyond so many bytes while this lives: stands in for a full disk.
class FileSizeLimit {
 public:
  explicit FileSizeLimit(rlim_t bytes) : handler_(std::signal(SIGXFSZ, SIG_IGN)) {
    getrlimit(RLIMIT_FSIZE, &before_);
    const rlimit limit{bytes, before_.rlim_max};
    setrlimit(RLIMIT_FSIZE, &limit);
  }
  FileSizeLimit(const FileSizeLimit&) = delete;
  FileSizeLimit& operator=(const FileSizeLimit&) = delete;
  ~FileSizeLimit() {
    setrlimit(RLIMIT_FSIZE, &before_);
    std::signal(SIGXFSZ, handler_);
  }

 private:
  rlimit before_{};
  void (*handler_)(int);
};

// ---- conventions ----
TEST_F(ResultWriter, EveryGeometryKeepsTheRules) {
  Geometry uneven = degrees({60, 50, 42, 36, 31}, steps(5, 10, 4)), index = small_grid(), nowhere = sites();
  index.kind = GeometryKind::index;
  index.x = index.y = {};
  nowhere.lat.clear();
  nowhere.lon.clear();
  nowhere.altitude.clear();
  const std::vector<std::pair<std::string, Geometry>> places{
      {"grid", small_grid()}, {"lambert", lambert()}, {"curvilinear", curvilinear()},
      {"uneven", uneven},     {"index", index},       {"sites", sites()},
      {"nowhere", nowhere}};
  for (const auto& [name, place] : places) {
    const MapSet set = full_set(place);
    write(name + ".nc", set);
    for (const std::string& file : result_files(path(name + ".nc"), set))
      if (file.ends_with(".nc")) {
        EXPECT_EQ(test::broken_rules(file), std::vector<std::string>{}) << file;
      }
  }
}

TEST_F(ResultWriter, ValuesOfEveryTypeComeBackAndMissingOnesAreFills) {
  const MapSet set = full_set(small_grid());
  const Reader file(write("grid.nc", set));
  for (const MapSpec& map : set.maps) {
    const auto got = file.values(map.name), wanted = values_of(set, map, {0, set.geometry.cells()});
    ASSERT_EQ(got.size(), wanted.size());
    const double fill_wanted = map.type == MapType::i8                                ? 127
                               : map.type == MapType::i16 || map.type == MapType::i32 ? -1
                                                                                      : kMissing;
    for (std::size_t i = 0; i < got.size(); ++i) {
      const double one = std::isnan(wanted[i])      ? fill_wanted
                         : map.type == MapType::f32 ? static_cast<double>(static_cast<float>(wanted[i]))
                                                    : wanted[i];
      EXPECT_TRUE(got[i] == one || (std::isnan(got[i]) && std::isnan(one))) << map.name << " " << i << ": " << got[i];
    }
  }
}

TEST_F(ResultWriter, GeographicGridsNameEpsg4326EvenWithoutAMappingInTheInput) {
  const Reader file(write("grid.nc", full_set(small_grid())));
  EXPECT_EQ(file.text("mean", "grid_mapping"), "crs");
  EXPECT_EQ(file.text("crs", "grid_mapping_name"), "latitude_longitude");
  EXPECT_TRUE(contains(file.text("crs", "crs_wkt"), "ID[\"EPSG\",4326]"));
  EXPECT_EQ(file.text("lat", "long_name"), "latitude of centre");
  EXPECT_EQ(file.text("mean", "coordinates"), "time");
  EXPECT_FALSE(file.has("lat_bnds"));
}

TEST_F(ResultWriter, AnEarthOfTheInputsOwnIsKept) {
  MapSet set = full_set(small_grid());
  set.geometry.mapping = GridMapping{
      "sphere", {{"grid_mapping_name", "latitude_longitude"}, {"earth_radius", std::vector<double>{6371229}}}};
  const Reader file(write("sphere.nc", set));
  EXPECT_EQ(file.text("mean", "grid_mapping"), "sphere");
  EXPECT_EQ(file.numbers("sphere", "earth_radius"), std::vector<double>{6371229});
  set.geometry.mapping->attributes = {{"grid_mapping_name", "latitude_longitude"},
                                      {"semi_major_axis", std::vector<double>{6378137}}};
  const Reader usual(write("usual.nc", set));
  EXPECT_EQ(usual.text("mean", "grid_mapping"), "crs");
}

TEST_F(ResultWriter, ProjectedGridsCarryTheInputsMappingAndBothCoordinates) {
  const Reader file(write("lambert.nc", full_set(lambert())));
  EXPECT_EQ(file.text("mean", "grid_mapping"), "lcc");
  EXPECT_EQ(file.numbers("lcc", "standard_parallel"), (std::vector<double>{25, 60}));
  EXPECT_EQ(file.text("lcc", "_ChunkSizes"), "(none)");
  EXPECT_EQ(file.text("lcc", "GeoTransform"), "(none)");  // of the input's extent
  EXPECT_EQ(file.text("y", "standard_name"), "projection_y_coordinate");
  EXPECT_EQ(file.text("x", "units"), "km");
  EXPECT_EQ(file.text("mean", "coordinates"), "lat lon time");
  EXPECT_EQ(file.dims("lat"), (std::vector<std::string>{"y", "x"}));
}

TEST_F(ResultWriter, IndexGridsHaveNeitherCoordinatesNorReferenceSystem) {
  Geometry place;
  place.rows = 2;
  place.cols = 3;
  const Reader file(write("index.nc", full_set(place)));
  EXPECT_EQ(file.dims("mean"), (std::vector<std::string>{"y", "x"}));
  EXPECT_EQ(file.text("mean", "grid_mapping"), "(none)");
  EXPECT_FALSE(file.has("crs") || file.has("x") || file.has("lat"));
}

TEST_F(ResultWriter, UnevenLatitudesGetBoundsAndThePlaceOfEveryCell) {
  const Reader file(write("uneven.nc", full_set(degrees({80, 60, 50, 42}, {5, 15, 25}))));
  EXPECT_EQ(file.text("mean", "coordinates"), "lat_of_cell lon_of_cell time");
  EXPECT_EQ(file.values("lat_bnds"), (std::vector<double>{90, 70, 70, 55, 55, 46, 46, 38}));
  EXPECT_EQ(file.values("lat_of_cell")[5], 60);
  EXPECT_EQ(file.values("lon_of_cell")[5], 25);
}

TEST_F(ResultWriter, NamesOfTheInputsAxesDoNotMeetOurOwn) {
  Geometry place = small_grid();
  place.y.name = "status";
  place.x.name = "_lag";
  const Reader file(write("names.nc", full_set(place)));
  EXPECT_EQ(file.dims("autocorrelation"), (std::vector<std::string>{"lag", "status_axis", "lag_axis"}));
}

TEST(ResultAxes, Float32NoiseIsTakenOutOfEvenAxesOnly) {
  std::vector<double> noisy, uneven{1, 2, 4};
  for (int i = 0; i < 30; ++i) noisy.push_back(static_cast<double>(static_cast<float>(170.005 + 0.01 * i)));
  EXPECT_FALSE(evenly_spaced(noisy));
  const auto clean = without_float_noise(noisy);
  EXPECT_TRUE(evenly_spaced(clean));
  for (std::size_t i = 0; i < clean.size(); ++i) EXPECT_NEAR(clean[i], 170.005 + 0.01 * static_cast<double>(i), 1e-12);
  EXPECT_EQ(without_float_noise(uneven), uneven);
  const auto doubles = steps(0.1, 0.1, 50);
  EXPECT_EQ(without_float_noise(doubles), doubles);
}

TEST_F(ResultWriter, LagsStandInTheUnitOfTheAxisWithWholeStepsBeside) {
  MapSet set = full_set(small_grid());
  const Reader monthly(write("monthly.nc", set));
  EXPECT_EQ(monthly.values("lag"), (std::vector<double>{0, 1, 2, 3}));
  EXPECT_EQ(monthly.text("lag", "units"), "month");
  EXPECT_TRUE(contains(monthly.text("lag", "comment"), "calendar months"));
  EXPECT_EQ(monthly.values("order"), (std::vector<double>{1, 2}));
  set.time = {Calendar::noleap, {StepKind::seconds, 6 * 3600}, 0, 100};
  const Reader hourly(write("hourly.nc", set));
  EXPECT_EQ(hourly.values("lag"), (std::vector<double>{0, 6, 12, 18}));
  EXPECT_EQ(hourly.text("lag", "units"), "hour");
  EXPECT_EQ(hourly.numbers("lag", "steps"), (std::vector<double>{0, 1, 2, 3}));
  EXPECT_EQ(hourly.text("lag", "comment"), "(none)");
  EXPECT_EQ(hourly.text("first_time", "calendar"), "noleap");
}

TEST(ResultPeriod, IsWholeMonthsYearsAndDays) {
  const Calendar standard = Calendar::standard;
  const auto text = [&](const TimeAxis& axis) {
    const Period period = covered_period(axis);
    return iso_text(axis.calendar(), period.begin) + " " + iso_text(axis.calendar(), period.end);
  };
  EXPECT_EQ(text(months(24)), "1981-01-01 1983-01-01");
  EXPECT_EQ(text({standard, {StepKind::months, 3}, seconds_of(standard, {1980, 12, 15}), 4}), "1980-12-01 1981-12-01");
  EXPECT_EQ(text({standard, {StepKind::years, 1}, seconds_of(standard, {1901, 7, 1}), 100}), "1901-01-01 2001-01-01");
  EXPECT_EQ(text({standard, {StepKind::seconds, kDay}, seconds_of(standard, {2000, 2, 28}, kDay / 2), 3}),
            "2000-02-28 2000-03-02");
  EXPECT_EQ(text({Calendar::day360, {StepKind::seconds, 3600}, seconds_of(Calendar::day360, {2000, 2, 30}), 24}),
            "2000-02-30 2000-03-01");
}

TEST_F(ResultWriter, ThePeriodIsAScalarTimeWithBounds) {
  const Reader file(write("grid.nc", full_set(small_grid())));
  EXPECT_EQ(file.dims("time"), std::vector<std::string>{});
  EXPECT_EQ(file.values("time_bnds"), (std::vector<double>{4018, 9496}));  // 1981-01-01, 1996-01-01
  EXPECT_EQ(file.values("time"), std::vector<double>{6757});
}

TEST_F(ResultWriter, OnlyCompanionsThatAreInTheFileAreNamed) {
  const Reader file(write("grid.nc", full_set(small_grid())));
  EXPECT_EQ(file.text("mean", "ancillary_variables"), "valid_count");
  EXPECT_EQ(file.text("valid_count", "ancillary_variables"), "(none)");
}

TEST_F(ResultWriter, GlobalAttributesMayComeLateAndBeLong) {
  const MapSet set = full_set(small_grid());
  const auto sink = create_result(path("grid.nc"), set, false);
  fill(*sink, set, 4);
  const std::string job(200000, 'x');
  sink->add_global({{"lagscape_job", job}, {"title", "another"}, {"counts", std::vector<std::int64_t>{3, 21}}});
  sink->commit();
  const Reader file(path("grid.nc"));
  EXPECT_EQ(file.text("", "lagscape_job"), job);
  EXPECT_EQ(file.text("", "title"), "another");
  EXPECT_EQ(file.numbers("", "counts"), (std::vector<double>{3, 21}));
}

// ---- layout ----
TEST_F(ResultWriter, ChunksAreMapsOfAtMost512AndEdgesAreRight) {
  MapSet set = full_set(degrees(steps(-80, 0.1, 600), steps(-60, 0.1, 700)));
  set.lags = 2;
  set.maps = {set.maps[2], set.maps[6]};
  const Reader file(write("large.nc", set, 77));
  EXPECT_EQ(file.chunks("mean"), (std::vector<std::size_t>{512, 512}));
  EXPECT_EQ(file.chunks("autocorrelation"), (std::vector<std::size_t>{1, 512, 512}));
  for (const MapSpec& map : set.maps) {
    const auto got = file.values(map.name), wanted = values_of(set, map, {0, set.geometry.cells()});
    std::size_t wrong = 0;
    for (std::size_t i = 0; i < got.size(); ++i)
      wrong +=
          std::isnan(wanted[i]) ? !std::isnan(got[i]) : got[i] != static_cast<double>(static_cast<float>(wanted[i]));
    EXPECT_EQ(wrong, 0U) << map.name;
  }
}

TEST_F(ResultWriter, BytesDependNeitherOnBandsNorOnTheirOrder) {
  MapSet set = full_set(degrees(steps(-80, 0.1, 600), steps(-60, 0.1, 530)));
  set.lags = 3;
  const std::string one = bytes_of(write("one.nc", set, 600));
  EXPECT_GT(one.size(), 10000U);
  EXPECT_TRUE(one == bytes_of(write("again.nc", set, 600)));
  EXPECT_TRUE(one == bytes_of(write("bands.nc", set, 7)));
  EXPECT_TRUE(one == bytes_of(write("backwards.nc", set, 64, true)));
}

TEST_F(ResultWriter, DeflateCanBeTurnedOff) {
  MapSet set = full_set(small_grid());
  set.deflate = 0;
  const auto broken = test::broken_rules(write("plain.nc", set));
  ASSERT_EQ(broken.size(), set.maps.size());
  EXPECT_TRUE(contains(broken.front(), "not chunked, shuffled and deflated"));
}

// ---- sites ----
TEST_F(ResultWriter, SitesGetMapsCubesAndATable) {
  const MapSet set = full_set(sites());
  EXPECT_EQ(result_files("out/gauges.nc", set),
            (std::vector<std::string>{"out/gauges.nc", "out/gauges_cubes.nc", "out/gauges.csv"}));
  write("gauges.nc", set);
  EXPECT_EQ(names(), (std::vector<std::string>{"gauges.csv", "gauges.nc", "gauges_cubes.nc"}));
  const Reader maps(path("gauges.nc")), cubes(path("gauges_cubes.nc"));
  EXPECT_EQ(maps.dims("mean"), std::vector<std::string>{"station"});
  EXPECT_EQ(maps.text("mean", "coordinates"), "lat lon altitude time");
  EXPECT_EQ(maps.text("station_id", "cf_role"), "timeseries_id");
  EXPECT_EQ(maps.text("station_id", "grid_mapping"), "crs");  // where GDAL looks for the system of the points
  EXPECT_FALSE(maps.has("autocorrelation") || maps.has("lag") || cubes.has("mean"));
  EXPECT_EQ(cubes.dims("autocorrelation"), (std::vector<std::string>{"station", "lag"}));
  EXPECT_FLOAT_EQ(static_cast<float>(cubes.values("autocorrelation")[1 * 4 + 3]), 3001.1F);  // site 1, lag 3
}

TEST_F(ResultWriter, TheTableQuotesNamesKeepsAllDigitsAndLeavesMissingValuesEmpty) {
  MapSet set = full_set(sites());
  set.maps.resize(6);
  write("gauges.nc", set);
  EXPECT_FALSE(fs::exists(path("gauges_cubes.nc")));
  EXPECT_EQ(bytes_of(path("gauges.csv")),
            "station_id,lat,lon,altitude,status,valid_count,mean,trend_slope,first_time,trend_class\r\n"
            "Alder Weir,10,100.5,1,0,0,0.1,0.1,1970-01-01,0\r\n"
            "\"Birch, \"\"Upper\"\"\",20,-110,2,1,1,1.1,1.1,1970-01-02,1\r\n"
            "Cold Spring,30,120,3,,,,,,\r\n");
}

TEST_F(ResultWriter, SitesInManyChunksKeepTheirOrder) {
  Geometry place = sites();
  place.cols = 3000;
  place.site_names.clear();
  for (std::size_t site = 0; site < place.cols; ++site) place.site_names.push_back(fmt::format("S{}", site));
  place.lat = place.lon = place.altitude = steps(0, 0.01, place.cols);
  MapSet set = full_set(place);
  set.lags = 200;  // 1310 sites a chunk
  write("many.nc", set, 997);
  const auto got = Reader(path("many_cubes.nc")).values("autocorrelation");
  std::size_t wrong = 0;
  for (std::size_t site = 0; site + 1 < place.cols; ++site)
    for (std::size_t lag = 0; lag < set.lags; ++lag)
      wrong +=
          got[site * set.lags + lag] != static_cast<double>(static_cast<float>(value_at(set, set.maps[6], lag, site)));
  EXPECT_EQ(wrong, 0U);
}

// ---- names and disks ----
TEST_F(ResultWriter, NothingHasAFinalNameBeforeCommitAndNothingStaysWithoutIt) {
  const MapSet set = full_set(sites());
  {
    const auto sink = create_result(path("new/deeper/gauges.nc"), set, false);
    fill(*sink, set, 1);
    EXPECT_EQ(fs::exists(path("new/deeper/gauges.nc")), false);
  }
  EXPECT_EQ(names(), std::vector<std::string>{});
  write("new/deeper/gauges.nc", set);
  EXPECT_TRUE(fs::exists(path("new/deeper/gauges.nc")));
}

TEST_F(ResultWriter, AnExistingResultIsRefusedUnlessReplaced) {
  const MapSet set = full_set(sites());
  std::ofstream(path("gauges.csv")) << "precious";
  EXPECT_TRUE(contains(error_of([&] { (void)create_result(path("gauges.nc"), set, false); }), "--replace"));
  EXPECT_EQ(bytes_of(path("gauges.csv")), "precious");
  const auto sink = create_result(path("gauges.nc"), set, true);
  fill(*sink, set, 1);
  EXPECT_EQ(bytes_of(path("gauges.csv")), "precious");
  sink->commit();
  EXPECT_TRUE(bytes_of(path("gauges.csv")).starts_with("station_id"));
}

TEST_F(ResultWriter, AResultThatAppearsMeanwhileIsRefusedAtCommit) {
  const MapSet set = full_set(small_grid());
  {
    const auto sink = create_result(path("grid.nc"), set, false);
    fill(*sink, set, 1);
    std::ofstream(path("grid.nc")) << "precious";
    EXPECT_TRUE(contains(error_of([&] { sink->commit(); }), "exists already"));
  }
  EXPECT_EQ(names(), std::vector<std::string>{"grid.nc"});
  EXPECT_EQ(bytes_of(path("grid.nc")), "precious");
}

TEST_F(ResultWriter, FoldersThatCannotBeUsedAreRefusedWithARemedy) {
  const MapSet set = full_set(small_grid());
  std::ofstream(path("file")) << "x";
  EXPECT_TRUE(contains(error_of([&] { (void)create_result(path("file/grid.nc"), set, false); }), "output.file"));
  EXPECT_TRUE(contains(error_of([&] { (void)create_result("/proc/nowhere/grid.nc", set, false); }), "output.file"));
  EXPECT_TRUE(contains(error_of([&] { (void)create_result(folder_.string(), set, true); }), "folder"));
  EXPECT_TRUE(contains(error_of([&] { (void)create_result(path("x/"), set, false); }), "no file name"));
  EXPECT_EQ(names(), std::vector<std::string>{"file"});
}

TEST_F(ResultWriter, ADiskThatIsTooSmallShowsBeforeTheWork) {
  const MapSet set = full_set(degrees(steps(-80, 0.1, 600), steps(-60, 0.1, 530)));
  const FileSizeLimit limit(1 << 20);
  EXPECT_TRUE(
      contains(error_of([&] { (void)create_result(path("new/grid.nc"), set, false); }), "no room for the result"));
  EXPECT_EQ(names(), std::vector<std::string>{});
}

TEST_F(ResultWriter, ADiskThatFillsWhileTheResultIsAssembledLeavesNothing) {
  const MapSet set = full_set(small_grid());
  const auto sink = create_result(path("grid.nc"), set, false);
  fill(*sink, set, 4);
  {
    const FileSizeLimit limit(4096);
    EXPECT_TRUE(contains(error_of([&] { sink->commit(); }), "room"));
    EXPECT_EQ(names(), std::vector<std::string>{});
  }
  sink->commit();  // with room again
  EXPECT_EQ(names(), std::vector<std::string>{"grid.nc"});
}

TEST_F(ResultWriter, AFileThatDoesNotReadBackIsFound) {
  const MapSet set = full_set(small_grid());
  ValueSpool values(folder_, set);
  const std::vector<std::size_t> maps{0, 1, 2, 3, 4, 5, 6, 7};
  const CellRange all{0, set.geometry.cells()};
  for (const std::size_t map : maps) values.put(map, all, std::span<const double>(values_of(set, set.maps[map], all)));
  write_result_netcdf(path("part.nc"), set, maps, values);
  check_result_netcdf(path("part.nc"), set, maps, values);
  values.put(6, all, std::span<const double>(std::vector<double>(all.count * set.lags, 0.5)));
  EXPECT_TRUE(contains(error_of([&] { check_result_netcdf(path("part.nc"), set, maps, values); }), "autocorrelation"));
  fs::resize_file(path("part.nc"), fs::file_size(path("part.nc")) / 2);
  EXPECT_TRUE(contains(error_of([&] { check_result_netcdf(path("part.nc"), set, maps, values); }), "read back"));
}

// ---- mistakes of a caller ----
TEST_F(ResultWriter, MapsThatAreNotWholeAreRefusedAtCommit) {
  const MapSet set = full_set(small_grid());
  const auto sink = create_result(path("grid.nc"), set, false);
  for (std::size_t map = 0; map < set.maps.size(); ++map) {
    const CellRange cells{0, map == 3 ? 12U : 24U};
    sink->write(map, cells, std::span<const double>(values_of(set, set.maps[map], cells)));
  }
  const std::string text = error_of([&] { sink->commit(); }, ErrorKind::internal);
  EXPECT_TRUE(contains(text, "trend_slope"));
  EXPECT_TRUE(contains(text, "row 2"));
  EXPECT_EQ(names(), std::vector<std::string>{});
}

TEST_F(ResultWriter, ValuesThatDoNotFitAreRefused) {
  const MapSet set = full_set(small_grid());
  const auto sink = create_result(path("grid.nc"), set, false);
  const std::vector<double> big(24, 300);
  error_of([&] { sink->write(5, {0, 24}, std::span<const double>(big)); }, ErrorKind::internal);
  error_of([&] { sink->write(2, {3, 6}, std::span<const double>(big.data(), 6)); }, ErrorKind::internal);
  error_of([&] { sink->write(2, {0, 12}, std::span<const double>(big)); }, ErrorKind::internal);
}

TEST_F(ResultWriter, AFinishedResultTakesNothingMore) {
  const MapSet set = full_set(small_grid());
  const auto sink = create_result(path("grid.nc"), set, false);
  fill(*sink, set, 4);
  sink->commit();
  error_of([&] { sink->commit(); }, ErrorKind::internal);
  error_of([&] { sink->add_global({{"title", "late"}}); }, ErrorKind::internal);
}

}  // namespace
}  // namespace lagscape
