#include <gtest/gtest.h>

#include <fmt/format.h>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/job/options.h"
#include "lagscape/measures/measure.h"
#include "lagscape/measures/trend_test.h"
#include "lagscape/report/render.h"
#include "report/methods.h"

namespace lagscape {
namespace {

/// Everything there is to explain, as users type it.
std::vector<std::string> words() {
  std::vector<std::string> all;
  for (const Measure& measure : measure_catalog()) all.emplace_back(measure.name);
  for (const StatusBit& bit : status_bits()) all.emplace_back(bit.name);
  for (const TrendTest& test : trend_tests()) all.emplace_back(test.name);
  for (const Method& method : methods()) all.emplace_back(method.name);
  for (const JobOption& option : job_options()) all.emplace_back(option.key);
  return all;
}

TEST(Explain, TheIndexNamesEveryWordAndEveryWordIsExplained) {
  const std::string index = explain_text("");
  for (const std::string& word : words()) {
    EXPECT_NE(index.find("\n  " + word), std::string::npos) << word;
    EXPECT_GT(explain_text(word).size(), word.size() + 20) << word;
  }
}

TEST(Explain, FitsEightyColumns) {
  std::vector<std::string> all = words();
  all.insert(all.end(), {"", "standard", "memory", "prepare", "input.quality", "rising"});
  for (const std::string& word : all) {
    for (const std::string& line : split(explain_text(word), '\n')) EXPECT_LE(line.size(), 80U) << word << ": " << line;
  }
}

TEST(Explain, AMapGivesMeaningUnitFormulaAndSource) {
  const Measure& measure = *find_measure("decorrelation_time");
  const std::string text = explain_text("Decorrelation-Time");
  EXPECT_EQ(text.substr(0, 20), "decorrelation_time: ");
  for (const char* heading : {"\nUnit\n  time", "\nFormula\n", "\nSource\n", "\nIn a job\n  [output] maps = "}) {
    EXPECT_NE(text.find(heading), std::string::npos) << heading << text;
  }
  EXPECT_FALSE(measure.source.empty());
  EXPECT_NE(explain_text("autocorrelation").find("[output] cubes = [\"autocorrelation\"]"), std::string::npos);
}

TEST(Explain, AStatusIsFoundByNameWordsAndNumber) {
  for (const StatusBit& bit : status_bits()) {
    const std::string text = explain_text(std::string(bit.name));
    EXPECT_NE(text.find(fmt::format("bit {} of the map status", bit.mask)), std::string::npos) << text;
    EXPECT_EQ(explain_text(std::string(bit.words)).find(text) == std::string::npos, false);
    EXPECT_EQ(explain_text(fmt::format("{}", bit.mask)), text);
  }
}

TEST(Explain, AKeyIsFoundWithAndWithoutItsTable) {
  const std::string text = explain_text("prepare.min_share");
  EXPECT_EQ(explain_text("min_share"), text);
  EXPECT_NE(text.find("Default\n  0.8\n"), std::string::npos) << text;
  EXPECT_NE(text.find("Range\n  0 to 1\n"), std::string::npos) << text;
  EXPECT_NE(text.find("--set prepare.min_share=VALUE"), std::string::npos) << text;
}

TEST(Explain, AWordOfTwoMeaningsGivesBoth) {
  const std::string text = explain_text("memory");
  EXPECT_NE(text.find("The group of maps memory\n"), std::string::npos) << text;
  EXPECT_NE(text.find("Keys of the job file below [memory]\n"), std::string::npos) << text;
}

TEST(Explain, WhatALaterVersionBringsIsNotUnknown) {
  EXPECT_NE(explain_text("input.quality").find("later version"), std::string::npos);
  EXPECT_NE(explain_text("calibrated").find("later version"), std::string::npos);
}

TEST(Explain, UnknownWordsGetTheNearestOne) {
  try {
    (void)explain_text("decorelation_time");
    FAIL() << "the word is not known";
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::usage);
    EXPECT_EQ(error.problem(),
              "there is nothing to explain about 'decorelation_time', did you mean 'decorrelation_time'?");
    EXPECT_NE(error.fix().find("lagscape explain"), std::string::npos);
  }
}

TEST(Catalogue, AsMarkdownHasOneRowAMapAndNoBrokenCell) {
  const std::vector<std::string> lines = split(catalogue_markdown(), '\n');
  ASSERT_GT(lines.size(), measure_catalog().size() + 2);
  for (std::size_t i = 0; i < measure_catalog().size(); ++i) {
    std::string row = lines[i + 2];
    EXPECT_EQ(row.substr(0, 3 + measure_catalog()[i].name.size()), "| `" + std::string(measure_catalog()[i].name));
    for (std::size_t at = row.find("\\|"); at != std::string::npos; at = row.find("\\|")) row.erase(at, 2);
    EXPECT_EQ(std::count(row.begin(), row.end(), '|'), 5) << row;
  }
}

}  // namespace
}  // namespace lagscape
