#include "io/csv_panel.h"

#include <gtest/gtest.h>
#include <unistd.h>
#include <atomic>
#include <cmath>
#include <filesystem>
#include <fstream>
#include <numeric>
#include <random>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

#define EXPECT_HAS(text, part) EXPECT_NE((text).find(part), std::string::npos) << (text)

class CsvPanel : public testing::Test {
 protected:
  CsvPanel() {
    static std::atomic<int> counter{0};
    folder_ = std::filesystem::temp_directory_path() /
              ("lagscape_csv_" + std::to_string(::getpid()) + "_" + std::to_string(counter++));
    std::filesystem::create_directories(folder_);
    request_.variable = "flow";
  }
  ~CsvPanel() override { std::filesystem::remove_all(folder_); }

  std::string write(const std::string& name, const std::string& content) {
    const std::string path = (folder_ / name).string();
    std::ofstream(path, std::ios::binary) << content;
    return path;
  }

  // Adds a panel file to the request.
  void panel(const std::string& content, const std::string& name = "gauges.csv") {
    request_.files.push_back(write(name, content));
  }

  [[nodiscard]] std::unique_ptr<TileSource> open() const { return open_csv_panel(request_, Log{}); }

  // All values of a site, missing = NaN.
  static std::vector<double> series(TileSource& source, std::size_t site, ValueCounts* counts = nullptr) {
    std::vector<double> out(source.panel().axis.size());
    ValueCounts own;
    source.read({site, 1})->gather(0, 1, 1, out.size(), out.data(), counts != nullptr ? *counts : own);
    return out;
  }

  [[nodiscard]] std::string message() const {
    try {
      static_cast<void>(open());
    } catch (const Error& error) {
      EXPECT_FALSE(error.fix().empty()) << error.what();
      return error.what();
    }
    ADD_FAILURE() << "no error was thrown";
    return {};
  }

  InputRequest request_;
  std::filesystem::path folder_;
};

void expect_series(const std::vector<double>& found, const std::vector<double>& expected) {
  ASSERT_EQ(found.size(), expected.size());
  for (std::size_t i = 0; i < found.size(); ++i) {
    if (std::isnan(expected[i]))
      EXPECT_TRUE(std::isnan(found[i])) << "step " << i << ": " << found[i];
    else
      EXPECT_DOUBLE_EQ(found[i], expected[i]) << "step " << i;
  }
}

TEST_F(CsvPanel, AColumnIsASiteAndARowAStep) {
  panel("date,Alder Weir,Harrow Bridge\n2001-01-01,1.5,10\n2001-01-02,2.5,-20\n2001-01-03,3.5e0,+30\n");
  const auto source = open();
  const Panel& described = source->panel();
  EXPECT_EQ(described.variable, "flow");
  EXPECT_EQ(described.units, "");
  EXPECT_EQ(described.geometry.describe(), "2 sites");
  EXPECT_EQ(described.geometry.site_names, (std::vector<std::string>{"Alder Weir", "Harrow Bridge"}));
  EXPECT_TRUE(described.geometry.lat.empty());
  EXPECT_EQ(step_words(described.axis.step()), "daily");
  EXPECT_EQ(described.steps_present, 3U);
  EXPECT_EQ(described.sources, (std::vector<std::string>{"gauges.csv, 88 bytes, steps 2001-01-01 to 2001-01-03"}));
  EXPECT_TRUE(source->excluded().empty());
  expect_series(series(*source, 0), {1.5, 2.5, 3.5});
  expect_series(series(*source, 1), {10, -20, 30});
}

