#include "lagscape/io/survey.h"

#include <algorithm>
#include <fstream>

#include "io/nc_sample.h"

namespace lagscape {
namespace {

using namespace test;

struct Axes {
  int time, lat, lon;
};

Axes grid_axes(NcSample& s, std::size_t steps, const std::string& time_units) {
  const Axes axes{s.dim("time", steps), s.dim("lat", 2), s.dim("lon", 3)};
  s.coordinate("time", {axes.time}, range(0, 1, steps), time_units);
  s.coordinate("lat", {axes.lat}, {1, 2}, "degrees_north");
  s.coordinate("lon", {axes.lon}, {1, 2, 3}, "degrees_east");
  return axes;
}

const SurveyedVariable& named(const SurveyReport& report, const std::string& name) {
  const auto found =
      std::find_if(report.variables.begin(), report.variables.end(), [&](const auto& v) { return v.name == name; });
  if (found == report.variables.end()) throw std::runtime_error("no variable " + name);
  return *found;
}

bool quirk(const SurveyReport& report, const std::string& part) {
  return std::any_of(report.quirks.begin(), report.quirks.end(), [&](const std::string& q) { return has(q, part); });
}

TEST(Survey, SaysWhatCanBeAnalysedAndWhyTheRestCannot) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const auto [t, y, x] = grid_axes(s, 4, "days since 2001-01-01");
  const int level = s.dim("level", 2);
  s.coordinate("level", {level}, {850, 500}, "hPa");
  const int wetness = s.var("wetness", NC_FLOAT, {t, y, x});
  s.text(wetness, "units", "1");
  std::vector<double> values = range(0, 1, 24);
  for (const std::size_t i : {0U, 6U, 12U, 18U}) values[i] = NC_FILL_FLOAT;  // one cell of six
  s.put(wetness, values);
  s.put(s.var("wind", NC_FLOAT, {t, level, y, x}), range(0, 1, 48));
  s.put(s.var("height", NC_FLOAT, {y, x}), range(0, 1, 6));
  const SurveyReport report = survey_files({s.close()}, "", {});

