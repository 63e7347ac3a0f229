#include "lagscape/job/job_file.h"

#include <gtest/gtest.h>
#include <unistd.h>

#include <cmath>
#include <filesystem>
#include <fstream>

#include "lagscape/base/error.h"
#include "lagscape/job/options.h"
#include "lagscape/measures/measure.h"
#include "lagscape/measures/trend_test.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

/// A folder with a few empty input files; jobs are parsed as if they lay in it.
class JobFile : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = fs::path(testing::TempDir()) / ("lagscape_job_file_" + std::to_string(getpid()));
    fs::remove_all(folder_);
    fs::create_directories(folder_ / "data");
    for (const char* name : {"data/wet_1990.nc", "data/wet_1980.nc", "data/land.nc", "data/sites.csv"})
      std::ofstream(folder_ / name) << "x";
  }
  void TearDown() override { fs::remove_all(folder_); }

  JobSpec parse(const std::string& text, const std::vector<std::string>& overrides = {}) const {
    return parse_job(text, "job.toml", folder_.string(), overrides);
  }
  /// A job that is right, with further keys of [input], of [output], and further tables.
  static std::string job(const std::string& input, const std::string& more = {},
                         const std::string& output = "file = 'out.nc'\n") {
    return "[input]\nfiles = ['data/wet_*.nc']\nvariable = 'wet'\n" + input + "\n[output]\n" + output + more;
  }
  /// What is said about a job that is wrong: the lines under the heading, without the name of the file.
  std::string problems(const std::string& text, const std::vector<std::string>& overrides = {}) const {
    try {
      (void)parse(text, overrides);
    } catch (const Error& error) {
      EXPECT_EQ(error.kind(), ErrorKind::job);
      return error.problem();
    }
    return "no problem";
  }
  std::string path(const std::string& name) const { return (folder_ / name).string(); }

  fs::path folder_;
};

TEST_F(JobFile, TheSmallestJobHasTheDocumentedDefaults) {
  const JobSpec spec = parse(job(""));
  EXPECT_EQ(spec.input.files, (std::vector<std::string>{path("data/wet_1980.nc"), path("data/wet_1990.nc")}));
  EXPECT_EQ(spec.input.variables, (std::vector<std::string>{"wet"}));
  EXPECT_EQ(spec.output.file, path("out.nc"));
  EXPECT_EQ(spec.trend.tests, (std::vector<std::string>{"ols-neff"}));
  EXPECT_EQ(spec.path, "job.toml");
}

// Defaults stand in JobSpec and, for people, in the option table: both must say the same.
TEST_F(JobFile, DefaultsOfTheOptionTableAreThoseOfTheSpec) {
  const std::string canonical = job_text(parse(job("")));
  for (const JobOption& option : job_options()) {
    if (option.default_text.empty()) continue;
    const std::string name(option.key.substr(option.key.rfind('.') + 1));
    const std::string value(option.default_text);
    const bool found = canonical.find("\n" + name + " = " + value + "\n") != std::string::npos ||
                       canonical.find("\n" + name + " = \"" + value + "\"\n") != std::string::npos ||
                       canonical.find("\n" + name + " = [\"" + value + "\"]\n") != std::string::npos;
    EXPECT_TRUE(found) << option.key << " = " << value << " is not in\n" << canonical;
  }
}

