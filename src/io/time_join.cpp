// join_times of time_decode.h: from the stamps of many files to one full axis.
#include <fmt/format.h>
#include <algorithm>
#include <cmath>

#include "io/step_finder.h"
#include "io/time_decode.h"
#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr std::int64_t kMaxSteps = 50'000'000;
constexpr std::int64_t kMinPercentPresent = 1;

using Period = std::pair<std::string, std::string>;

std::string span_text(double seconds) {
  if (seconds < 120) return fmt::format("{} s", human_number(seconds));
  if (seconds < 7200) return fmt::format("{} min", human_number(seconds / 60));
  if (seconds < 172800) return fmt::format("{} h", human_number(seconds / 3600));
  return fmt::format("{} days", human_number(seconds / static_cast<double>(kDay)));
}

std::string counted(std::int64_t count, const char* noun) {
  return fmt::format("{} {}{}", count, noun, count == 1 ? "" : "s");
}

/// The stamps of all files as one sorted list, each distinct time once.
class Stamps {
 public:
  explicit Stamps(const std::vector<FileTimes>& files) : files_(files) {
    for (const FileTimes& file : files) times_.insert(times_.end(), file.times.begin(), file.times.end());
    std::sort(times_.begin(), times_.end());
    times_.erase(std::unique(times_.begin(), times_.end()), times_.end());
    if (times_.empty())
      throw Error(ErrorKind::input, "the time axis is empty: no file holds a time step", "file: " + files.front().file,
                  "name files that hold data");
  }

  [[nodiscard]] const std::vector<Seconds>& times() const { return times_; }
  [[nodiscard]] Calendar calendar() const { return files_.front().calendar; }

  [[nodiscard]] std::size_t slot_of(const StepFit& fit, Seconds time) const {
    const auto at = std::lower_bound(times_.begin(), times_.end(), time) - times_.begin();
    return static_cast<std::size_t>(fit.slots[static_cast<std::size_t>(at)]);
  }

  /// "2001-02-03 (file obs_2001.nc, step 34)".
  [[nodiscard]] std::string place(Seconds time) const {
    for (const FileTimes& file : files_) {
      const auto found = std::find(file.times.begin(), file.times.end(), time);
      if (found != file.times.end())
        return fmt::format("{} (file {}, time step {})", iso_text(calendar(), time), file.file,
                           found - file.times.begin() + 1);
    }
    return iso_text(calendar(), time);
  }

 private:
  const std::vector<FileTimes>& files_;
  std::vector<Seconds> times_;
};

// From 1582-10-15 on the standard and the proleptic calendar are one and the same.
bool same_dates(const FileTimes& file, Calendar calendar) {
  if (file.calendar == calendar) return true;
  const auto gregorian = [](Calendar c) { return c == Calendar::standard || c == Calendar::proleptic_gregorian; };
  if (!gregorian(file.calendar) || !gregorian(calendar)) return false;
  const Seconds start = seconds_of(Calendar::standard, {1582, 10, 15});
  return std::all_of(file.times.begin(), file.times.end(), [&](Seconds time) { return time >= start; });
}

void check_calendars(const std::vector<FileTimes>& files, std::vector<std::string>& notes) {
  const FileTimes& first = files.front();
  for (const FileTimes& file : files) {
    if (file.calendar == first.calendar) continue;
    if (!same_dates(file, first.calendar) || !same_dates(first, file.calendar))
      throw Error(
          ErrorKind::input,
          fmt::format("the files use different calendars: {} has '{}', {} has '{}'", first.file,
                      calendar_name(first.calendar), file.file, calendar_name(file.calendar)),
          fmt::format("files: {} and {}", first.file, file.file),
          fmt::format(
              "if one is wrongly labelled set the calendar for all: [input] time = {{ calendar = \"{}\" }}; else "
              "analyse the files apart",
              calendar_name(first.calendar)));
    notes.push_back(fmt::format("{} has calendar '{}', {} '{}': the same dates after 1582", first.file,
                                calendar_name(first.calendar), file.file, calendar_name(file.calendar)));
    return;
  }
}

void note_order(const std::vector<FileTimes>& files, std::vector<std::string>& notes) {
  for (const FileTimes& file : files)
    if (!std::is_sorted(file.times.begin(), file.times.end()))
      notes.push_back(fmt::format("{}: times are not in ascending order; sorted", file.file));
}