  ASSERT_EQ(report.kinds, (std::vector<std::string>{"netCDF-4"}));
  ASSERT_EQ(report.variables.size(), 3U);  // coordinates are no data
  const SurveyedVariable& first = named(report, "wetness");
  EXPECT_TRUE(first.usable) << first.why_not;
  EXPECT_EQ(first.panel.axis.size(), 4U);
  EXPECT_EQ(first.panel.geometry.kind, GeometryKind::latlon);
  EXPECT_DOUBLE_EQ(first.missing_share, 1.0 / 6);
  EXPECT_EQ(first.sampled_steps, 4U);
  const SurveyedVariable& wind = named(report, "wind");
  EXPECT_TRUE(wind.usable) << wind.why_not;
  EXPECT_EQ(wind.select, (std::vector<std::pair<std::string, double>>{{"level", 850}}));
  EXPECT_TRUE(has(wind.to_do, "select = { level = 850 }") && has(wind.to_do, "850, 500 hPa")) << wind.to_do;
  EXPECT_FALSE(named(report, "height").usable);
  EXPECT_TRUE(has(named(report, "height").why_not, "no time axis"));
  EXPECT_TRUE(quirk(report, "wind: has no unit"));
}

TEST(Survey, FindsTheDateThatATimeUnitLacks) {
  const Folder folder;
  NcSample s(folder / "a.nc", 0);
  const auto [t, y, x] = grid_axes(s, 3, "hours");
  int time = -1;
  ok(nc_inq_varid(s.id(), "time", &time));
  s.text(time, "long_name", "ANALYSIS time from 20200131");
  s.put(s.var("pm10", NC_FLOAT, {t, y, x}), range(0, 1, 18));
  const SurveyReport report = survey_files({s.close()}, "", {});
  EXPECT_EQ(report.mend_time, "time = { unit = \"hours since 2020-01-31\" }");
  EXPECT_TRUE(named(report, "pm10").usable);
  EXPECT_EQ(named(report, "pm10").panel.axis.label(1), "2020-01-31T01:00:00");
}

TEST(Survey, YearsAndWrittenDaysAreReadForWhatTheyAre) {
  const Folder folder;
  const auto surveyed = [&](const char* name, const std::string& units, const std::vector<double>& times) {
    NcSample s(folder / name);
    const int t = s.dim("time", times.size()), y = s.dim("lat", 2), x = s.dim("lon", 3);
    s.coordinate("time", {t}, times, units);
    s.coordinate("lat", {y}, {1, 2}, "degrees_north");
    s.coordinate("lon", {x}, {1, 2, 3}, "degrees_east");
    s.put(s.var("flow", NC_FLOAT, {t, y, x}), range(0, 1, 6 * times.size()));
    return survey_files({s.close()}, "", {});
  };
  const SurveyReport years = surveyed("years.nc", "year", range(1950, 1, 20));
  ASSERT_TRUE(named(years, "flow").usable) << named(years, "flow").why_not;
  EXPECT_EQ(named(years, "flow").panel.axis.label(0), "1950-01-01");
  EXPECT_EQ(named(years, "flow").panel.axis.label(19), "1969-01-01");
  EXPECT_EQ(years.mend_time, "time = { unit = \"years since 0000-01-01\", calendar = \"proleptic_gregorian\" }");
  const SurveyReport days = surveyed("days.nc", "", {19810130, 19810131, 19810201});
  ASSERT_TRUE(named(days, "flow").usable) << named(days, "flow").why_not;
  EXPECT_EQ(named(days, "flow").panel.axis.label(2), "1981-02-01");
  EXPECT_EQ(days.mend_time, "time = { unit = \"day as %Y%m%d.%f\" }");
  EXPECT_FALSE(named(surveyed("unknown.nc", "days", range(1950, 1, 20)), "flow").usable);  // may be days since ...
}

TEST(Survey, FilesOfDifferentArchivesAreNamed) {
  const Folder folder;
  std::vector<std::string> files;
  for (const char* name : {"rain", "wind"}) {
    NcSample s(folder / (std::string(name) + ".nc"));
    const auto [t, y, x] = grid_axes(s, 2, "days since 2001-01-01");
    s.put(s.var(name, NC_FLOAT, {t, y, x}), range(0, 1, 12));
    files.push_back(s.close());
  }
  const std::string message = message_of([&] { static_cast<void>(survey_files(files, "", {})); });
  EXPECT_TRUE(has(message, "these files do not belong together: " + files[0] + " has rain, " + files[1] + " has wind"));
  EXPECT_TRUE(has(message, "by themselves"));
  NcSample layered(folder / "layered.nc");
  const auto [t, y, x] = grid_axes(layered, 2, "days since 2003-01-01");
  layered.put(layered.var("rain", NC_FLOAT, {t, layered.dim("level", 3), y, x}), range(0, 1, 36));
  const SurveyReport mixed = survey_files({layered.close(), files[0]}, "", {});
  EXPECT_TRUE(has(named(mixed, "rain").why_not, "has a dimension 'level', in " + files[0] + " it has none"));
  files[1] = folder / "absent.nc";
  const std::string absent = message_of([&] { static_cast<void>(survey_files(files, "", {})); });
  EXPECT_TRUE(has(absent, "does not exist"));
  EXPECT_FALSE(has(absent, "job"));
}

TEST(Survey, SaysWhatIsOddAboutValues) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const auto [t, y, x] = grid_axes(s, 2, "days since 2001-01-01");
  const int odd = s.var("anomaly", NC_SHORT, {t, y, x});
  s.text(odd, "units", "C");
  s.numbers(odd, "_FillValue", NC_SHORT, {-999});
  s.put(odd, {-999, -1016, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12});
  const int endless = s.var("ratio", NC_DOUBLE, {t, y, x});
  s.put(endless, {kInfinity, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11});
  const int ranged = s.var("share", NC_FLOAT, {t, y, x});
  s.numbers(ranged, "valid_range", NC_FLOAT, {0, 1});
  s.put(ranged, range(5, 1, 12));
  const SurveyReport report = survey_files({s.close()}, "", {});
  EXPECT_TRUE(quirk(report, "fill value -999 lies among the values"));
  EXPECT_TRUE(quirk(report, "coulomb"));
  EXPECT_TRUE(quirk(report, "infinite values"));
  EXPECT_TRUE(quirk(report, "rejects nearly all values"));
}