TEST_F(JobFile, EveryKeyIsReadAndWrittenBackTheSame) {
  const std::string text = job(R"(select = { level = 850, "odd name" = 2.5 }
period = ["1981-01-01", "2020-12-31"]
box = [170.0, -30.0, -170.0, 30.0]
mask = { file = "data/land.nc", variable = "land", min = 0.5, max = 2 }
missing_values = [-9999, 1e20]
valid_range = [0.0, inf]
sites = "data/sites.csv"
duplicates = "mean"
longitude = "as-input"
time = { unit = "days since 1981-01-01", calendar = "noleap", step = "P1M" }
)",
                               R"(maps = ["standard"]
deflate = 4
[prepare]
season = "harmonics"
harmonics = 3
remove = "running-mean"
window = "P11Y"
min_share = 0.7
share_of = "period"
min_count = 40
[memory]
max_lag = 48
confidence = 0.9
limits = "independent"
order = 3
max_order = 12
[trend]
tests = ["ols", "ols-neff"]
alpha = 0.01
per = "decade"
target = 0.2
[field]
control = "by"
rate = 0.05
)");
  const JobSpec spec = parse("title = \"A \\\"quoted\\\" title\"\n" + text);
  EXPECT_EQ(spec.title, "A \"quoted\" title");
  EXPECT_EQ(spec.input.select, (std::vector<std::pair<std::string, double>>{{"level", 850}, {"odd name", 2.5}}));
  EXPECT_EQ(spec.input.box, (std::array<double, 4>{170, -30, -170, 30}));
  EXPECT_EQ(spec.input.mask->file, path("data/land.nc"));
  EXPECT_EQ(spec.input.mask->max, 2.0);
  EXPECT_EQ(spec.input.missing_values, (std::vector<double>{-9999, 1e20}));
  EXPECT_TRUE(std::isinf(spec.input.valid_range->at(1)));
  EXPECT_EQ(spec.input.sites, path("data/sites.csv"));
  EXPECT_EQ(spec.input.time->calendar, "noleap");
  EXPECT_EQ(spec.prepare.season, SeasonRule::harmonics);
  EXPECT_EQ(spec.prepare.remove, RemoveRule::running_mean);
  EXPECT_EQ(std::get<std::string>(*spec.prepare.window), "P11Y");
  EXPECT_TRUE(spec.prepare.share_of_period);
  EXPECT_EQ(spec.prepare.min_count, 40U);
  EXPECT_EQ(std::get<std::int64_t>(*spec.memory.max_lag), 48);
  EXPECT_EQ(spec.memory.limits, LimitRule::independent);
  EXPECT_EQ(spec.memory.order, OrderRule::fixed);
  EXPECT_EQ(spec.memory.fixed_order, 3);
  EXPECT_EQ(spec.trend.tests.front(), "ols");
  EXPECT_EQ(spec.trend.per, RatePer::decade);
  EXPECT_EQ(spec.trend.target, 0.2);
  EXPECT_EQ(spec.field.control, FieldControl::by);
  EXPECT_EQ(spec.output.deflate, 4);

  const std::string canonical = job_text(spec);
  EXPECT_EQ(canonical.find(folder_.string()), std::string::npos) << "a path of this machine stands in\n" << canonical;
  const JobSpec again = parse_job(canonical, "again.toml", path("data"), {"output.file=elsewhere.nc"});
  EXPECT_EQ(job_text(again), canonical);
  EXPECT_EQ(again.input.files, spec.input.files);
  EXPECT_EQ(again.output.file, "elsewhere.nc");
}

TEST_F(JobFile, EqualWorkSpelledDifferentlyGivesEqualText) {
  const std::string a = job_text(parse(job("", "deflate = 1\n[prepare]\nmin_share = 0.80\n")));
  const std::string b = job_text(parse(job("", "", "file = 'other.nc'\n"), {"input.files=" + path("data/wet_19*.nc")}));
  EXPECT_EQ(a, b);
  EXPECT_NE(a, job_text(parse(job("", "[prepare]\nmin_share = 0.81\n"))));
}

TEST_F(JobFile, AllProblemsOfAJobAreToldAtOnce) {
  EXPECT_EQ(
      problems("title = 3\n[input]\nfiles = 'none_*.nc'\n[prepare]\nmin_shar = 0.5\nseason = 'calender'\n"
               "[memory]\nconfidence = 95\n[output]\nfile = 'a.nc'\nmaps = ['trend_slop']\n",
               {"field.rate=5"}),
      "8 problems in job.toml\n"
      "  job.toml:1:9: title: found the whole number 3, expected a text\n"
      "  job.toml:2:1: input.variable is missing: name the variable to analyse; 'lagscape survey FILE' lists them\n"
      "  job.toml:3:9: files: found \"none_*.nc\", expected files; nothing matches " +
          path("none_*.nc") +
          "\n"
          "  job.toml:5:1: unknown key 'min_shar' in [prepare], did you mean 'min_share'?\n"
          "  job.toml:6:10: season: found \"calender\", expected auto | none | calendar | harmonics, did you mean "
          "'calendar'?\n"
          "  job.toml:8:14: confidence: found 95, expected above 0.5, below 1\n"
          "  job.toml:11:8: maps: unknown name 'trend_slop', did you mean 'trend_slope'?\n"
          "  --set field.rate: rate: found 5, expected above 0, below 1");
}

