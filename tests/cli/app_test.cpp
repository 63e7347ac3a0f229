#include "lagscape/cli/app.h"

#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>
#include <nlohmann/json.hpp>

#include "lagscape/report/render.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

struct Answer {
  int code;
  std::string out, err;
};

Answer call(std::vector<std::string> arguments) {
  arguments.insert(arguments.begin(), "lagscape");
  std::vector<char*> pointers;
  for (std::string& argument : arguments) pointers.push_back(argument.data());
  testing::internal::CaptureStdout();
  testing::internal::CaptureStderr();
  const int code = run_app(static_cast<int>(pointers.size()), pointers.data());
  return {code, testing::internal::GetCapturedStdout(), testing::internal::GetCapturedStderr()};
}

class App : public testing::Test {
 protected:
  void SetUp() override {
    folder_ = fs::path(testing::TempDir()) / ("lagscape_app_" + std::to_string(getpid()));
    fs::remove_all(folder_);
    fs::create_directories(folder_);
    std::ofstream(folder_ / "not_a.nc") << "this is no archive";
  }
  void TearDown() override { fs::remove_all(folder_); }
  std::string job(const std::string& name, const std::string& result) const {
    const fs::path path = folder_ / name;
    std::ofstream(path) << "[input]\nfiles = 'not_a.nc'\nvariable = 'v'\n[output]\nfile = '" << result << "'\n";
    return path.string();
  }
  fs::path folder_;
};

TEST_F(App, HelpAndExplanationsGoToStdoutWithCodeZero) {
  for (const std::vector<std::string>& arguments :
       {std::vector<std::string>{"--help"}, {"--version"}, {"run", "--help"}, {"explain"}}) {
    const Answer answer = call(arguments);
    EXPECT_EQ(answer.code, 0) << arguments.front();
    EXPECT_NE(answer.out, "");
    EXPECT_EQ(answer.err, "");
  }
  EXPECT_EQ(call({"explain", "prepare.min_share"}).out, explain_text("prepare.min_share"));
  EXPECT_NE(call({"explain", "forg"}).err.find("did you mean 'forge'?"), std::string::npos);
  EXPECT_EQ(call({"explain", "plan"}).out, call({"plan", "--help"}).out);
  EXPECT_EQ(call({"explain", "field.rate", "season"}).out, explain_text("field.rate") + "\n" + explain_text("season"));
}

TEST_F(App, EveryKindOfMistakeHasItsExitCodeAndNothingOnStdout) {
  const std::string good = job("good.toml", "out.nc");
  const std::vector<std::pair<int, std::vector<std::string>>> calls = {
      {2, {"run"}},
      {2, {"explain", "nonsensical"}},
      {2, {"explain", "plan", "nonsensical"}},
      {3, {"run", (folder_ / "none.toml").string()}},
      {3, {"plan", good, "--set", "trend.alpha=2"}},
      {4, {"plan", good}},
      {4, {"run", good}},
      {4, {"survey", (folder_ / "not_a.nc").string()}},
      {5, {"survey", (folder_ / "not_a.nc").string(), "--write-job", good}},
  };
  for (const auto& [code, arguments] : calls) {
    const Answer answer = call(arguments);
    EXPECT_EQ(answer.code, code) << arguments.front() << answer.err;
    EXPECT_EQ(answer.out, "");
    EXPECT_EQ(answer.err.substr(0, 7), "error: ");
    EXPECT_NE(answer.err.find("\n  fix:   "), std::string::npos) << answer.err;
  }
  EXPECT_FALSE(fs::exists(folder_ / "out.nc"));
}

TEST_F(App, AllJobsAreCheckedBeforeTheFirstIsRun) {
  const std::string first = job("first.toml", "out.nc"), second = job("second.toml", "out.tif"),
                    third = job("third.toml", "out.bmp");
  const Answer answer = call({"run", first, second, third});
  EXPECT_EQ(answer.code, 3);
  EXPECT_NE(answer.err.find("second.toml:5:8"), std::string::npos) << answer.err;
  EXPECT_NE(answer.err.find("third.toml:5:8"), std::string::npos) << answer.err;
}

TEST_F(App, PlanSaysThatTheResultExistsAlready) {
  std::ofstream panel(folder_ / "flow.csv");
  panel << "date,upper,lower\n";
  for (int month = 0; month < 60; ++month)
    panel << 1981 + month / 12 << (month % 12 < 9 ? "-0" : "-") << month % 12 + 1 << "-15,1,2\n";
  panel.close();
  const std::string path = (folder_ / "flow.toml").string();
  std::ofstream(path) << "[input]\nfiles = 'flow.csv'\nvariable = 'flow'\n[output]\nfile = 'result.nc'\n";
  const auto notes = [&](std::vector<std::string> arguments) {
    arguments.insert(arguments.begin(), {"plan", path, "--json"});
    const Answer answer = call(arguments);
    EXPECT_EQ(answer.code, 0) << answer.err;
    return nlohmann::json::parse(answer.out)["plans"][0]["notes"].dump();
  };
  EXPECT_EQ(notes({}).find("already"), std::string::npos) << notes({});
  std::ofstream(folder_ / "result.nc") << "an earlier result";
  EXPECT_NE(notes({}).find("the result exists already; run needs --replace"), std::string::npos) << notes({});
  EXPECT_NE(notes({"--replace"}).find("with --replace it is replaced"), std::string::npos) << notes({"--replace"});
}

TEST_F(App, TwoJobsMustNotWriteTheSameResult) {
  const Answer answer = call({"run", job("first.toml", "out.nc"), job("second.toml", "./out.nc")});
  EXPECT_EQ(answer.code, 3);
  EXPECT_NE(answer.err.find("two jobs have the same result"), std::string::npos) << answer.err;
}

}  // namespace
}  // namespace lagscape
