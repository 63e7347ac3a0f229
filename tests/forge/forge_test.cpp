#include "lagscape/forge/forge.h"

#include <gtest/gtest.h>
#include <netcdf.h>

#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <functional>
#include <iterator>
#include <limits>

#include "forge/recipes.h"
#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// What a file holds of a variable: its values with packing undone, missing = NaN, and its dimensions.
struct Held {
  std::vector<double> values;
  std::vector<std::size_t> shape;
};

Held read(const std::string& path, const std::string& name) {
  int file = -1, variable = -1, count = 0;
  EXPECT_EQ(nc_open(path.c_str(), NC_NOWRITE, &file), NC_NOERR) << path;
  EXPECT_EQ(nc_inq_varid(file, name.c_str(), &variable), NC_NOERR) << name;
  nc_inq_varndims(file, variable, &count);
  std::vector<int> dimensions(static_cast<std::size_t>(count));
  nc_inq_vardimid(file, variable, dimensions.data());
  Held held;
  std::size_t total = 1;
  for (const int dimension : dimensions) {
    held.shape.emplace_back();
    nc_inq_dimlen(file, dimension, &held.shape.back());
    total *= held.shape.back();
  }
  held.values.resize(total);
  EXPECT_EQ(nc_get_var_double(file, variable, held.values.data()), NC_NOERR);
  double fill = kNaN, scale = 1, offset = 0;
  nc_get_att_double(file, variable, "_FillValue", &fill);
  nc_get_att_double(file, variable, "scale_factor", &scale);
  nc_get_att_double(file, variable, "add_offset", &offset);
  for (double& value : held.values) value = value == fill ? kNaN : value * scale + offset;
  nc_close(file);
  return held;
}

std::string attribute(const std::string& path, const std::string& variable, const std::string& name) {
  int file = -1, id = NC_GLOBAL;
  std::size_t length = 0;
  nc_open(path.c_str(), NC_NOWRITE, &file);
  if (!variable.empty()) nc_inq_varid(file, variable.c_str(), &id);
  std::string text;
  if (nc_inq_attlen(file, id, name.c_str(), &length) == NC_NOERR) {
    text.resize(length);
    nc_get_att_text(file, id, name.c_str(), text.data());
  }
  nc_close(file);
  return text;
}

void expect_same(const std::vector<double>& a, const std::vector<double>& b) {
  ASSERT_EQ(a.size(), b.size());
  std::size_t different = 0;
  for (std::size_t i = 0; i < a.size(); ++i)
    different += std::size_t{!(a[i] == b[i] || (std::isnan(a[i]) && std::isnan(b[i])))};
  EXPECT_EQ(different, 0U);
}

/// A folder of its own for each test, removed when the test ends.
class Forge : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string pattern = (fs::temp_directory_path() / "forge_XXXXXX").string();
    folder_ = mkdtemp(pattern.data());
  }
  void TearDown() override { fs::remove_all(folder_); }
  ForgeReport forge(const RecipeText& text, bool replace = false) {
    const std::string path = folder_ + "/recipe.toml";
    std::ofstream(path) << text.text();
    return forge_recipe(path, {}, replace, {}, checkpoint_);
  }
  [[nodiscard]] std::string made(const std::string& name) const { return folder_ + "/out/" + name; }
  [[nodiscard]] std::size_t files_made() const {
    return fs::exists(folder_ + "/out")
               ? static_cast<std::size_t>(std::distance(fs::directory_iterator(folder_ + "/out"), {}))
               : 0;
  }
  std::string folder_;
  std::function<void()> checkpoint_;
};

RecipeText patchy() {
  RecipeText text;
  text.patches +=
      "trend = 0.1\ngaps = { random = 0.1 }\n[[patch]]\nname = \"long\"\nrows = [2, 3]\nd = 0.3\n[[lake]]\ncircle = "
      "[4, 4, 1]\n";
  return text;
}

TEST_F(Forge, IsStoppedAtAnyStepByItsCheckpointAndLeavesNothing) {
  RecipeText text = patchy();
  std::size_t calls = 0, last = 0;
  checkpoint_ = [&] {
    if (++calls == last) throw Error(ErrorKind::interrupted, "stopped");
  };
  forge(text);
  const std::size_t all = calls;
  EXPECT_GE(all, 120U);  // one a step
  fs::remove_all(folder_ + "/out");
  for (const std::size_t stop : {std::size_t{1}, all / 2, all}) {
    calls = 0;
    last = stop;
    EXPECT_THROW(forge(text), Error) << stop;
    EXPECT_FALSE(fs::exists(folder_ + "/out")) << stop;
  }
}

