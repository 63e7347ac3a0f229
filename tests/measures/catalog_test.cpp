#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <set>
#include <sstream>

#include "lagscape/measures/cell_result.h"
#include "lagscape/measures/measure.h"
#include "lagscape/measures/trend_test.h"

namespace lagscape {
namespace {

TEST(Catalogue, NamesAreUniqueWords) {
  std::set<std::string_view> names;
  for (const Measure& measure : measure_catalog()) {
    EXPECT_TRUE(names.insert(measure.name).second) << measure.name;
    EXPECT_TRUE(std::ranges::all_of(measure.name, [](char c) {
      return (c >= 'a' && c <= 'z') || (c >= '0' && c <= '9') || c == '_';
    })) << measure.name;
    EXPECT_EQ(find_measure(measure.name), &measure);
  }
  EXPECT_EQ(find_measure("no_such_map"), nullptr);
}

TEST(Catalogue, StandardMapsAreThoseThatAreDocumented) {
  const std::set<std::string_view> documented = {"status",
                                                 "valid_count",
                                                 "valid_share",
                                                 "first_time",
                                                 "last_time",
                                                 "longest_gap",
                                                 "mean",
                                                 "mean_low",
                                                 "mean_high",
                                                 "residual_sd",
                                                 "variance_share_season",
                                                 "variance_share_trend",
                                                 "lag1_autocorrelation",
                                                 "lag1_autocorrelation_corrected",
                                                 "ljung_box_p",
                                                 "ar_order",
                                                 "decorrelation_time",
                                                 "decorrelation_time_low",
                                                 "decorrelation_time_high",
                                                 "efolding_time",
                                                 "integral_time",
                                                 "first_lag_within_limits",
                                                 "effective_sample_size",
                                                 "effective_sample_size_for_variance",
                                                 "effective_sample_size_for_trend",
                                                 "trend_slope",
                                                 "trend_slope_low",
                                                 "trend_slope_high",
                                                 "trend_total",
                                                 "trend_p",
                                                 "trend_p_independent",
                                                 "trend_p_field",
                                                 "trend_class",
                                                 "detectable_trend"};
  std::set<std::string_view> standard;
  for (const Measure& measure : measure_catalog()) {
    if (measure.standard) standard.insert(measure.name);
  }
  EXPECT_EQ(standard, documented);
}

TEST(Catalogue, OtherMapsAndCubesAreThere) {
  for (const char* name : {"innovation_sd", "zero_crossing_time", "geyer_time", "sokal_time", "ar1_time",
                           "years_to_detect", "autocorrelation", "autocorrelation_limit", "partial_autocorrelation",
                           "autocovariance", "pair_count", "ar_coefficients"}) {
    const Measure* measure = find_measure(name);
    ASSERT_NE(measure, nullptr) << name;
    EXPECT_FALSE(measure->standard);
  }
}

TEST(Catalogue, EveryTrendTestHasAMapOfItsP) {
  for (const TrendTest& test : trend_tests()) EXPECT_NE(find_measure(test_map_name(test.name)), nullptr) << test.name;
}

TEST(Catalogue, TextsAreWholeAndAscii) {
  for (const Measure& measure : measure_catalog()) {
    for (const std::string_view text : {measure.long_name, measure.meaning, measure.formula, measure.source}) {
      EXPECT_FALSE(text.empty()) << measure.name;
    }
    for (const std::string_view text :
         {measure.long_name, measure.meaning, measure.formula, measure.source, measure.cautions}) {
      EXPECT_TRUE(std::ranges::all_of(text, [](char c) { return c >= ' ' && c <= '~'; })) << measure.name;
      EXPECT_EQ(text.find("  "), std::string_view::npos) << measure.name;  // a seam of two string literals
    }
    EXPECT_TRUE(measure.meaning.ends_with('.')) << measure.name << " is explained by whole sentences";
  }
}

TEST(Catalogue, EachMeasureHasExactlyOneWayToItsValues) {
  for (const Measure& measure : measure_catalog()) {
    EXPECT_NE(measure.value == nullptr, measure.layers == nullptr) << measure.name;
    EXPECT_EQ(measure.layers != nullptr, measure.axis != LayerAxis::none) << measure.name;
    EXPECT_EQ(measure.group == MapGroup::cubes, measure.axis != LayerAxis::none) << measure.name;
  }
}

TEST(Catalogue, AncillaryNamesAreMapsAndNotTheMapItself) {
  for (const Measure& measure : measure_catalog()) {
    std::istringstream words{std::string(measure.ancillary)};
    for (std::string name; words >> name;) {
      EXPECT_NE(find_measure(name), nullptr) << measure.name << ": " << name;
      EXPECT_NE(name, measure.name);
    }
  }
}

TEST(Catalogue, ValidRangesAreOrderedPairs) {
  for (const Measure& measure : measure_catalog()) {
    if (measure.valid_range.empty()) continue;
    ASSERT_EQ(measure.valid_range.size(), 2U) << measure.name;
    EXPECT_LT(measure.valid_range[0], measure.valid_range[1]) << measure.name;
  }
}

TEST(Catalogue, ACellWithoutEstimatesGivesMissingValues) {
  const CellResult empty;
  for (const Measure& measure : measure_catalog()) {
    if (measure.layers == nullptr) continue;
    std::vector<float> layers(5, 1.0F);
    measure.layers(empty, layers);
    for (const float value : layers) EXPECT_TRUE(std::isnan(value)) << measure.name;
  }
}

TEST(Words, OfMapsAreGroupsAndNamesAndOfCubesTheirNames) {
  const auto maps = map_words(), cubes = cube_words();
  for (const char* word : {"standard", "all", "record", "memory", "effective-size", "trend", "decorrelation_time"}) {
    EXPECT_EQ(std::ranges::count(maps, word), 1) << word;
  }
  EXPECT_EQ(std::ranges::count(maps, "autocorrelation"), 0);
  EXPECT_EQ(std::ranges::count(cubes, "autocorrelation"), 1);
  EXPECT_EQ(maps.size() - 6 + cubes.size(), measure_catalog().size());
}

TEST(TrendClasses, AreNumberedFromZeroWithWords) {
  std::int8_t expected = 0;
  for (const TrendClass& one : trend_classes()) {
    EXPECT_EQ(one.value, expected++);
    EXPECT_FALSE(one.name.empty() || one.words.empty());
  }
  EXPECT_EQ(trend_classes().size(), 3U);
}

}  // namespace
}  // namespace lagscape
