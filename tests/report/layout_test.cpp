#include "lagscape/report/layout.h"

#include <gtest/gtest.h>

#include <cmath>

#include "report/words.h"

namespace lagscape {
namespace {

TEST(Layout, BreaksAtBlanksOnly) {
  EXPECT_EQ(wrapped("one two three", 7), "one two\nthree");
  EXPECT_EQ(wrapped("one two three", 9, 2), "one two\n  three");
  EXPECT_EQ(wrapped("one  two", 80), "one two");
  EXPECT_EQ(wrapped("a/very/long/path and more", 8), "a/very/long/path\nand more");
  EXPECT_EQ(wrapped("used up", 10, 0, 4), "used\nup");
}

TEST(Layout, ListsInTwoColumns) {
  EXPECT_EQ(listed("name", "what it is about", 8, 20), "  name  what it is\n        about\n");
  EXPECT_EQ(listed("longer_name", "text", 8, 20), "  longer_name\n        text\n");
  EXPECT_EQ(listed("alone", "", 8, 20), "  alone\n");
}

TEST(Layout, TellsSpansOfTimeAsPeopleDo) {
  EXPECT_EQ(duration_words(0.04), "0.0 s");
  EXPECT_EQ(duration_words(9.94), "9.9 s");
  EXPECT_EQ(duration_words(9.96), "10 s");
  EXPECT_EQ(duration_words(59.6), "1 min 0 s");
  EXPECT_EQ(duration_words(200), "3 min 20 s");
  EXPECT_EQ(duration_words(7500), "2 h 5 min");
}

TEST(Layout, QuotesForTheShellWhereNeeded) {
  EXPECT_EQ(shell_word("jobs/a-b_1.toml"), "jobs/a-b_1.toml");
  EXPECT_EQ(shell_word("my job.toml"), "'my job.toml'");
  EXPECT_EQ(shell_word("it's"), "'it'\\''s'");
  EXPECT_EQ(shell_word(""), "''");
}

TEST(Words, CountsAndFigures) {
  EXPECT_EQ(counted(1, "file"), "1 file");
  EXPECT_EQ(counted(12345, "cell"), "12 345 cells");
  EXPECT_EQ(figure(0.012345), "0.0123");
  EXPECT_EQ(figure(999.4), "999");
  EXPECT_EQ(figure(999.5), "1 000");
  EXPECT_EQ(figure(-12345.6), "-12 346");
  EXPECT_EQ(figure(std::nan("")), "-");
}

TEST(Words, SharesNeverRoundToNothingOrToAll) {
  EXPECT_EQ(percent(0, 10), "0 %");
  EXPECT_EQ(percent(1, 100000), "less than 0.1 %");
  EXPECT_EQ(percent(99999, 100000), "more than 99.9 %");
  EXPECT_EQ(percent(10, 10), "100 %");
  EXPECT_EQ(percent(996, 1000), "99.6 %");  // not all, so not 100 %
  EXPECT_EQ(percent(99, 100), "99 %");
  EXPECT_EQ(percent(1.0), "100 %");
  EXPECT_EQ(percent(0.998), "99.8 %");
  EXPECT_EQ(percent(0.9999), "more than 99.9 %");
  EXPECT_EQ(percent(0.0), "0 %");
  EXPECT_EQ(percent(3, 100), "3.0 %");
  EXPECT_EQ(percent(1, 3), "33 %");
  EXPECT_EQ(percent(0, 0), "-");
}

TEST(Words, DescribeTheTimeAxis) {
  Panel panel;
  EXPECT_EQ(time_words(panel), "no time steps");
  panel.axis = TimeAxis(Calendar::noleap, {StepKind::seconds, 21600}, seconds_of(Calendar::noleap, {1990, 1, 1}), 1460);
  panel.steps_present = 1460;
  EXPECT_EQ(time_words(panel),
            "1 460 steps, one every 6 hours, 1990-01-01 to 1990-12-31T18:00:00 (1 year), noleap calendar");
}

}  // namespace
}  // namespace lagscape