TEST_F(Forge, EveryFormatLayoutAndChunkHoldsTheSameValues) {
  RecipeText text = patchy();
  const std::string plain = text.output;
  forge(text);
  const Held first = read(made("made.nc"), "wetness");
  EXPECT_EQ(first.shape, (std::vector<std::size_t>{120, 6, 10}));
  for (const char* more :
       {"layout = \"series\"\n", "layout = \"contiguous\"\n", "format = \"classic\"\n", "format = \"64bit\"\n",
        "format = \"cdf5\"\n", "chunks = [7, 2, 3]\n", "layout = \"series\"\nchunks = [50, 1, 4]\ndeflate = 0\n",
        "unlimited = false\nlayout = \"series\"\n"}) {
    SCOPED_TRACE(more);
    text.output = plain + more;
    forge(text, true);
    const Held again = read(made("made.nc"), "wetness");
    EXPECT_EQ(again.shape, first.shape);
    expect_same(again.values, first.values);
  }
}

TEST_F(Forge, FilesSplitByYearOrDecadeFollowEachOther) {
  RecipeText text = patchy();
  text.time = "start = \"1988-06-15\"\nsteps = 60\nstep = \"P1M\"\n";
  forge(text);
  const std::vector<double> whole = read(made("made.nc"), "wetness").values;
  for (const auto& [split, names] : {std::pair<std::string, std::vector<std::string>>{"decade", {"1980s", "1990s"}},
                                     {"year", {"1988", "1989", "1990", "1991", "1992", "1993"}}}) {
    for (const char* layout : {"map", "series"}) {
      text.output = fmt::format("folder = \"out\"\nname = \"made\"\nsplit = \"{}\"\nlayout = \"{}\"\n", split, layout);
      forge(text, true);
      std::vector<double> joined;
      for (const std::string& name : names) {
        const std::vector<double> part = read(made("made_" + name + ".nc"), "wetness").values;
        joined.insert(joined.end(), part.begin(), part.end());
      }
      expect_same(joined, whole);
    }
  }
}

TEST_F(Forge, TheTruthFileStatesEveryPatch) {
  forge(patchy());
  const std::string truth = made("truth_made.nc");
  const std::vector<double> tau = read(truth, "decorrelation_time").values, slope = read(truth, "trend_slope").values;
  const std::vector<double> d = read(truth, "long_memory_exponent").values, patch = read(truth, "patch").values;
  const Held coefficients = read(truth, "ar_coefficients");
  EXPECT_EQ(coefficients.shape, (std::vector<std::size_t>{1, 6, 10}));
  EXPECT_NEAR(tau[0], 4, 1e-14);
  EXPECT_EQ(slope[0], 0.1);
  EXPECT_EQ(coefficients.values[0], 0.6);
  EXPECT_TRUE(std::isnan(tau[25]));
  EXPECT_EQ(d[25], 0.3);
  EXPECT_TRUE(std::isnan(coefficients.values[25]));
  EXPECT_TRUE(std::isnan(tau[44]) && std::isnan(patch[44]) && std::isnan(slope[44]));
  EXPECT_EQ(attribute(truth, "patch", "flag_meanings"), "loam long");
  EXPECT_EQ(attribute(truth, "decorrelation_time", "units"), "month");
  const std::vector<double> share = read(truth, "gap_share").values, x = read(made("made.nc"), "wetness").values;
  for (std::size_t c = 0; c < 60; ++c) {
    double missing = 0;
    for (std::size_t t = 0; t < 120; ++t) missing += std::isnan(x[t * 60 + c]) ? 1 : 0;
    EXPECT_EQ(share[c], missing / 120) << c;
  }
}

TEST_F(Forge, TimesAreThoseOfTheCalendar) {
  RecipeText text;
  text.time =
      "start = \"2000-02-28T12:00\"\nsteps = 3\nstep = \"P1D\"\ncalendar = \"noleap\"\nunits = \"hours since "
      "2000-02-28\"\n";
  forge(text);
  EXPECT_EQ(read(made("made.nc"), "time").values, (std::vector<double>{12, 36, 60}));
  EXPECT_EQ(attribute(made("made.nc"), "time", "calendar"), "noleap");
  text.time = "start = \"1999-07-01\"\nsteps = 3\nstep = \"P1Y\"\nunits = \"days since 1999-07-01\"\n";
  forge(text, true);
  EXPECT_EQ(read(made("made.nc"), "time").values, (std::vector<double>{0, 366, 731}));
}