// What to do about gaps that are no whole numbers of a step; a step is only advised where it then fits.
std::string uneven_remedy(const Stamps& stamps, const std::vector<Seconds>& gaps, Seconds common) {
  const std::vector<Seconds>& times = stamps.times();
  const TimeStep step{StepKind::seconds, common};
  if (fit_step(stamps.calendar(), times, step))
    return fmt::format(
        "if the stamps are only inexact name the step: [input] time = {{ step = \"{}\" }}; else average "
        "the values to equal steps first",
        duration_text(step));
  const auto year = [&](Seconds time) { return moment_of(stamps.calendar(), time).date.year; };
  bool anew = true;  // every odd gap ends with the first stamp of a year
  for (std::size_t i = 0; i < gaps.size(); ++i)
    anew = anew && (gaps[i] % common == 0 || year(times[i]) != year(times[i + 1]));
  const std::string remedy =
      "resample the values to calendar months or to steps of one fixed length first; no `step` in the job helps here";
  if (anew) return "steps that begin anew each year are not supported by this version: " + remedy;
  return "steps of unequal length (such as three in each month) are not supported by this version: " + remedy;
}

// Months with more than one stamp in some of them, where most are a month apart.
void refuse_crowded_months(const Stamps& stamps, const std::vector<Seconds>& sorted_gaps) {
  const Seconds typical = sorted_gaps[sorted_gaps.size() / 2];
  if (typical < 28 * kDay || typical > 31 * kDay) return;
  const auto month = [&](Seconds time) {
    return month_number(stamps.calendar(), moment_of(stamps.calendar(), time).date);
  };
  const std::vector<Seconds>& times = stamps.times();
  const auto pair =
      std::adjacent_find(times.begin(), times.end(), [&](Seconds a, Seconds b) { return month(a) == month(b); });
  if (pair == times.end()) return;
  throw Error(ErrorKind::input,
              fmt::format("times look monthly, but {} and {} lie in one month", iso_text(stamps.calendar(), pair[0]),
                          iso_text(stamps.calendar(), pair[1])),
              fmt::format("{} and {}", stamps.place(pair[0]), stamps.place(pair[1])),
              "correct the times in the file; or, to take the mean of what lies in one month, add to [input] of the "
              "job: time = { step = \"P1M\" } and, on a line of its own, duplicates = \"mean\"");
}

// Says which gap breaks the pattern: the commonest one, and the first that is no whole number of them.
[[noreturn]] void refuse_uneven(const Stamps& stamps) {
  const std::vector<Seconds>& times = stamps.times();
  std::vector<Seconds> gaps;
  for (std::size_t i = 1; i < times.size(); ++i) gaps.push_back(times[i] - times[i - 1]);
  std::vector<Seconds> sorted = gaps;
  std::sort(sorted.begin(), sorted.end());
  refuse_crowded_months(stamps, sorted);
  Seconds common = sorted.front();
  std::ptrdiff_t most = 0;
  for (auto at = sorted.begin(); at != sorted.end();) {
    const auto end = std::upper_bound(at, sorted.end(), *at);
    if (end - at > most) {
      most = end - at;
      common = *at;
    }
    at = end;
  }
  const auto odd = std::find_if(gaps.begin(), gaps.end(), [&](Seconds gap) { return gap % common != 0; });
  const auto at = static_cast<std::size_t>(odd == gaps.end() ? 0 : odd - gaps.begin());
  const auto seconds = [](Seconds s) { return span_text(static_cast<double>(s)); };
  throw Error(
      ErrorKind::input,
      fmt::format("times are not equally spaced: the commonest step is {} ({} of {}), but one of {} follows {}",
                  seconds(common), most, gaps.size(), seconds(gaps[at]), iso_text(stamps.calendar(), times[at])),
      fmt::format("between {} and {}", stamps.place(times[at]), stamps.place(times[at + 1])),
      uneven_remedy(stamps, gaps, common));
}

[[noreturn]] void refuse_step(const Stamps& stamps, TimeStep step) {
  const std::vector<Seconds>& times = stamps.times();
  const TimeAxis axis(stamps.calendar(), step, times.front(), 1);
  Seconds worst = times.front(), worst_off = 0;
  for (const Seconds time : times) {
    Seconds off = 0;
    static_cast<void>(axis.index_of(time, &off));
    if (std::abs(off) > std::abs(worst_off)) {
      worst = time;
      worst_off = off;
    }
  }
  throw Error(
      ErrorKind::input,
      fmt::format(
          "times do not fit the step {} of the job: {} is {} away from the nearest step counted from {}, at most "
          "a quarter of a step is allowed",
          duration_text(step), iso_text(stamps.calendar(), worst), span_text(std::fabs(static_cast<double>(worst_off))),
          iso_text(stamps.calendar(), times.front())),
      stamps.place(worst), "correct [input] time = { step = ... }, or leave it out to let the step be found");
}

