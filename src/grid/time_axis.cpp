#include "lagscape/grid/time_axis.h"

#include <fmt/format.h>
#include <array>
#include <cctype>

#include "lagscape/base/text.h"

namespace lagscape {
namespace {

std::int64_t months_per_step(TimeStep step) { return step.kind == StepKind::years ? 12 * step.count : step.count; }

struct FixedUnit {
  Seconds seconds;
  const char* name;
  const char* every_one;
  const char* prefix;
  char letter;
};
constexpr std::array<FixedUnit, 4> kFixedUnits{{{kDay, "day", "daily", "P", 'D'},
                                                {3600, "hour", "hourly", "PT", 'H'},
                                                {60, "minute", "every minute", "PT", 'M'},
                                                {1, "second", "every second", "PT", 'S'}}};

// The longest unit that divides the step.
const FixedUnit& dividing_unit(Seconds step) {
  for (const FixedUnit& unit : kFixedUnits)
    if (step % unit.seconds == 0) return unit;
  return kFixedUnits.back();
}

// The unit for people: days for long steps that are no whole number of hours (36 a year: 10.146 days).
const FixedUnit& spoken_unit(Seconds step) {
  return step >= 2 * kDay && step % 3600 != 0 ? kFixedUnits.front() : dividing_unit(step);
}

double spoken_count(Seconds step) { return static_cast<double>(step) / static_cast<double>(spoken_unit(step).seconds); }

// One "12H" of a duration: unit and count of seconds, months or years; nothing for an unknown letter.
std::optional<TimeStep> duration_part(std::int64_t count, char letter, bool clock) {
  switch (std::toupper(static_cast<unsigned char>(letter))) {
    case 'Y':
      return clock ? std::nullopt : std::optional(TimeStep{StepKind::years, count});
    case 'M':
      return clock ? TimeStep{StepKind::seconds, count * 60} : TimeStep{StepKind::months, count};
    case 'W':
      return clock ? std::nullopt : std::optional(TimeStep{StepKind::seconds, count * 7 * kDay});
    case 'D':
      return clock ? std::nullopt : std::optional(TimeStep{StepKind::seconds, count * kDay});
    case 'H':
      return clock ? std::optional(TimeStep{StepKind::seconds, count * 3600}) : std::nullopt;
    case 'S':
      return clock ? std::optional(TimeStep{StepKind::seconds, count}) : std::nullopt;
    default:
      return std::nullopt;
  }
}

}  // namespace

std::optional<TimeStep> parse_duration(std::string_view text) {
  text = trim(text);
  if (text.size() < 3 || std::toupper(static_cast<unsigned char>(text.front())) != 'P') return std::nullopt;
  std::optional<TimeStep> total;
  bool clock = false;
  for (std::size_t at = 1; at < text.size();) {
    if (!clock && (text[at] == 'T' || text[at] == 't')) {
      clock = true;
      if (++at == text.size()) return std::nullopt;
    }
    std::int64_t count = 0;
    const std::size_t first = at;
    for (; at < text.size() && std::isdigit(static_cast<unsigned char>(text[at])) != 0; ++at)
      count = count * 10 + (text[at] - '0');
    if (at == first || at - first > 9 || at == text.size()) return std::nullopt;
    const auto part = duration_part(count, text[at++], clock);
    if (!part || (total && total->kind != part->kind)) return std::nullopt;
    total = TimeStep{part->kind, part->count + (total ? total->count : 0)};
  }
  if (!total || total->count <= 0) return std::nullopt;
  return total;
}

std::string duration_text(TimeStep step) {
  if (step.kind == StepKind::years) return fmt::format("P{}Y", step.count);
  if (step.kind == StepKind::months) return fmt::format("P{}M", step.count);
  const FixedUnit& unit = dividing_unit(step.count);
  return fmt::format("{}{}{}", unit.prefix, step.count / unit.seconds, unit.letter);
}

std::string step_words(TimeStep step) {
  if (step.kind == StepKind::years) return step.count == 1 ? "yearly" : fmt::format("every {} years", step.count);
  if (step.kind == StepKind::months) return step.count == 1 ? "monthly" : fmt::format("every {} months", step.count);
  const FixedUnit& unit = spoken_unit(step.count);
  if (step.count == unit.seconds) return unit.every_one;
  return fmt::format("every {} {}s", human_number(spoken_count(step.count), 5), unit.name);
}

TimeAxis::TimeAxis(Calendar calendar, TimeStep step, Seconds origin, std::size_t size, int day_of_month)
    : calendar_(calendar), step_(step), origin_(origin), size_(size) {
  if (step.kind != StepKind::seconds)
    day_of_month_ = day_of_month > 0 ? day_of_month : moment_of(calendar, origin).date.day;
}

Seconds TimeAxis::nominal(std::int64_t index) const {
  if (step_.kind == StepKind::seconds) return origin_ + index * step_.count;
  return add_months(calendar_, origin_, index * months_per_step(step_), day_of_month_);
}

std::int64_t TimeAxis::index_of(Seconds time, Seconds* off_seconds) const {
  std::int64_t index = 0;
  if (step_.kind == StepKind::seconds) {
    index = floor_div(time - origin_ + step_.count / 2, step_.count);
  } else {
    const std::int64_t first = month_number(calendar_, moment_of(calendar_, origin_).date);
    const std::int64_t month = month_number(calendar_, moment_of(calendar_, time).date);
    // Yearly slots are calendar years whatever the month of the stamp; slots of k months begin with the origin's month.
    index = step_.kind == StepKind::years ? floor_div(floor_div(month, 12) - floor_div(first, 12), step_.count)
                                          : floor_div(month - first, step_.count);
  }
  if (off_seconds != nullptr) *off_seconds = time - nominal(index);
  return index;
}

TimeAxis TimeAxis::slice(std::size_t first, std::size_t count) const {
  return {calendar_, step_, time(first), count, day_of_month_};
}

int TimeAxis::seasons() const {
  if (step_.kind == StepKind::years) return 1;
  if (step_.kind == StepKind::seconds) return step_.count >= 360 * kDay ? 1 : 12;
  return 12 % step_.count == 0 ? static_cast<int>(12 / step_.count) : 1;
}

int TimeAxis::season_of(std::size_t t) const {
  const int number = seasons();
  return number == 1 ? 0 : (moment_of(calendar_, time(t)).date.month - 1) / (12 / number);
}

double TimeAxis::year_phase(std::size_t t) const {
  const Moment moment = moment_of(calendar_, time(t));
  const std::int64_t day_of_year = day_number(calendar_, moment.date) - day_number(calendar_, {moment.date.year, 1, 1});
  return (static_cast<double>(day_of_year) + static_cast<double>(moment.clock) / static_cast<double>(kDay)) /
         days_in_year(calendar_, moment.date.year);
}

double TimeAxis::day_phase(std::size_t t) const {
  return static_cast<double>(moment_of(calendar_, time(t)).clock) / static_cast<double>(kDay);
}

double TimeAxis::steps_per_year() const {
  const auto count = static_cast<double>(step_.count);
  if (step_.kind == StepKind::years) return 1 / count;
  if (step_.kind == StepKind::months) return 12 / count;
  return mean_year_days(calendar_) * static_cast<double>(kDay) / count;
}

std::string TimeAxis::lag_unit() const {
  if (step_.kind == StepKind::years) return "year";
  if (step_.kind == StepKind::months) return "month";
  return spoken_unit(step_.count).name;
}

double TimeAxis::lag_unit_per_step() const {
  return step_.kind == StepKind::seconds ? spoken_count(step_.count) : static_cast<double>(step_.count);
}

}  // namespace lagscape
