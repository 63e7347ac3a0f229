#pragma once
#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "lagscape/grid/time_axis.h"
#include "lagscape/io/archive.h"

namespace lagscape {

/// Times of one file, in file order.
struct FileTimes {
  std::string file;
  Calendar calendar = Calendar::standard;
  std::vector<Seconds> times;
  std::vector<Seconds> middles = {};  ///< of the periods covered, if the file has usable bounds of time
};

/// What a time variable says of itself, with the job's `time = {...}` already laid over it.
struct TimeText {
  std::string units;     ///< "days since 1981-01-01 00:00:00"
  std::string calendar;  ///< "" = standard
};

/// The text under which values are dates by themselves, where the unit names no date: years such as 1981 (unit "year"
/// or none), or days written as 19810131 (any unit without a date). Nothing if they are neither.
[[nodiscard]] std::optional<TimeText> written_dates(std::string_view units, std::span<const double> values);
/// "time = { unit = "...", calendar = "..." }" for the [input] table of a job; the calendar is left out if empty.
[[nodiscard]] std::string mend_line(const TimeText& text);

/// Decodes CF time values with our own "UNIT since DATE" parser and calendars. `variable` is for messages. `notes`
/// receives what was bent to be read ("24:00:00 taken as the next day"). Throws Error{input} naming file, value, units.
[[nodiscard]] FileTimes decode_times(const std::string& file, const std::string& variable,
                                     std::span<const double> values, const TimeText& text,
                                     std::vector<std::string>& notes);

/// Two stored steps that fall on the same step of the axis: their values must be compared by the reader.
struct Overlap {
  std::size_t axis_step, file_a, step_a, file_b, step_b;
};

/// The full regular axis of an archive, and where each stored step goes.
struct JoinedAxis {
  TimeAxis axis;
  std::vector<std::vector<std::int64_t>>
      axis_step;                  ///< per file and stored step: step of the axis, -1 if outside the period
  std::vector<Overlap> overlaps;  ///< every later holder of a step against the first one
  std::size_t steps_present = 0;
  std::vector<std::string> notes;
};

/// Finds the step (fixed seconds, calendar months and multiples, years) unless `step` gives it, and lays all times on
/// one full axis, cut to `period` (ISO dates, inclusive) if given. Files may come in any order. Near-regular times
/// (within 25 % of the step) are snapped and the largest shift noted; anything else throws Error{input} naming file,
/// times, remedy.
[[nodiscard]] JoinedAxis join_times(const std::vector<FileTimes>& files, const std::optional<TimeStep>& step,
                                    const std::optional<std::pair<std::string, std::string>>& period);

}  // namespace lagscape