StepFit fit_times(const Stamps& stamps, const std::optional<TimeStep>& step) {
  const std::vector<Seconds>& times = stamps.times();
  if (step) {
    auto fit = fit_step(stamps.calendar(), times, *step);
    if (!fit) refuse_step(stamps, *step);
    return std::move(*fit);
  }
  if (times.size() == 1)
    throw Error(ErrorKind::input,
                fmt::format("there is a single time step, {}, so the length of a step is unknown",
                            iso_text(stamps.calendar(), times.front())),
                stamps.place(times.front()),
                "one time step cannot be analysed: name all files of the archive together");
  auto fit = find_step(stamps.calendar(), times);
  if (!fit) refuse_uneven(stamps);
  return std::move(*fit);
}

struct Hole {
  std::int64_t steps = 0;
  std::size_t before = 0;  ///< index of the last time before it
};

Hole largest_hole(const StepFit& fit) {
  Hole hole;
  for (std::size_t i = 1; i < fit.slots.size(); ++i)
    if (fit.slots[i] - fit.slots[i - 1] - 1 > hole.steps) hole = {fit.slots[i] - fit.slots[i - 1] - 1, i - 1};
  return hole;
}

void check_size(const Stamps& stamps, const StepFit& fit) {
  const std::int64_t size = fit.slots.back() + 1;
  const auto present = std::ssize(fit.slots);
  if (size <= kMaxSteps && present * 100 >= size * kMinPercentPresent) return;
  const Hole hole = largest_hole(fit);
  const Seconds before = stamps.times()[hole.before], after = stamps.times()[hole.before + 1];
  // The lonelier side of the hole is the likely slip.
  const bool early = hole.before + 1 <= fit.slots.size() / 2;
  throw Error(
      ErrorKind::input,
      fmt::format(
          "the time axis would have {} steps ({}) of which the files hold {}; the time value {} is likely wrong",
          grouped(static_cast<std::size_t>(size)), step_words(fit.step), present,
          iso_text(stamps.calendar(), early ? before : after)),
      fmt::format("nothing between {} and {}", stamps.place(before), stamps.place(after)),
      "correct or leave out the file with the wrong time, or cut it off before joining; if the times are right, give a "
      "longer step: [input] time = { step = \"P1M\" }");
}

// The largest distance of a stamp from the nominal time of its step, in seconds. Calendar steps: only when it is more
// than the stamps in the middle of months of unequal lengths are apart (14th .. 16th).
void note_shift(const Stamps& stamps, const StepFit& fit, const TimeAxis& axis, std::vector<std::string>& notes) {
  constexpr double kMonthStamps = 0.06;
  const double step_seconds = static_cast<double>(kDay) * mean_year_days(axis.calendar()) / axis.steps_per_year();
  double largest = fit.largest_shift * step_seconds;
  if (fit.step.kind == StepKind::seconds) {
    if (largest <= 1) return;
  } else {
    largest = 0;
    for (std::size_t i = 0; i < fit.slots.size(); ++i) {
      const Seconds nominal = axis.time(static_cast<std::size_t>(fit.slots[i]));
      largest = std::max(largest, std::fabs(static_cast<double>(stamps.times()[i] - nominal)));
    }
    if (largest <= kMonthStamps * step_seconds) return;
  }
  notes.push_back(fmt::format("times snapped to equal steps ({}), the largest shift is {}", step_words(fit.step),
                              span_text(largest)));
}

// A bound of the period; a day that the calendar lacks (31 December of 360_day, 29 February of noleap) means the
// nearest day inside the period.
Seconds period_bound(Calendar calendar, const std::string& text, bool end) {
  if (const auto time = parse_iso(calendar, text, end)) return *time;
  const auto elsewhere = parse_iso(Calendar::all_leap, text);
  if (!elsewhere)
    throw Error(ErrorKind::job, fmt::format("'{}' in [input] period is not a date", text), "",
                "write ISO dates: period = [\"1981-01-01\", \"2020-12-31\"]");
  Date date = moment_of(Calendar::all_leap, *elsewhere).date;
  while (!valid_date(calendar, date) && date.day > 1) --date.day;
  if (!valid_date(calendar, date))
    throw Error(ErrorKind::job,
                fmt::format("'{}' in [input] period does not exist in the {} calendar", text, calendar_name(calendar)),
                "", "choose another date");
  return seconds_of(calendar, date) + kDay - (end ? 1 : 0);
}

// Cuts the axis of all files to the period; the axis never reaches beyond what the files hold.
struct Cut {
  std::int64_t first = 0, count = 0;
};

