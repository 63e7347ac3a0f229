#include "report/words.h"

#include <fmt/format.h>

#include <cmath>

#include "lagscape/base/text.h"
#include "lagscape/report/layout.h"

namespace lagscape {

std::string counted(std::size_t count, std::string_view noun) {
  return fmt::format("{} {}{}", grouped(count), noun, count == 1 ? "" : "s");
}

std::string_view place_noun(const Panel& panel) { return panel.geometry.is_sites() ? "site" : "cell"; }

std::string figure(double value) {
  if (!(std::abs(value) >= 999.5) || std::abs(value) >= 1e15) return human_number(value, 3);
  return (value < 0 ? "-" : "") + grouped(static_cast<std::size_t>(std::llround(std::abs(value))));
}

std::string percent(std::size_t part, std::size_t whole) {
  return whole == 0 ? "-" : percent(static_cast<double>(part) / static_cast<double>(whole));
}

std::string percent(double share) {
  const double amount = 100 * share;
  if (amount > 0 && amount < 0.1) return "less than 0.1 %";
  if (amount < 100 && amount > 99.9) return "more than 99.9 %";
  const bool near_an_end = (amount > 0 && amount < 9.95) || (amount >= 99.5 && amount < 100);
  return fmt::format("{:.{}f} %", amount, near_an_end ? 1 : 0);
}

std::string variable_words(const Panel& panel) {
  const std::string name =
      panel.long_name.empty() ? panel.variable : fmt::format("{}: {}", panel.variable, panel.long_name);
  return panel.units.empty() ? name + ", no unit given" : fmt::format("{}, unit {}", name, panel.units);
}

std::string time_words(const Panel& panel) {
  const TimeAxis& axis = panel.axis;
  if (axis.size() == 0) return "no time steps";
  const std::string every = step_words(axis.step());
  const std::string steps = every.starts_with("every ") ? fmt::format("{}, one {}", counted(axis.size(), "step"), every)
                                                        : counted(axis.size(), every + " step");
  const std::string years = human_number(axis.years(), 3);
  std::string words = fmt::format("{}, {} to {} ({}), {} calendar", steps, axis.label(0), axis.label(axis.size() - 1),
                                  years == "1" ? "1 year" : years + " years", calendar_name(axis.calendar()));
  if (panel.steps_present < axis.size()) {
    words += fmt::format("; {} of them in no file (missing)", grouped(axis.size() - panel.steps_present));
  }
  return words;
}

std::string_view unit_words(UnitRule rule) {
  switch (rule) {
    case UnitRule::one:
      return "1";
    case UnitRule::none:
      return "none (flags)";
    case UnitRule::input:
      return "that of the variable";
    case UnitRule::input_difference:
      return "that of a difference of the variable";
    case UnitRule::input_squared:
      return "that of the variable, squared";
    case UnitRule::input_rate:
      return "that of the variable, per year or decade";
    case UnitRule::lag_time:
      return "time, as lags (day, month, ...)";
    case UnitRule::calendar_time:
      return "date";
  }
  return "";
}

std::string paragraph(std::string_view heading, std::string_view text) {
  return text.empty() ? std::string() : fmt::format("{}\n  {}\n", heading, wrapped(text, kReportWidth, 2, 2));
}

}  // namespace lagscape