/// One wrong line each, with a piece of what must be said about it.
struct Wrong {
  const char *name, *input, *more, *output, *said;
};
std::ostream& operator<<(std::ostream& out, const Wrong& wrong) { return out << wrong.name; }
class WrongJob : public JobFile, public testing::WithParamInterface<Wrong> {};

TEST_P(WrongJob, IsRefusedInPlainWords) {
  const Wrong& wrong = GetParam();
  const std::string said =
      problems(job(wrong.input, wrong.more, *wrong.output != '\0' ? wrong.output : "file = 'out.nc'\n"));
  EXPECT_NE(said.find(wrong.said), std::string::npos) << said;
  EXPECT_EQ(said.substr(0, 21), "1 problem in job.toml") << said;
}

INSTANTIATE_TEST_SUITE_P(
    , WrongJob,
    testing::Values(
        Wrong{"PeriodOrder", "period = ['2020-01-01', '1981-01-01']", "", "", "the earlier date first"},
        Wrong{"PeriodDates", "period = ['1981-13-01', '1990-01-01']", "", "", "expected ISO 8601 dates"},
        Wrong{"PeriodCount", "period = ['1981-01-01']", "", "", "two: the first and the last"},
        Wrong{"BoxOrder", "box = [-10, 60, 30, 35]", "", "", "south 60 not below north 35"},
        Wrong{"BoxLatitude", "box = [-10, -100, 30, 35]", "", "", "-90 to 90 degrees"},
        Wrong{"BoxLongitude", "box = [-1000, 0, 30, 35]", "", "", "-360 to 360"},
        Wrong{"BoxWidth", "box = [10, 0, 10, 35]", "", "", "more than 0"},
        Wrong{"BoxCount", "box = [10, 0, 10]", "", "", "four: west, south, east, north"},
        Wrong{"MaskWithoutCriterion", "mask = { file = 'data/land.nc', variable = 'l' }", "", "", "exactly one kind"},
        Wrong{"MaskWithTwoCriteria", "mask = { file = 'data/land.nc', variable = 'l', min = 1, values = [1] }", "", "",
              "exactly one kind"},
        Wrong{"MaskFile", "mask = { file = 'data/sea.nc', variable = 'l', min = 1 }", "", "", "a file that exists"},
        Wrong{"MaskVariable", "mask = { file = 'data/land.nc', min = 1 }", "", "", "input.mask.variable is missing"},
        Wrong{"MaskOrder", "mask = { file = 'data/land.nc', variable = 'l', min = 2, max = 1 }", "", "",
              "min not above max"},
        Wrong{"MaskKey", "mask = { file = 'data/land.nc', variable = 'l', minn = 2, max = 1 }", "", "",
              "did you mean 'min'"},
        Wrong{"ValidRange", "valid_range = [1, 0]", "", "", "the smaller value first"},
        Wrong{"ValidRangeCount", "valid_range = [1]", "", "", "the smallest and the largest"},
        Wrong{"Sites", "sites = 'nowhere.csv'", "", "", "a file that exists"},
        Wrong{"Duplicates", "duplicates = 'last'", "", "", "refuse | first | mean"},
        Wrong{"Longitude", "longitude = 'asinput'", "", "", "did you mean 'as-input'"},
        Wrong{"SelectNoTable", "select = 850", "", "", "{ level = 850 }"},
        Wrong{"SelectText", "select = { level = 'top' }", "", "", "level: found the text \"top\", expected a number"},
        Wrong{"TimeUnit", "time = { unit = 'days' }", "", "", "days since 1981-01-01"},
        Wrong{"TimeCalendar", "time = { calendar = 'nolaep' }", "", "", "did you mean 'noleap'"},
        Wrong{"TimeStep", "time = { step = 'monthly' }", "", "", "ISO 8601 duration"},
        Wrong{"Later", "unit = 'mm'", "", "",
              "job.toml:4:1: unit: a later version will read this key; take it out for now"},
        Wrong{"LaterTable", "quality = { variable = 'qa', values = [0] }", "", "", "a later version"},
        Wrong{"Harmonics", "", "[prepare]\nharmonics = 13\n", "", "1 to 12"},
        Wrong{"WindowMissing", "", "[prepare]\nremove = 'running-mean'\n", "", "needs a window"},
        Wrong{"WindowAlone", "", "[prepare]\nwindow = 'P1Y'\n", "", "only used with remove"},
        Wrong{"WindowText", "", "[prepare]\nremove = 'running-mean'\nwindow = '11 years'\n", "", "P5Y"},
        Wrong{"WindowShort", "", "[prepare]\nremove = 'running-mean'\nwindow = 1\n", "", "2 or more"},
        Wrong{"MinShare", "", "[prepare]\nmin_share = 80\n", "", "found 80, expected 0 to 1"},
        Wrong{"MinCount", "", "[prepare]\nmin_count = 15.5\n", "", "a whole number"},
        Wrong{"MinCountSmall", "", "[prepare]\nmin_count = 11\n", "", "min_count: found 11, expected 21 or more"},
        Wrong{"MaxLag", "", "[memory]\nmax_lag = 0\n", "", "1 or more"},
        Wrong{"MaxLagText", "", "[memory]\nmax_lag = 'automatic'\n", "", "P5Y"},
        Wrong{"Order", "", "[memory]\norder = 11\n", "", "1 to memory.max_order, which is 10"},
        Wrong{"OrderWord", "", "[memory]\norder = 'bicc'\n", "", "bic | aicc | aic"},
        Wrong{"MaxOrder", "", "[memory]\nmax_order = 31\n", "", "1 to 30"},
        Wrong{"Test", "", "[trend]\ntests = ['ols-nef']\n", "", "did you mean 'ols-neff'"},
        Wrong{"TestLater", "", "[trend]\ntests = ['calibrated']\n", "", "will come with a later version"},
        Wrong{"TestTwice", "", "[trend]\ntests = ['ols', 'ols']\n", "", "each test once"},
        Wrong{"NoTest", "", "[trend]\ntests = []\n", "", "an empty list"},
        Wrong{"Alpha", "", "[trend]\nalpha = 0\n", "", "above 0, below 1"},
        Wrong{"Target", "", "[trend]\ntarget = -1\n", "", "above 0"},
        Wrong{"Per", "", "[trend]\nper = 'century'\n", "", "year | decade"},
        Wrong{"Control", "", "[field]\ncontrol = 'bonferroni'\n", "", "none | bh | by"},
        Wrong{"WrongTable", "", "[field]\nalpha = 0.1\n", "", "which belongs in [trend]"},
        Wrong{"Deflate", "", "", "file = 'out.nc'\ndeflate = 10\n", "0 to 9"},
        Wrong{"OutputEnding", "", "", "file = 'out.tif'\n", "ends in .nc"},
        Wrong{"OutputName", "", "", "file = 'x/.nc'\n", "ends in .nc"},
        Wrong{"OutputBraces", "", "", "file = '{var}.nc'\n", "no braces but one {variable}"},
        Wrong{"OutputIsInput", "", "", "file = 'data/wet_1980.nc'\n", "written over the input"},
        Wrong{"OutputMissing", "", "", "deflate = 1\n", "output.file is missing"},
        Wrong{"CubeAmongMaps", "", "", "file = 'out.nc'\nmaps = ['autocorrelation']\n", "belongs in output.cubes"},
        Wrong{"MapAmongCubes", "", "", "file = 'out.nc'\ncubes = ['trend_slope']\n", "belongs in output.maps"},
        Wrong{"NoMaps", "", "", "file = 'out.nc'\nmaps = []\n", "at least one map or group"}),
    [](const auto& param) { return std::string(param.param.name); });