TEST_F(CsvPanel, MissingWordsAndMissingRowsAreMissingValues) {
  panel("date,a,b,c,d\n2001-01-01,,NA,nan,1\n2001-01-02,1,na, NULL ,2\n2001-01-03,inf,-9,5,3\n2001-01-06,1,2,3,4\n");
  request_.missing_values = {-9};
  request_.valid_range = {0, 3.5};
  const auto source = open();
  EXPECT_EQ(source->panel().axis.size(), 6U);
  EXPECT_EQ(source->panel().steps_present, 4U);
  ValueCounts counts;
  expect_series(series(*source, 0, &counts), {kNaN, 1, kNaN, kNaN, kNaN, 1});
  EXPECT_EQ(counts.fill, 1U);  // the two days without a row are no cells of any file
  EXPECT_EQ(counts.infinite, 1U);
  expect_series(series(*source, 1, &counts), {kNaN, kNaN, kNaN, kNaN, kNaN, 2});
  EXPECT_EQ(counts.fill, 3U);
  EXPECT_EQ(counts.job_missing, 1U);
  expect_series(series(*source, 2, &counts), {kNaN, kNaN, kNaN, kNaN, kNaN, 3});
  EXPECT_EQ(counts.out_of_range, 1U);
  expect_series(series(*source, 3, &counts), {1, 2, 3, kNaN, kNaN, kNaN});
  EXPECT_EQ(counts.out_of_range, 2U);
}

TEST_F(CsvPanel, GatherLaysCellsAcrossLanesAndPadsTheLastGroup) {
  std::string text = "date,a,b,c,d,e,f,g\n";
  for (int t = 0; t < 3; ++t) {
    text += "2001-01-0" + std::to_string(t + 1);
    for (int c = 0; c < 7; ++c) text += "," + std::to_string(100 * c + t);
    text += '\n';
  }
  panel(text);
  const auto source = open();
  const auto band = source->read({1, 6});
  EXPECT_EQ(band->cells().first, 1U);
  EXPECT_EQ(band->cells().count, 6U);
  constexpr std::size_t kLanes = 4, kPitch = 5;
  std::vector<double> out(2 * kPitch * kLanes, -7);
  ValueCounts counts;
  band->gather(1, 5, kLanes, kPitch, out.data(), counts);  // sites c .. g
  for (std::size_t cell = 0; cell < 8; ++cell)
    for (std::size_t t = 0; t < kPitch; ++t) {
      const double found = out[(cell / kLanes * kPitch + t) * kLanes + cell % kLanes];
      if (t >= 3)
        EXPECT_EQ(found, -7);
      else if (cell >= 5)
        EXPECT_TRUE(std::isnan(found));
      else
        EXPECT_EQ(found, 100.0 * static_cast<double>(cell + 2) + static_cast<double>(t));
    }
  EXPECT_EQ(counts.fill, 0U);
}

TEST_F(CsvPanel, SeparatorsQuotesCommentsAndLineEndsOfEveryKindAreRead) {
  const char* const variants[] = {
      "date,\"Weir, upper\",b\n2001-01-01,1,2\n2001-01-02,3,4\n",
      "date;Weir, upper;b\n2001-01-01;1;2\n2001-01-02;3;4\n",
      "date\tWeir, upper\tb\n2001-01-01\t1\t2\n2001-01-02\t3\t4",
      ("\xEF\xBB\xBF"
       "date,\"Weir, upper\",b\r\n2001-01-01,1,2\r\n2001-01-02,3,4\r\n"),
      "date,\"Weir, upper\",b\r2001-01-01,1,2\r2001-01-02,3,4\r",
      "# a comment\n\n  # and another\ndate , \"Weir, upper\" , b\n\n\"2001-01-01\", \"1\" ,2\n#2001-01-05,7,7\n "
      "2001-01-02 ,3,4\n\n",
      "date,\"Weir, upper\",b,\n2001-01-01,1,2,\n2001-01-02,3,4,,\n",
  };
  int number = 0;
  for (const char* text : variants) {
    request_.files.clear();
    panel(text, "v" + std::to_string(number++) + ".csv");
    const auto source = open();
    EXPECT_EQ(source->panel().geometry.site_names, (std::vector<std::string>{"Weir, upper", "b"})) << text;
    expect_series(series(*source, 0), {1, 3});
    expect_series(series(*source, 1), {2, 4});
  }
}

