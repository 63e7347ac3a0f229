#include "lagscape/pipeline/run.h"

#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <iterator>

#include "lagscape/base/error.h"
#include "lagscape/job/job_file.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

/// A folder of its own for each test, removed at the end.
class Run : public testing::Test {
 protected:
  Run()
      : folder_(fs::temp_directory_path() /
                ("lagscape_" + std::string(testing::UnitTest::GetInstance()->current_test_info()->name()) + "_" +
                 std::to_string(getpid()))) {
    fs::remove_all(folder_);
    fs::create_directories(folder_);
  }
  ~Run() override { fs::remove_all(folder_); }

  [[nodiscard]] JobSpec job(const std::string& name, const std::string& result,
                            std::vector<std::string> overrides = {}) const {
    overrides.push_back("output.file=" + (folder_ / result).string());
    return read_job(std::string(LAGSCAPE_SOURCE_DIR) + "/jobs/" + name, overrides);
  }

  static std::string bytes(const fs::path& path) {
    std::ifstream file(path, std::ios::binary);
    return {std::istreambuf_iterator<char>(file), {}};
  }

  fs::path folder_;
  const Log log_;
};

const std::vector<std::string> kEverything = {
    "output.maps=[\"all\"]",
    "output.cubes=[\"autocorrelation\",\"autocorrelation_limit\",\"partial_autocorrelation\",\"autocovariance\",\"pair_"
    "count\",\"ar_coefficients\"]"};

TEST_F(Run, GivesTheSameBytesForAnyThreadsBlocksAndBands) {
  struct Way {
    int threads;
    std::size_t block;
    std::size_t parts;  // into how many bands, about, the memory budget makes the run cut the map
  };
  for (const char* name : {"harrow_soil_wetness.toml", "harrow_gauges.toml"}) {
    const JobSpec everything = job(name, "result.nc", kEverything);
    std::string first, first_cubes;
    for (const Way way : {Way{1, 0, 1}, Way{2, 8, 1}, Way{3, 40, 5}, Way{2, 24, 3}}) {
      RunOptions options;
      options.threads = way.threads;
      options.block_cells = way.block;
      options.replace = true;
      const JobPlan plan = plan_job(everything, options, log_).front();
      options.memory_bytes = plan.peak_bytes - plan.band_bytes + plan.band_bytes / way.parts;
      const std::vector<RunReport> reports = run_job(everything, options, log_, {});
      ASSERT_EQ(reports.size(), 1U);
      EXPECT_GE(reports[0].plan.bands.size(), way.parts) << name;
      const std::string now = bytes(folder_ / "result.nc"), cubes = bytes(folder_ / "result_cubes.nc");
      ASSERT_GT(now.size(), 10000U);
      if (first.empty()) {
        first = now;
        first_cubes = cubes;
      }
      EXPECT_TRUE(now == first && cubes == first_cubes)
          << name << ": " << way.threads << " threads, blocks of " << way.block << ", " << way.parts << " bands";
    }
  }
}

TEST_F(Run, CountsEveryCellOnceAsFineOrUnderAStatus) {
  const RunReport report = run_job(job("harrow_soil_wetness.toml", "result.nc"), {}, log_, {}).front();
  EXPECT_EQ(report.plan.cells, 24U * 36U);
  std::size_t fine = 0, no_data = 0;
  for (const auto& [words, count] : report.status_counts) {
    if (words == "fine") fine = count;
    if (words == "no data") no_data = count;
  }
  EXPECT_GT(fine, 800U);
  EXPECT_GT(no_data, 0U) << "the lakes of the basin hold no data";
  EXPECT_EQ(report.cells_analysed, report.trend.tested);
  EXPECT_EQ(report.decorrelation_time.count, report.cells_analysed);
  EXPECT_LE(report.trend.standing, report.trend.local);
  EXPECT_EQ(report.trend.standing, report.trend.rising + report.trend.falling);
  EXPECT_EQ(report.files, std::vector<std::string>{(folder_ / "result.nc").string()});
}

TEST_F(Run, StopsAndLeavesNothingWhenProgressThrows) {
  const Progress stop = [](std::size_t, std::size_t, double) { throw Error(ErrorKind::interrupted, "enough"); };
  EXPECT_THROW((void)run_job(job("harrow_soil_wetness.toml", "result.nc"), {}, log_, stop), Error);
  EXPECT_TRUE(fs::is_empty(folder_));
}

TEST_F(Run, TellsHowMuchMemoryARowNeeds) {
  RunOptions options;
  options.memory_bytes = std::size_t{1} << 20;
  try {
    (void)plan_job(job("harrow_soil_wetness.toml", "result.nc"), options, log_);
    FAIL() << "a budget of 1 MiB was accepted";
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::usage);
    EXPECT_NE(std::string(error.what()).find("--memory"), std::string::npos);
  }
}

TEST_F(Run, EveryVariableOfAJobGetsItsOwnResult) {
  const std::vector<RunReport> reports = run_job(job("harrow_weather.toml", "{variable}.nc"), {}, log_, {});
  ASSERT_EQ(reports.size(), 2U);
  for (const RunReport& report : reports) EXPECT_TRUE(fs::exists(folder_ / (report.plan.panel.variable + ".nc")));
}

TEST_F(Run, APlanChoosesMapsAndAddsWhatTheJobImplies) {
  const JobPlan plan =
      plan_job(job("harrow_soil_wetness.toml", "result.nc",
                   {"trend.tests=[\"ols-neff\",\"ols\"]", "trend.target=0.01", "output.maps=[\"memory\"]"}),
               {}, log_)
          .front();
  const auto has = [&](const char* name) {
    return std::find(plan.maps.begin(), plan.maps.end(), name) != plan.maps.end();
  };
  EXPECT_TRUE(has("zero_crossing_time"));
  EXPECT_TRUE(has("trend_p_ols")) << "the second test of the job shows its p-values";
  EXPECT_TRUE(has("years_to_detect")) << "a target asks for it";
  EXPECT_FALSE(has("trend_slope"));
  EXPECT_EQ(plan.file_reads, plan.bands.size());
}

}  // namespace
}  // namespace lagscape