TEST_F(JobFile, SiteResultsMustNotReplaceTheCsvTheyCameFrom) {
  const std::string text = "[input]\nfiles = 'data/sites.csv'\nvariable = 'flow'\n[output]\nfile = 'data/sites.nc'\n";
  EXPECT_NE(problems(text).find("written over the input"), std::string::npos);
}

TEST_F(JobFile, SeveralVariablesNeedAMarkInTheResultsName) {
  EXPECT_NE(problems(job(""), {"input.variable=[\"a\", \"b\"]"}).find("{variable} in the name"), std::string::npos);
  const JobSpec spec = parse(job("", "", "file = 'out_{variable}.nc'\n"), {"input.variable=[\"a\", \"b\"]"});
  EXPECT_EQ(spec.input.variables.size(), 2U);
  EXPECT_EQ(spec.output.file, path("out_{variable}.nc"));
}

TEST_F(JobFile, PathsOfOverridesAreRelativeToTheShell) {
  EXPECT_EQ(parse(job(""), {"output.file=res/x.nc"}).output.file, "res/x.nc");
  EXPECT_NE(problems(job(""), {"input.files=data/wet_*.nc"}).find("nothing matches data/wet_*.nc"), std::string::npos);
}

TEST_F(JobFile, FoldersAndFilesMayHaveGlobCharactersInTheirNames) {
  fs::create_directories(folder_ / "run[1]");
  for (const char* name : {"run[1]/a.nc", "run[1]/b[2].nc"}) std::ofstream(folder_ / name) << "x";
  const std::string text = "[input]\nfiles = ['*.nc', 'b[2].nc']\nvariable = 'v'\n[output]\nfile = 'o.nc'\n";
  const JobSpec spec = parse_job(text, "job.toml", path("run[1]"), {});
  EXPECT_EQ(spec.input.files, (std::vector<std::string>{path("run[1]/a.nc"), path("run[1]/b[2].nc")}));
}