TEST_F(CsvPanel, DoubledQuotesStandForOne) {
  panel("date,\"the \"\"old\"\" weir\",\"\"\"\"\n2001-01-01,1,2\n2001-01-02,3,4\n");
  EXPECT_EQ(open()->panel().geometry.site_names, (std::vector<std::string>{"the \"old\" weir", "\""}));
}

TEST_F(CsvPanel, DatesMayBeYearsMonthsDaysOrTimes) {
  const std::pair<const char*, const char*> cases[] = {
      {"1999,1\n2000,2\n2001,3\n", "yearly"},
      {"1999-11,1\n1999-12,2\n2000-01,3\n", "monthly"},
      {"1999-12-31T22:00,1\n1999-12-31T23:00,2\n2000-01-01T00:00,3\n", "hourly"},
      {"19991230,1\n19991231,2\n20000101,3\n", "daily"},
      {"1999-12-31 12:00:00Z,1\n1999-12-31 18:00:00Z,2\n2000-01-01 00:00:00Z,3\n", "every 6 hours"}};
  int number = 0;
  for (const auto& [rows, words] : cases) {
    request_.files.clear();
    panel(std::string("time,a\n") + rows, "d" + std::to_string(number++) + ".txt");
    const auto source = open();
    EXPECT_EQ(step_words(source->panel().axis.step()), words);
    expect_series(series(*source, 0), {1, 2, 3});
  }
}

TEST_F(CsvPanel, TheJobMayMendTheTimeColumn) {
  panel("day,a\n0,1\n1,2\n2,3\n");
  request_.time = {"days since 2001-02-27", "noleap", std::nullopt};
  const auto source = open();
  EXPECT_EQ(source->panel().axis.label(2), "2001-03-01");
  EXPECT_EQ(source->panel().axis.calendar(), Calendar::noleap);
}

TEST_F(CsvPanel, ACommentMayStateTheUnit) {
  panel("# Harrow Basin\n# Unit: m3 s-1\ndate,a\n2001-01-01,1\n2001-01-02,2\n", "a.csv");
  panel("date,a\n2001-01-03,1\n", "b.csv");
  EXPECT_EQ(open()->panel().units, "m3 s-1");
  panel("# unit: l s-1\ndate,a\n2001-01-04,1\n", "c.csv");
  EXPECT_HAS(message(), "different units: 'm3 s-1' and 'l s-1'");
}

TEST_F(CsvPanel, FilesAreJoinedAlongTimeByColumnName) {
  panel("date,b,a\n2001-01-03,30,3\n2001-01-04,40,4\n", "late.csv");
  panel("date;a;c\n2001-01-01;1;100\n2001-01-02;2;200\n", "early.csv");
  const auto source = open();
  EXPECT_EQ(source->panel().geometry.site_names, (std::vector<std::string>{"b", "a", "c"}));
  expect_series(series(*source, 0), {kNaN, kNaN, 30, 40});
  expect_series(series(*source, 1), {1, 2, 3, 4});
  expect_series(series(*source, 2), {100, 200, kNaN, kNaN});
}

TEST_F(CsvPanel, FilesOfDifferentSitesMayShareTheirDates) {
  panel("date,a\n2001-01-01,1\n2001-01-02,2\n", "a.csv");
  panel("date,b\n2001-01-01,10\n2001-01-02,20\n", "b.csv");
  const auto source = open();
  expect_series(series(*source, 0), {1, 2});
  expect_series(series(*source, 1), {10, 20});
}