Cut cut_to_period(const TimeAxis& whole, const Period& period, std::vector<std::string>& notes) {
  const Calendar calendar = whole.calendar();
  const Seconds from = period_bound(calendar, period.first, false), to = period_bound(calendar, period.second, true);
  if (from > to)
    throw Error(ErrorKind::job,
                fmt::format("[input] period begins after it ends: {} to {}", period.first, period.second), "",
                "write the earlier date first");
  const auto last = whole.size() - 1;
  const auto first_from = [&](Seconds bound) {
    std::size_t a = 0, b = whole.size();
    while (a < b) {
      const std::size_t middle = a + (b - a) / 2;
      if (whole.time(middle) < bound)
        a = middle + 1;
      else
        b = middle;
    }
    return a;
  };
  const std::size_t low = first_from(from), high = first_from(to + 1);
  if (low >= high)
    throw Error(ErrorKind::input,
                fmt::format("no time step lies in the period {} to {}: the files cover {} to {}", period.first,
                            period.second, whole.label(0), whole.label(last)),
                "[input] period", "choose a period that the files cover, or leave it out");
  const bool begins_early = whole.index_of(from) < 0, ends_late = whole.slice(last, 2).time(1) <= to;
  if (begins_early || ends_late)
    notes.push_back(fmt::format(
        "the period {} to {} reaches beyond the files, which cover {} to {}: the axis is cut to what they cover",
        period.first, period.second, whole.label(0), whole.label(last)));
  return {static_cast<std::int64_t>(low), static_cast<std::int64_t>(high - low)};
}

void place_steps(const std::vector<FileTimes>& files, const Stamps& stamps, const StepFit& fit, const Cut& cut,
                 JoinedAxis& out) {
  struct Holder {
    std::size_t file = 0, step = 0;
    bool taken = false;
  };
  std::vector<Holder> holders(static_cast<std::size_t>(cut.count));
  for (std::size_t f = 0; f < files.size(); ++f) {
    auto& steps = out.axis_step.emplace_back();
    steps.reserve(files[f].times.size());
    for (std::size_t s = 0; s < files[f].times.size(); ++s) {
      const auto slot = static_cast<std::int64_t>(stamps.slot_of(fit, files[f].times[s])) - cut.first;
      if (slot < 0 || slot >= cut.count) {
        steps.push_back(-1);
        continue;
      }
      steps.push_back(slot);
      Holder& holder = holders[static_cast<std::size_t>(slot)];
      if (holder.taken) {
        out.overlaps.push_back({static_cast<std::size_t>(slot), holder.file, holder.step, f, s});
      } else {
        holder = {f, s, true};
        ++out.steps_present;
      }
    }
  }
}

void note_holes(const StepFit& fit, const TimeAxis& whole, std::vector<std::string>& notes) {
  const Hole hole = largest_hole(fit);
  if (hole.steps == 0) return;
  std::int64_t missing = 0;
  for (std::size_t i = 1; i < fit.slots.size(); ++i)
    missing += std::max<std::int64_t>(0, fit.slots[i] - fit.slots[i - 1] - 1);
  const auto first = static_cast<std::size_t>(fit.slots[hole.before] + 1);
  const std::size_t last = first + static_cast<std::size_t>(hole.steps) - 1;
  notes.push_back(fmt::format("{} of {} are in no file and count as missing; the longest run of them is {} ({} to {})",
                              counted(missing, "step"), whole.size(), hole.steps, whole.label(first),
                              whole.label(last)));
}

}  // namespace

JoinedAxis join_times(const std::vector<FileTimes>& files, const std::optional<TimeStep>& step,
                      const std::optional<Period>& period) {
  if (files.empty()) throw Error(ErrorKind::internal, "no files to join");
  JoinedAxis out;
  check_calendars(files, out.notes);
  note_order(files, out.notes);
  const Stamps stamps(files);
  const StepFit fit = fit_times(stamps, step);
  check_size(stamps, fit);
  const TimeAxis whole(stamps.calendar(), fit.step, fit.origin, static_cast<std::size_t>(fit.slots.back() + 1),
                       fit.day_of_month);
  note_shift(stamps, fit, whole, out.notes);
  note_holes(fit, whole, out.notes);
  Cut cut{0, static_cast<std::int64_t>(whole.size())};
  if (period) cut = cut_to_period(whole, *period, out.notes);
  out.axis = whole.slice(static_cast<std::size_t>(cut.first), static_cast<std::size_t>(cut.count));
  place_steps(files, stamps, fit, cut, out);
  if (out.steps_present == 0)
    throw Error(
        ErrorKind::input,
        fmt::format("the files hold no time step from {} to {}, only before and after", period->first, period->second),
        "[input] period", "choose a period that the files cover, or leave it out");
  return out;
}

}  // namespace lagscape