TEST_F(Forge, PackedValuesAreRoundedToTheirQuantum) {
  RecipeText text;
  forge(text);
  const std::vector<double> exact = read(made("made.nc"), "wetness").values;
  text.variable = "[[variable]]\nname = \"wetness\"\ntype = \"short\"\nscale = 0.001\noffset = 2\nfill = -30000\n";
  forge(text, true);
  const std::vector<double> packed = read(made("made.nc"), "wetness").values;
  for (std::size_t i = 0; i < exact.size(); ++i) EXPECT_NEAR(packed[i], exact[i], 0.0005000001);
}

TEST_F(Forge, AValueThatCannotBeStoredIsRefusedAndLeavesNothing) {
  for (const auto& [packing, words] : {std::pair{"scale = 0.00001\n", "does not fit into type short"},
                                       std::pair{"scale = 1\nfill = 0\n", "would be stored as the fill value"}}) {
    RecipeText text;
    text.variable = fmt::format("[[variable]]\nname = \"wetness\"\ntype = \"short\"\n{}", packing);
    try {
      forge(text);
      FAIL();
    } catch (const Error& error) {
      EXPECT_EQ(error.kind(), ErrorKind::job);
      EXPECT_NE(std::string(error.what()).find(words), std::string::npos) << error.what();
    }
    EXPECT_EQ(files_made(), 0U);
  }
}

TEST_F(Forge, ExistingFilesAreRefusedUnlessReplaceAndStayAsTheyAre) {
  RecipeText text;
  forge(text);
  const std::vector<double> before = read(made("made.nc"), "wetness").values;
  text.top = "seed = 6\n";
  try {
    forge(text);
    FAIL();
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::output);
    EXPECT_NE(std::string(error.what()).find("made.nc, truth_made.nc"), std::string::npos) << error.what();
  }
  expect_same(read(made("made.nc"), "wetness").values, before);
  EXPECT_EQ(files_made(), 2U);
  forge(text, true);
  EXPECT_NE(read(made("made.nc"), "wetness").values, before);
}

RecipeText panel() {
  RecipeText text;
  text.time = "start = \"2001-01-01\"\nsteps = 400\nstep = \"P1D\"\n";
  text.space =
      "[[site]]\nname = \"Alder Weir\"\nlat = 47.9\nlon = -29.3\naltitude = 10\n"
      "[[site]]\nname = \"Cold Spring\"\nlat = 47.7\nlon = -28.4\naltitude = 20\n";
  text.variable = "[[variable]]\nname = \"stage\"\nunits = \"m\"\ntype = \"short\"\nscale = 0.001\n";
  text.patches += "gaps = { random = 0.1 }\n[[patch]]\nname = \"b\"\nsites = [\"Cold Spring\"]\nmean = 3\n";
  text.output += "format = [\"netcdf4\", \"csv\"]\ndecimals = 3\n";
  return text;
}

TEST_F(Forge, IsStoppedWhileItWritesCsv) {
  std::size_t calls = 0;
  checkpoint_ = [&] {
    if (++calls == 600) throw Error(ErrorKind::interrupted, "stopped");  // 400 steps of NetCDF come first
  };
  EXPECT_THROW(forge(panel()), Error);
  EXPECT_EQ(calls, 600U);
  EXPECT_FALSE(fs::exists(folder_ + "/out"));
}