TEST_F(CsvPanel, DuplicatesFollowTheRuleOfTheJob) {
  panel("date,a,b\n2001-01-01,1,NA\n2001-01-02,2,20\n", "first.csv");
  panel("date,a,b\n2001-01-02,2,20\n2001-01-03,3,30\n", "second.csv");
  expect_series(series(*open(), 0), {1, 2, 3});  // equal values may be given twice
  panel("date,a,b\n2001-01-03,5,NA\n2001-01-01,4,NA\n2001-01-01,-999,NA\n", "third.csv");
  const std::string text = message();
  EXPECT_HAS(text, "2001-01-03 of site 'a' is given twice with different values: 3 and 5");
  EXPECT_HAS(text, "second.csv:3");
  EXPECT_HAS(text, "third.csv:2");
  request_.duplicates = DuplicateRule::first;
  expect_series(series(*open(), 0), {1, 2, 3});
  request_.duplicates = DuplicateRule::mean;
  request_.missing_values = {-999};
  const auto source = open();
  expect_series(series(*source, 0), {2.5, 2, 4});
  expect_series(series(*source, 1), {kNaN, 20, 30});
}

TEST_F(CsvPanel, AValueAndAMissingOneAreDifferent) {
  panel("date,a\n2001-01-01,1\n2001-01-02,2\n2001-01-02,NA\n");
  EXPECT_HAS(message(), "different values: 2 and missing");
}

TEST_F(CsvPanel, ThePeriodCutsTheRecord) {
  panel("date,a\n2001-01-01,1\n2001-01-02,2\n2001-01-03,3\n2001-01-04,4\n");
  request_.period = {"2001-01-02", "2001-01-03"};
  expect_series(series(*open(), 0), {2, 3});
}

TEST_F(CsvPanel, CoordinatesAreLaidBesideTheNames) {
  panel("date,Alder Weir,Brook,Cove\n2001-01-01,1,2,3\n2001-01-02,1,2,3\n");
  request_.sites = write(
      "sites.csv", "Station;Longitude;Latitude;Elevation\nBrook;1.5;52.25;80\n Alder Weir ;-2;51;\nCoves;0;50;1\n");
  const auto source = open();
  const Geometry& geometry = source->panel().geometry;
  expect_series(geometry.lon, {-2, 1.5, kNaN});
  expect_series(geometry.lat, {51, 52.25, kNaN});
  expect_series(geometry.altitude, {kNaN, 80, kNaN});
  ASSERT_EQ(source->panel().notes.size(), 2U);
  EXPECT_HAS(source->panel().notes[0],
             "without coordinates, because sites.csv does not list them: Cove, did you mean 'Coves'?");
  EXPECT_HAS(source->panel().notes[1], "in no panel file: Coves");
}

TEST_F(CsvPanel, ASiteListedWithoutCoordinatesIsKeptAndNoted) {
  panel("date,a,b\n2001-01-01,1,2\n2001-01-02,1,2\n");
  request_.sites = write("sites.csv", "name,lon,lat\na,1,50\nb,,NA\n");
  const auto source = open();
  expect_series(source->panel().geometry.lat, {50, kNaN});
  EXPECT_TRUE(source->panel().geometry.altitude.empty());
  ASSERT_EQ(source->panel().notes.size(), 1U);
  EXPECT_HAS(source->panel().notes[0], "leaves them empty: b");
}

TEST_F(CsvPanel, FilesOfSitesThatCannotBeUsedAreRefused) {
  panel("date,a,b\n2001-01-01,1,2\n2001-01-02,1,2\n");
  const std::pair<const char*, const char*> cases[] = {
      {"name,lon\na,1\n", "no column holds the latitude of the sites (looked for lat, latitude)"},
      {"gauge,lon,lat\na,1,2\n", "no column holds the name"},
      {"name,lon,lat\na,1,95\n", "95 is not between -90 and 90 degrees"},
      {"name,lon,lat\na,one,50\n", "'one' is neither a number"},
      {"name,lon,lat\na,1,50\na,1,50\n", "site 'a' is listed twice"},
      {"name,lon,lat\nx,1,50\ny,1,50\n",
       "none of the sites of the panel is listed: the panel has a, b, the list has x, y"},
  };
  for (const auto& [text, part] : cases) {
    request_.sites = write("sites.csv", text);
    EXPECT_HAS(message(), part);
    EXPECT_HAS(message(), "sites.csv");
  }
}

