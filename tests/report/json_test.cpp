#include "report/json.h"

#include <gtest/gtest.h>

#include <limits>
#include <nlohmann/json.hpp>

namespace lagscape {
namespace {

TEST(Json, QuotesWhatRfc8259Forbids) {
  EXPECT_EQ(json::text("a\"b\\c\nd\te"), "\"a\\\"b\\\\c\\nd\\u0009e\"");
  for (int code = 0; code < 256; ++code) {
    const std::string value = "x" + std::string(1, static_cast<char>(code)) + "y";
    EXPECT_EQ(nlohmann::json::parse(json::text(value)).get<std::string>().front(), 'x') << code;
  }
}

TEST(Json, KeepsUtf8AndTakesOtherBytesForLatin1) {
  EXPECT_EQ(json::text("\xC2\xB0"
                       "C"),
            "\"\xC2\xB0"
            "C\"");
  EXPECT_EQ(json::text("\xB0"
                       "C"),
            "\"\\u00b0C\"");
  // Overlong, surrogate, beyond U+10FFFF, cut short: none of them is UTF-8 (Unicode 15, table 3-7).
  for (const char* bad :
       {"\xC0\xAF", "\xE0\x80\xAF", "\xED\xA0\x80", "\xF4\x90\x80\x80", "\xF5\x80\x80\x80", "\xE2\x82"}) {
    EXPECT_TRUE(nlohmann::json::accept(json::text(bad)));
    EXPECT_EQ(json::text(bad).substr(0, 3), "\"\\u") << bad;
  }
}

TEST(Json, NumbersReadBackTheSameAndNonFiniteOnesAreNull) {
  EXPECT_EQ(nlohmann::json::parse(json::number(0.1)).get<double>(), 0.1);
  EXPECT_EQ(nlohmann::json::parse(json::number(1e300)).get<double>(), 1e300);
  EXPECT_EQ(json::number(std::size_t{42}), "42");
  EXPECT_EQ(json::number(std::numeric_limits<double>::quiet_NaN()), "null");
  EXPECT_EQ(json::number(std::numeric_limits<double>::infinity()), "null");
}

TEST(Json, NestsAndIndents) {
  EXPECT_EQ(json::object({{"a", json::boolean(true)}, {"b", json::texts(std::vector<std::string>{"x", "y"})}}),
            "{\n  \"a\": true,\n  \"b\": [\n    \"x\",\n    \"y\"\n  ]\n}");
  EXPECT_EQ(json::object({}), "{}");
  EXPECT_EQ(json::list({}), "[]");
}

}  // namespace
}  // namespace lagscape
