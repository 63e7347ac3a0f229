// Bounds of time as CF describes them (CF 1.10, sections 7.1 and 7.4; from memory); all data are invented.
#include "io/nc_sample.h"

namespace lagscape {
namespace {

using namespace test;

/// A series at one site with bounds of time.
struct BoundedSeries {
  std::string units = "days since 2001-01-01";
  std::vector<double> times, bounds;
  std::string bounds_units;
  bool declared = true, written = true;
  double first = 0;  ///< value of the first step; the others count on
};

std::string write(const std::string& path, const BoundedSeries& series) {
  NcSample s(path);
  const int t = s.dim("time", series.times.size()), two = s.dim("nv", 2), n = s.dim("station", 1);
  const int time = s.coordinate("time", {t}, series.times, series.units, "time");
  if (series.declared) s.text(time, "bounds", "time_bnds");
  if (series.written) s.coordinate("time_bnds", {t, two}, series.bounds, series.bounds_units);
  s.coordinate("lat", {n}, {51}, "degrees_north");
  s.coordinate("lon", {n}, {7}, "degrees_east");
  const int flow = s.var("flow", NC_DOUBLE, {t, n});
  s.text(flow, "coordinates", "lat lon");
  s.put(flow, range(series.first, 1, series.times.size()));
  return s.close();
}

std::vector<double> bounds_of(const std::vector<double>& edges) {
  std::vector<double> bounds;
  for (std::size_t i = 1; i < edges.size(); ++i) bounds.insert(bounds.end(), {edges[i - 1], edges[i]});
  return bounds;
}

// Means of the months of 2001 and 2002, stamped at the end of each.
BoundedSeries monthly_ends() {
  std::vector<double> edges = {0};
  for (int year = 0; year < 2; ++year)
    for (const double days : {31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31}) edges.push_back(edges.back() + days);
  BoundedSeries out;
  out.times.assign(edges.begin() + 1, edges.end());
  out.bounds = bounds_of(edges);
  return out;
}

BoundedSeries daily_ends() {
  BoundedSeries out;
  out.times = range(1, 1, 40);
  out.bounds = bounds_of(range(0, 1, 41));
  return out;
}

std::unique_ptr<TileSource> open(const std::vector<std::string>& files,
                                 std::optional<std::pair<std::string, std::string>> period = std::nullopt) {
  InputRequest job = request(files, "flow");
  job.period = std::move(period);
  return open_archive(job, {});
}

TEST(TimeBounds, MonthsStampedAtTheirEndAreThoseTheyCover) {
  const Folder folder;
  const auto source = open({write(folder / "a.nc", monthly_ends())});
  const TimeAxis& axis = source->panel().axis;
  EXPECT_EQ(axis.step(), (TimeStep{StepKind::months, 1}));
  ASSERT_EQ(axis.size(), 24U);
  EXPECT_EQ(axis.label(0).substr(0, 7), "2001-01");
  EXPECT_EQ(axis.label(23).substr(0, 7), "2002-12");
  EXPECT_EQ(axis.season_of(0), 0);
  EXPECT_TRUE(noted(source->panel(), "24 of 24 times lie in another step than the middle of their time bounds"));
}

TEST(TimeBounds, PeriodCutsByTheMonthsCovered) {
  const Folder folder;
  const auto source = open({write(folder / "a.nc", monthly_ends())}, {{"2002-01-01", "2002-12-31"}});
  EXPECT_EQ(source->panel().axis.size(), 12U);
  expect_same(all_values(*source), range(12, 1, 12));
}

TEST(TimeBounds, DaysStampedAtTheNextMidnightAreThoseTheyCover) {
  const Folder folder;
  const auto source = open({write(folder / "a.nc", daily_ends())}, {{"2001-01-01", "2001-01-31"}});
  EXPECT_EQ(source->panel().axis.step(), (TimeStep{StepKind::seconds, kDay}));
  EXPECT_EQ(source->panel().axis.label(0), "2001-01-01T12:00:00");
  expect_same(all_values(*source), range(0, 1, 31));
}

TEST(TimeBounds, FilesStampedAtTheBeginningAndAtTheEndJoin) {
  const Folder folder;
  BoundedSeries later = daily_ends();
  for (double& time : later.times) time += 39;  // the 40 days from day 40, stamped at their beginning
  for (double& bound : later.bounds) bound += 40;
  later.first = 40;
  const auto source = open({write(folder / "b.nc", later), write(folder / "a.nc", daily_ends())});
  expect_same(all_values(*source), range(0, 1, 80));
}

TEST(TimeBounds, StampsInTheMiddleStayWithoutANote) {
  const Folder folder;
  BoundedSeries series = daily_ends();
  for (double& time : series.times) time -= 0.5;
  const auto source = open({write(folder / "a.nc", series)});
  EXPECT_EQ(source->panel().axis.label(0), "2001-01-01T12:00:00");
  EXPECT_FALSE(noted(source->panel(), "bounds"));
}

TEST(TimeBounds, StampsAtTheBeginningGiveWayToTheMiddle) {
  const Folder folder;
  BoundedSeries series = daily_ends();
  for (double& time : series.times) time -= 1;
  const auto source = open({write(folder / "a.nc", series)});
  EXPECT_EQ(source->panel().axis.label(0), "2001-01-01T12:00:00");
  EXPECT_TRUE(noted(source->panel(), "the time of a step is the middle of its time bounds"));
}

TEST(TimeBounds, EveryFaultLeavesTheStampsAndIsNoted) {
  const auto broken = [](auto change) {
    BoundedSeries series = daily_ends();
    change(series);
    return series;
  };
  const std::vector<std::pair<BoundedSeries, std::string>> cases = {
      {broken([](BoundedSeries& s) { std::fill(s.bounds.begin(), s.bounds.end(), 0); }),
       "40 of 40 do not contain their time"},
      {broken([](BoundedSeries& s) { std::swap(s.bounds[6], s.bounds[7]); }), "1 of 40 end before they begin"},
      {broken([](BoundedSeries& s) { s.bounds[79] = 39.5; }), "1 of 40 do not contain their time"},
      {broken([](BoundedSeries& s) {  // sums since the beginning
         for (std::size_t i = 0; i < s.bounds.size(); i += 2) s.bounds[i] = 0;
       }),
       "39 of 40 begin or end with the period before"},
      {broken([](BoundedSeries& s) { s.bounds[3] = kNaN; }), "missing (NaN)"},
      {broken([](BoundedSeries& s) { s.bounds[3] = NC_FILL_DOUBLE; }), "beyond any date"},
      {broken([](BoundedSeries& s) { s.bounds_units = "hours since 2001-01-01"; }), "are not those of the times"},
      {broken([](BoundedSeries& s) { s.written = false; }), "the file has no such variable"},
  };
  for (const auto& [series, why] : cases) {
    const Folder folder;
    const auto source = open({write(folder / "a.nc", series)});
    EXPECT_EQ(source->panel().axis.label(0), "2001-01-02") << why;
    EXPECT_TRUE(noted(source->panel(), "time bounds 'time_bnds' are not used") && noted(source->panel(), why)) << why;
  }
}

TEST(TimeBounds, UndeclaredBoundsAreOnlyAVariable) {
  const Folder folder;
  BoundedSeries series = daily_ends();
  series.declared = false;
  const auto source = open({write(folder / "a.nc", series)});
  EXPECT_EQ(source->panel().axis.label(0), "2001-01-02");
  EXPECT_FALSE(noted(source->panel(), "bounds"));
}

TEST(TimeBounds, StampsStayWhereOnlySomeFilesHaveBounds) {
  const Folder folder;
  BoundedSeries later = daily_ends();
  for (double& time : later.times) time += 40;
  later.declared = false;
  later.first = 40;
  const auto source = open({write(folder / "a.nc", daily_ends()), write(folder / "b.nc", later)});
  EXPECT_EQ(source->panel().axis.label(0), "2001-01-02");
  expect_same(all_values(*source), range(0, 1, 80));
  EXPECT_TRUE(noted(source->panel(), "not every file has usable ones"));
}

TEST(TimeBounds, OverlapsAreFoundByTheMiddle) {
  const Folder folder;
  BoundedSeries again = daily_ends();
  for (double& time : again.times) time -= 1;  // the same days, stamped at their beginning
  const auto source = open({write(folder / "a.nc", daily_ends()), write(folder / "b.nc", again)});
  expect_same(all_values(*source), range(0, 1, 40));
  EXPECT_TRUE(noted(source->panel(), "the values are the same"));
}

TEST(TimeBounds, ScalarTimesHaveTheirBoundsToo) {
  const Folder folder;
  std::vector<std::string> files;
  for (int month = 1; month <= 3; ++month) {
    NcSample s(folder / ("m" + std::to_string(month) + ".nc"));
    const int y = s.dim("lat", 2), x = s.dim("lon", 2), two = s.dim("nv", 2);
    const int time = s.coordinate("time", {}, {static_cast<double>(month)}, "months since 2001-01-01", "time");
    s.text(time, "bounds", "time_bnds");
    s.coordinate("time_bnds", {two}, {month - 1.0, static_cast<double>(month)}, "");
    s.coordinate("lat", {y}, {1, 2}, "degrees_north");
    s.coordinate("lon", {x}, {1, 2}, "degrees_east");
    s.put(s.var("flow", NC_FLOAT, {y, x}), range(10.0 * month, 1, 4));
    files.push_back(s.close());
  }
  EXPECT_EQ(open(files)->panel().axis.label(0), "2001-01-16T12:00:00");
}

}  // namespace
}  // namespace lagscape
