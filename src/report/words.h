#pragma once
#include <cstddef>
#include <string>
#include <string_view>

#include "lagscape/grid/panel.h"
#include "lagscape/measures/measure.h"

/// Phrases that the summary, the plan, the survey and the explanations share.
namespace lagscape {

constexpr std::size_t kReportWidth = 80;

/// "1 file", "3 files": regular plurals only.
[[nodiscard]] std::string counted(std::size_t count, std::string_view noun);
/// What the places of this record are called: "cell" of a grid, "site" of a panel.
[[nodiscard]] std::string_view place_noun(const Panel& panel);
/// A figure of a result: three significant digits, thousands in groups, "-" for NaN.
[[nodiscard]] std::string figure(double value);
/// "12 %", "0.4 %", "less than 0.1 %"; whole of 0 gives "-".
[[nodiscard]] std::string percent(std::size_t part, std::size_t whole);
/// The same of a share, 0 to 1; only none is "0 %" and only all is "100 %".
[[nodiscard]] std::string percent(double share);
/// "soil wetness (m3 m-3)": the long name where there is one.
[[nodiscard]] std::string variable_words(const Panel& panel);
/// "480 monthly steps, 1981-01-15 to 2020-12-15 (40 years), standard calendar; 3 of them are in no file".
[[nodiscard]] std::string time_words(const Panel& panel);
/// Unit of a map before the input is known: "time: the unit of lags (day, month, ...)".
[[nodiscard]] std::string_view unit_words(UnitRule rule);
/// A paragraph with a heading, wrapped and indented by two blanks.
[[nodiscard]] std::string paragraph(std::string_view heading, std::string_view text);

}  // namespace lagscape