TEST_F(Forge, APanelIsTheSameAsNetcdfInEitherOrderAndAsCsv) {
  RecipeText text = panel();
  forge(text);
  const Held by_time = read(made("made.nc"), "stage");
  EXPECT_EQ(by_time.shape, (std::vector<std::size_t>{400, 2}));
  text.output += "layout = \"series\"\n";
  forge(text, true);
  const Held by_site = read(made("made.nc"), "stage");
  EXPECT_EQ(by_site.shape, (std::vector<std::size_t>{2, 400}));
  EXPECT_EQ(attribute(made("made.nc"), "", "featureType"), "timeSeries");
  EXPECT_EQ(attribute(made("made.nc"), "station_name", "cf_role"), "timeseries_id");

  std::ifstream csv(made("made.csv"));
  std::string line;
  std::getline(csv, line);
  EXPECT_EQ(line, "# unit: m");
  std::getline(csv, line);
  EXPECT_EQ(line, "date,Alder Weir,Cold Spring");
  for (std::size_t t = 0; t < 400; ++t) {
    std::getline(csv, line);
    const std::vector<std::string> fields = split(line, ',');
    ASSERT_EQ(fields.size(), 3U) << line;
    if (t == 59) {
      EXPECT_EQ(fields[0], "2001-03-01");
    }
    for (std::size_t s = 0; s < 2; ++s) {
      const double value = by_time.values[2 * t + s], again = by_site.values[400 * s + t];
      EXPECT_TRUE(value == again || (std::isnan(value) && std::isnan(again)));
      if (std::isnan(value)) {
        EXPECT_EQ(fields[s + 1], "");
        continue;
      }
      EXPECT_NEAR(to_number(fields[s + 1]).value_or(kNaN), value, 1e-9);
    }
  }
  std::ifstream sites(made("made_sites.csv"));
  const std::string listed{std::istreambuf_iterator<char>(sites), std::istreambuf_iterator<char>()};
  EXPECT_EQ(listed, "name,lon,lat,altitude\nAlder Weir,-29.3,47.9,10\nCold Spring,-28.4,47.7,20\n");
}

TEST_F(Forge, GridsCarryTheirGeometry) {
  RecipeText text;
  text.space =
      "[grid]\nkind = \"projected\"\nrows = 3\ncols = 4\ny = [0, 20]\nx = [-15, 15]\nunits = \"km\"\n"
      "[grid.mapping]\ngrid_mapping_name = \"lambert_conformal_conic\"\nstandard_parallel = [25, 60]\n"
      "latitude_of_projection_origin = 42.5\nlongitude_of_central_meridian = 10\n";
  forge(text);
  EXPECT_EQ(read(made("made.nc"), "x").values, (std::vector<double>{-15, -5, 5, 15}));
  EXPECT_EQ(attribute(made("made.nc"), "x", "units"), "km");
  EXPECT_EQ(attribute(made("made.nc"), "wetness", "grid_mapping"), "crs");
  EXPECT_EQ(attribute(made("made.nc"), "crs", "grid_mapping_name"), "lambert_conformal_conic");
  EXPECT_EQ(attribute(made("truth_made.nc"), "decorrelation_time", "grid_mapping"), "crs");

  text.space = "[grid]\nkind = \"curvilinear\"\nrows = 3\ncols = 5\ncentre = [50, 10]\nspacing = [1, 2]\nangle = 90\n";
  forge(text, true);
  const Held lat = read(made("made.nc"), "lat");
  EXPECT_EQ(lat.shape, (std::vector<std::size_t>{3, 5}));
  EXPECT_EQ(attribute(made("made.nc"), "wetness", "coordinates"), "lat lon");
  EXPECT_NEAR(lat.values[7], 50, 1e-12);  // the middle
  EXPECT_NEAR(lat.values[8], 52, 1e-12);  // one column on, turned to point north
  EXPECT_NEAR(read(made("made.nc"), "lon").values[12], 9, 1e-12);
}

TEST_F(Forge, SeveralVariablesHaveTheirOwnNoiseAndTruth) {
  RecipeText text;
  text.variable += "[[variable]]\nname = \"other\"\n";
  text.patches += "variable = \"wetness\"\n[[patch]]\nname = \"b\"\nvariable = \"other\"\n";
  EXPECT_EQ(forge(text).files.size(), 3U);
  EXPECT_NE(read(made("made.nc"), "wetness").values, read(made("made.nc"), "other").values);
  EXPECT_NEAR(read(made("truth_made_wetness.nc"), "decorrelation_time").values[0], 4, 1e-14);
  EXPECT_EQ(read(made("truth_made_other.nc"), "decorrelation_time").values[0], 1);
}

TEST_F(Forge, LongMemoryThatWouldNotFitIntoMemorySaysWhatToDo) {
  RecipeText text;
  text.space = "[grid]\nkind = \"index\"\nrows = 1000\ncols = 1000\n";
  text.time = "start = \"1981-01-15\"\nsteps = 1200\nstep = \"P1M\"\n";
  text.patches = "[[patch]]\nname = \"p\"\nd = 0.3\n";
  try {
    forge(text);
    FAIL();
  } catch (const Error& error) {
    EXPECT_NE(std::string(error.what()).find("layout = \"series\""), std::string::npos) << error.what();
  }
}

}  // namespace
}  // namespace lagscape
