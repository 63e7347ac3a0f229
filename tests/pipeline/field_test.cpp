#include "pipeline/field.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

FieldInput example() {
  // Benjamini & Hochberg 1995, J. R. Stat. Soc. B 57:289, the fifteen p-values of their section 3.2, with untested
  // cells between.
  FieldInput input;
  input.p = {.0001, .0004, kNaN,  .0019, .0095, .0201, .0278, .0298, .0344,
             .0459, .3240, .4262, .5719, .6528, .7590, 1.0,   kNaN};
  input.p_independent.assign(input.p.size(), 0.01);
  input.slope.assign(input.p.size(), -1.0F);
  input.slope[0] = 2.0F;
  input.order.assign(input.p.size(), 1);
  input.order[1] = 2;
  input.order[8] = 5;  // does not stand
  return input;
}

TEST(Field, RejectsWhatThePaperRejects) {
  JobSpec job;
  job.field.rate = 0.05;
  const FieldResult result = field_step(example(), job);
  EXPECT_EQ(result.counts.tested, 15U);
  EXPECT_EQ(result.counts.standing, 4U);  // the paper: the four smallest at q = .05
  EXPECT_EQ(result.counts.rising, 1U);
  EXPECT_EQ(result.counts.falling, 3U);
  EXPECT_EQ(result.counts.local, 9U);
  EXPECT_EQ(result.counts.beyond_order, 1U) << "the test ols-neff covers first-order memory only";
  EXPECT_EQ(result.trend_class[0], 1.0F);
  EXPECT_EQ(result.trend_class[1], 2.0F);
  EXPECT_EQ(result.trend_class[5], 0.0F);
  EXPECT_TRUE(std::isnan(result.trend_class[2]));
  EXPECT_TRUE(std::isnan(result.adjusted[2]));
  EXPECT_DOUBLE_EQ(result.counts.expected_false, 0.2);
}

TEST(Field, ATrendMustPassItsOwnCellToo) {
  JobSpec job;
  job.field.rate = 0.5;  // lets the p-values up to .3240 pass over the map
  job.trend.alpha = 0.01;
  EXPECT_EQ(field_step(example(), job).counts.standing, 4U);
  job.trend.alpha = 0.05;
  EXPECT_EQ(field_step(example(), job).counts.standing, 9U);
}

TEST(Field, StricterUnderAnyDependenceAndOpenWithoutControl) {
  JobSpec job;
  job.field = {FieldControl::by, 0.05};
  EXPECT_LT(field_step(example(), job).counts.standing, 4U);
  job.field.control = FieldControl::none;
  const FieldResult result = field_step(example(), job);
  EXPECT_EQ(result.counts.standing, result.counts.local);
  EXPECT_EQ(result.adjusted[3], .0019);
  EXPECT_EQ(result.counts.expected_false, 0);
}

TEST(Field, AMapWithoutTestsHasNoTrends) {
  FieldInput input{{kNaN, kNaN}, {kNaN, kNaN}, {0.0F, 0.0F}, {0, 0}};
  const FieldResult result = field_step(input, JobSpec{});
  EXPECT_EQ(result.counts.tested, 0U);
  EXPECT_EQ(result.counts.independent, 0U);
}

}  // namespace
}  // namespace lagscape