TEST_F(CsvPanel, TheBoxKeepsTheSitesInsideIt) {
  panel("date,a,b,c,d\n2001-01-01,1,2,3,4\n2001-01-02,1,2,3,4\n");
  request_.sites = write("sites.csv", "name,lon,lat\na,179,10\nb,-179,10\nc,0,10\n");
  request_.box = {170, 0, -170, 20};  // across the date line
  const auto source = open();
  EXPECT_EQ(source->panel().geometry.site_names, (std::vector<std::string>{"a", "b"}));
  expect_series(series(*source, 1), {2, 2});
  EXPECT_EQ(source->panel().geometry.lon.size(), 2U);
  EXPECT_HAS(source->panel().notes.at(1), "their coordinates are unknown: d");
  EXPECT_HAS(source->panel().notes.at(2), "2 of 4 sites lie in the box");
  request_.box = {350, 0, 10, 20};  // 0..360 degrees
  EXPECT_EQ(open()->panel().geometry.site_names, (std::vector<std::string>{"c"}));
  request_.box = {-180, -90, 180, 90};
  EXPECT_EQ(open()->panel().geometry.site_names.size(), 3U);
  request_.box = {20, 0, 30, 20};
  EXPECT_HAS(message(), "none of the 4 sites lies in the box: they cover lat ");
  request_.sites.reset();
  EXPECT_HAS(message(), "box needs the coordinates");
}

TEST_F(CsvPanel, BadCellsAreNamedByFileLineAndColumn) {
  const std::pair<const char*, const char*> cases[] = {
      {"date,Alder Weir\n2001-01-01,1\n2001-01-02,x7\n", "bad.csv:3, column: Alder Weir"},
      {"date,Alder Weir\n2001-01-01,1\n2001-01-02,x7\n", "'x7' is neither a number nor empty, NA, NaN or null"},
      {"date;Alder Weir\n2001-01-01;3,14\n", "'3,14' has a decimal comma"},
      {"date;Alder Weir\n2001-01-01;3,14\n", "write numbers as 3.14"},
      {"date,Alder Weir\n2001-01-01,3,14\n", "the row has 3 cells, the header has 2; decimal commas are not read"},
      {"date,Alder Weir\n2001-01-01,\"3,14\"\n", "has a decimal comma"},
      {"date,a,b\n2001-01-01,3\n", "the row has 2 cells, the header has 3"},
      {"date,a\n01/02/2001,3\n", "'01/02/2001' is not a date of the standard calendar"},
      {"date,a\n2001-02-30,3\n", "bad.csv:2, column: date"},
      {"date,a\n,3\n", "'' is not a date"},
      {"date,a,a\n2001-01-01,3,4\n", "two columns are named 'a'"},
      {"date,a,,b\n2001-01-01,3,4,5\n", "column 3 has no name"},
      {"date\n2001-01-01\n", "the header has 1 column, expected a date and one column a site"},
      {"date,a\n2001-01-01,\"3\n", "a quote is opened but not closed"},
      {"year,Month,a\n1981,1,5\n1981,2,5\n", "the date seems to be spread over several columns"},
      {"", "the file holds no table"},
      {"# only a comment\n", "the file holds no table"},
      {"date,a\n", "no file holds a time step"},
      {"date,a\n2001-01-01,3\n", "single time step"},
  };
  for (const auto& [text, part] : cases) {
    request_.files.clear();
    panel(text, "bad.csv");
    EXPECT_HAS(message(), part);
    EXPECT_HAS(message(), "bad.csv");
  }
  request_.files = {write("wide.csv", std::string("d\0a\0t\0e\0", 8))};
  EXPECT_HAS(message(), "not a text file in UTF-8");
  request_.files = {(folder_ / "absent.csv").string()};
  EXPECT_HAS(message(), "the file cannot be opened");
}