// Which numbers mark missing values when nobody declares them is common practice, without a published source.
TEST(Survey, CustomaryMarksOfMissingValuesAreToldWhenNotDeclared) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  const auto [t, y, x] = grid_axes(s, 2, "days since 2001-01-01");
  s.put(s.var("rain", NC_FLOAT, {t, y, x}), {-999, 0, 3, 200, 5, 6, 7, 8, 9, -999, 11, 12});
  s.put(s.var("sea", NC_FLOAT, {t, y, x}), {1e20, 1e20, -3, 4, 5, 6, 7, 8, 9, 10, 11, 12});
  s.put(s.var("elevation", NC_FLOAT, {t, y, x}), {-99, -300, -3, 4, 5, 6, 7, 8, 9, 10, 11, 12});
  const int packed = s.var("packed", NC_SHORT, {t, y, x});
  s.numbers(packed, "scale_factor", NC_DOUBLE, {0.5});
  s.put(packed, {-32768, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12});
  const int declared = s.var("declared", NC_FLOAT, {t, y, x});
  s.numbers(declared, "missing_value", NC_FLOAT, {-9999});
  s.put(declared, {-9999, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12});
  s.put(s.var("empty", NC_FLOAT, {t, y, x}), std::vector<double>(12, kNaN));
  const SurveyReport report = survey_files({s.close()}, "", {});
  EXPECT_TRUE(quirk(report, "rain: -999 (2 in the sample) looks like"));
  EXPECT_TRUE(quirk(report, "between 0 and 200. If it is one, add to [input] of the job: missing_values = [-999]"));
  EXPECT_TRUE(quirk(report, "missing_values = [1e+20]"));
  EXPECT_TRUE(quirk(report, "missing_values = [-16384]"));
  EXPECT_FALSE(quirk(report, "elevation: -99"));
  EXPECT_FALSE(quirk(report, "declared: -9999"));
  EXPECT_TRUE(quirk(report, "empty: all 12 sampled values are missing"));
}

TEST(Survey, LongRecordIsSampledEvenlyFromItsFirstToItsLastStep) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  constexpr std::size_t kLength = 4000;
  const auto [t, y, x] = grid_axes(s, kLength, "days since 2001-01-01");
  std::vector<double> values(kLength * 6, 1);
  std::fill(values.begin() + kLength * 3, values.end(), NC_FILL_FLOAT);  // the second half of the record
  s.put(s.var("wetness", NC_FLOAT, {t, y, x}), values);
  const SurveyReport report = survey_files({s.close()}, "", {});
  EXPECT_EQ(named(report, "wetness").sampled_steps, 400U);
  EXPECT_NEAR(named(report, "wetness").missing_share, 0.5, 0.005);
}

TEST(Survey, CsvPanelIsReadWhole) {
  const Folder folder;
  std::ofstream(folder / "gauges.csv") << "# unit: m3 s-1\ndate,Alder,Birch\n2001-01-01,1,\n2001-01-02,2,5\n";
  const SurveyReport report = survey_files({folder / "gauges.csv"}, "", {});
  ASSERT_EQ(report.variables.size(), 1U);
  EXPECT_EQ(report.variables[0].units, "m3 s-1");
  EXPECT_DOUBLE_EQ(report.variables[0].missing_share, 0.25);
  EXPECT_TRUE(quirk(report, "no coordinates"));
  std::ofstream(folder / "marked.csv") << "date,Alder,Birch\n2001-01-01,1,-9999\n2001-01-02,2,5\n";
  EXPECT_TRUE(quirk(survey_files({folder / "marked.csv"}, "", {}), "missing_values = [-9999]"));
}

}  // namespace
}  // namespace lagscape