TEST_F(JobFile, ReadsFilesRelativeToTheirOwnFolder) {
  fs::create_directories(folder_ / "jobs");
  std::ofstream(folder_ / "jobs" / "j.toml")
      << "[input]\nfiles = '../data/wet_*.nc'\nvariable = 'wet'\n[output]\nfile = '../r/o.nc'\n";
  const JobSpec spec = read_job(path("jobs/j.toml"), {"trend.alpha=0.01"});
  EXPECT_EQ(spec.input.files.size(), 2U);
  EXPECT_EQ(spec.output.file, path("r/o.nc"));
  EXPECT_EQ(spec.trend.alpha, 0.01);
  EXPECT_NE(spec.text.find("# --set trend.alpha=0.01\n"), std::string::npos);
}

TEST(JobOptions, ChoicesAreInTheOrderOfTheirEnums) {
  EXPECT_EQ(choice_word("prepare.season", SeasonRule::harmonics), "harmonics");
  EXPECT_EQ(choice_word("prepare.remove", RemoveRule::running_mean), "running-mean");
  EXPECT_EQ(choice_word("memory.limits", LimitRule::independent), "independent");
  EXPECT_EQ(choice_word("memory.order", OrderRule::aic), "aic");
  EXPECT_EQ(choice_word("field.control", FieldControl::by), "by");
  EXPECT_EQ(choice_word("trend.per", RatePer::decade), "decade");
}

TEST(JobOptions, RangesAreToldInWords) {
  EXPECT_EQ(range_text(*find_option("prepare.min_share")), "0 to 1");
  EXPECT_EQ(range_text(*find_option("memory.confidence")), "above 0.5, below 1");
  EXPECT_EQ(range_text(*find_option("memory.order")), "bic | aicc | aic, or 1 to 30");
  EXPECT_EQ(range_text(*find_option("memory.max_lag")), "1 or more");
  EXPECT_EQ(range_text(*find_option("title")), "");
}

TEST(JobOptions, LaterTestsAreThoseThatDoNotExistYet) {
  for (const std::string_view name : later_trend_tests()) EXPECT_EQ(find_trend_test(name), nullptr) << name;
}

}  // namespace
}  // namespace lagscape