TEST_F(CsvPanel, WhatAPanelCannotDoIsRefused) {
  panel("date,a\n2001-01-01,1\n2001-01-02,1\n");
  request_.mask = InputRequest::Mask{"land.nc", "land", 0.5, std::nullopt, {}};
  EXPECT_HAS(message(), "mask does not apply to a CSV panel");
  request_.mask.reset();
  request_.select = {{"level", 850}};
  EXPECT_HAS(message(), "select does not apply to a CSV panel");
  request_.select.clear();
  request_.time = {std::nullopt, std::nullopt, "month"};
  EXPECT_HAS(message(), "step 'month' is not an ISO 8601 duration");
}

TEST_F(CsvPanel, ABandOutlivesItsSource) {
  panel("date,a\n2001-01-01,1\n2001-01-02,2\n");
  auto source = open();
  const auto band = source->read({0, 1});
  source.reset();
  std::vector<double> out(2);
  ValueCounts counts;
  band->gather(0, 1, 1, 2, out.data(), counts);
  expect_series(out, {1, 2});
}

TEST(CsvName, EndsInCsvTxtOrTsvInAnyCase) {
  EXPECT_TRUE(is_csv_name("a/b.csv"));
  EXPECT_TRUE(is_csv_name("B.TXT"));
  EXPECT_TRUE(is_csv_name("b.tsv"));
  EXPECT_FALSE(is_csv_name("b.csv.nc"));
  EXPECT_FALSE(is_csv_name("csv"));
}

// Law: a panel split by rows and columns into shuffled files gives the values of the whole.
TEST_F(CsvPanel, ShuffledSplitsGiveTheWholePanel) {
  std::mt19937 random(8);
  constexpr std::size_t kSites = 6, kSteps = 40;
  std::vector<std::vector<double>> truth(kSites, std::vector<double>(kSteps));
  for (auto& site : truth)
    for (double& value : site) value = random() % 7 == 0 ? kNaN : static_cast<double>(random()) / 1e6;
  const TimeAxis axis(Calendar::standard, {StepKind::months, 1}, seconds_of(Calendar::standard, {1997, 5, 31}), kSteps);
  for (int trial = 0; trial < 20; ++trial) {
    request_.files.clear();
    std::size_t from = 0;
    while (from < kSteps) {
      const std::size_t to = std::min<std::size_t>(kSteps, from + 1 + random() % 15);
      std::vector<std::size_t> columns(kSites), rows(to - from);
      std::iota(columns.begin(), columns.end(), std::size_t{0});
      std::iota(rows.begin(), rows.end(), from);
      std::shuffle(columns.begin(), columns.end(), random);
      std::shuffle(rows.begin(), rows.end(), random);
      std::string text = "date";
      for (const std::size_t c : columns) text += ",s" + std::to_string(c);
      for (const std::size_t t : rows) {
        text += '\n' + axis.label(t);
        for (const std::size_t c : columns)
          text += ',' + (std::isnan(truth[c][t]) ? std::string("NA") : number_text(truth[c][t]));
      }
      panel(text, "part" + std::to_string(from) + "_" + std::to_string(trial) + ".csv");
      from = to;
    }
    std::shuffle(request_.files.begin(), request_.files.end(), random);
    const auto source = open();
    ASSERT_EQ(source->panel().axis, axis);
    for (std::size_t i = 0; i < kSites; ++i)
      expect_series(series(*source, i),
                    truth[static_cast<std::size_t>(source->panel().geometry.site_names[i][1] - '0')]);
  }
}

}  // namespace
}  // namespace lagscape
