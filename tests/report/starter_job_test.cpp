#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>

#include "lagscape/base/error.h"
#include "lagscape/job/job_file.h"
#include "lagscape/job/options.h"
#include "lagscape/report/render.h"
#include "support/sample_reports.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

class StarterJob : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = fs::path(testing::TempDir()) / ("lagscape_starter_job_" + std::to_string(getpid()));
    fs::remove_all(folder_);
    fs::create_directories(folder_ / "data");
    fs::create_directories(folder_ / "jobs");
  }
  void TearDown() override { fs::remove_all(folder_); }
  /// A survey of these files, which are made (empty) below the folder.
  SurveyReport survey(const std::vector<std::string>& names) const {
    SurveyReport report = test::harrow_survey();
    report.files.clear();
    for (const std::string& name : names) {
      std::ofstream(folder_ / name) << "x";
      report.files.push_back((folder_ / name).string());
    }
    return report;
  }
  std::string job_path() const { return (folder_ / "jobs" / "wet.toml").string(); }
  /// The job as it is read back from its place.
  JobSpec read_back(const std::string& text) const {
    std::ofstream(job_path()) << text;
    return read_job(job_path(), {});
  }
  fs::path folder_;
};

TEST_F(StarterJob, IsReadBackWithTheDefaultsAndTheFilesOfTheSurvey) {
  const SurveyReport report = survey({"data/a_1981.nc", "data/a_1991.nc"});
  const JobSpec job = read_back(starter_job(report, job_path()));
  EXPECT_EQ(job.input.files, report.files);
  EXPECT_EQ(job.input.variables, (std::vector<std::string>{"soil_wetness"}));
  EXPECT_EQ(job.input.select, (std::vector<std::pair<std::string, double>>{{"level", 10}}));
  EXPECT_EQ(job.output.file, (folder_ / "jobs/results/wet.nc").string());
  const JobSpec defaults;
  EXPECT_EQ(job.prepare.min_share, defaults.prepare.min_share);
  EXPECT_EQ(job.trend.tests, defaults.trend.tests);
  EXPECT_EQ(job.output.maps, defaults.output.maps);
  EXPECT_EQ(job.field.rate, defaults.field.rate);
}

TEST_F(StarterJob, LinesThatAreSwitchedOffCanBeSwitchedOn) {
  std::string text = starter_job(survey({"data/a.nc"}), job_path());
  for (const std::string line : {"# period = ", "# box = ", "# cubes = "}) {
    ASSERT_NE(text.find("\n" + line), std::string::npos) << line << text;
    text.erase(text.find("\n" + line) + 1, 2);
  }
  const JobSpec job = read_back(text);
  EXPECT_EQ(job.input.period->second, "2020-12-15");
  EXPECT_EQ(job.input.box, (std::array<double, 4>{-4.25, 50.75, -3.25, 51.25}));
  EXPECT_EQ(job.output.cubes.size(), 2U);
}

TEST_F(StarterJob, NamesManyFilesOfOneFolderByAGlobThatTakesNoOthers) {
  std::vector<std::string> names;
  for (const char* year : {"1981", "1991", "2001", "2011"}) names.push_back("data/a_" + std::string(year) + ".nc");
  const SurveyReport report = survey(names);
  const std::string text = starter_job(report, job_path());
  EXPECT_NE(text.find("files = [\"../data/a_*1.nc\"]\n"), std::string::npos) << text;
  EXPECT_EQ(read_back(text).input.files, report.files);

  std::ofstream(folder_ / "data/a_other1.nc") << "not surveyed";
  const std::string listed = starter_job(report, job_path());
  EXPECT_EQ(listed.find('*'), listed.find("*.nc\" may stand")) << listed;
  EXPECT_EQ(read_back(listed).input.files, report.files);
}

TEST_F(StarterJob, NeverPutsTheResultWhereAGlobWouldTakeItForInput) {
  fs::create_directories(folder_ / "jobs/results");
  const SurveyReport report = survey({"jobs/results/wet.nc"});
  EXPECT_EQ(read_back(starter_job(report, job_path())).output.file,
            (folder_ / "jobs/results_lagscape/wet.nc").string());
}

TEST_F(StarterJob, OfSeveralVariablesSaysHowTheResultIsNamed) {
  SurveyReport report = survey({"data/a.nc"});
  EXPECT_EQ(starter_job(report, job_path()).find("{variable}"), std::string::npos);
  report.variables.push_back(report.variables.back());
  report.variables.back().name = "snow";
  report.variables.back().usable = true;
  const std::string text = starter_job(report, job_path());
  EXPECT_NE(text.find("# {variable} into the name.\nfile = "), std::string::npos) << text;
  EXPECT_NE(text.find("There are also: snow."), std::string::npos) << text;
  EXPECT_EQ(read_back(text).input.variables.size(), 1U);
}

TEST_F(StarterJob, KeepsNamesWithBlanksAndQuotes) {
  const SurveyReport report = survey({"data/a \"b\".nc"});
  EXPECT_EQ(read_back(starter_job(report, job_path())).input.files, report.files);
}

TEST_F(StarterJob, CarriesTheSitesFileAndTheMendedTime) {
  SurveyReport report = survey({"data/flow.csv", "data/sites.csv"});
  report.files.pop_back();
  report.variables.back().usable = false;
  report.variables.back().to_do = "give the time axis";
  report.mend_time = "time = { unit = \"days since 1981-01-01\", calendar = \"noleap\" }";
  const JobSpec job = read_back(starter_job(report, job_path(), (folder_ / "data/sites.csv").string()));
  EXPECT_EQ(job.input.sites, (folder_ / "data/sites.csv").string());
  EXPECT_EQ(job.input.time->calendar, "noleap");
  EXPECT_EQ(job.input.variables.front(), "soil_wetness");
}

TEST_F(StarterJob, IsNotWrittenWithoutAVariableToAnalyse) {
  SurveyReport report = survey({"data/a.nc"});
  report.variables.pop_back();
  EXPECT_THROW((void)starter_job(report, job_path()), Error);
}

}  // namespace
}  // namespace lagscape
