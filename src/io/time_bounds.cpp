#include "io/time_bounds.h"

#include <fmt/format.h>

#include <algorithm>

#include "io/value_rules.h"
#include "lagscape/base/error.h"

namespace lagscape {
namespace {

void note_unused(const std::string& name, const std::string& why, std::vector<std::string>& notes) {
  notes.push_back(fmt::format("time bounds '{}' are not used: {}", name, why));
}

// The bounds in the order of the file, start and end of each step; empty with a note if there is something wrong.
std::vector<double> bounds_values(const NcFile& file, const NcVariable& time, const std::string& name,
                                  std::size_t steps, std::vector<std::string>& notes) {
  const auto found = file.find(name, time.group);
  if (!found) {
    note_unused(name, "the file has no such variable", notes);
    return {};
  }
  if (!is_number_type(found->type) || found->dims.size() != time.dims.size() + 1 || found->dims.back().length != 2 ||
      found->size() != 2 * steps) {
    note_unused(name, "they are not two numbers for each time", notes);
    return {};
  }
  const Attributes own = file.attributes(*found), parent = file.attributes(time);
  const std::string units = text_attribute(own, "units");
  if (!units.empty() && units != text_attribute(parent, "units")) {
    note_unused(name, fmt::format("their units '{}' are not those of the times", units), notes);
    return {};
  }
  std::vector<double> values = file.doubles(*found);
  const auto scale = number_attribute(parent, "scale_factor"), offset = number_attribute(parent, "add_offset");
  for (double& value : values) value = value * (scale.empty() ? 1 : scale[0]) + (offset.empty() ? 0 : offset[0]);
  return values;
}

// What is wrong with bounds as periods of the times; "" if nothing is.
std::string fault(const std::vector<Seconds>& times, const std::vector<Seconds>& bounds) {
  std::size_t reversed = 0, beside = 0, grown = 0;
  for (std::size_t i = 0; i < times.size(); ++i) {
    const Seconds from = bounds[2 * i], to = bounds[2 * i + 1];
    if (from > to)
      ++reversed;
    else if (times[i] < from || times[i] > to)
      ++beside;
    else if (i > 0 && times[i] != times[i - 1] && (from == bounds[2 * i - 2] || to == bounds[2 * i - 1]))
      ++grown;
  }
  const auto told = [&](std::size_t count, const char* what) {
    return fmt::format("{} of {} {}", count, times.size(), what);
  };
  if (reversed > 0) return told(reversed, "end before they begin");
  if (beside > 0) return told(beside, "do not contain their time");
  if (grown > 0) return told(grown, "begin or end with the period before");
  return {};
}

}  // namespace

void read_middles(const NcFile& file, const NcVariable& time, const TimeText& text, FileTimes& times,
                  std::vector<std::string>& notes) {
  const std::string name = text_attribute(file.attributes(time), "bounds");
  if (name.empty()) return;
  const std::vector<double> values = bounds_values(file, time, name, times.times.size(), notes);
  if (values.empty()) return;
  std::vector<Seconds> bounds;
  try {
    std::vector<std::string> told_for_the_times;
    bounds = decode_times(file.path(), name, values, text, told_for_the_times).times;
  } catch (const Error& error) {
    note_unused(name, error.problem(), notes);
    return;
  }
  if (const std::string why = fault(times.times, bounds); !why.empty()) {
    note_unused(name, why, notes);
    return;
  }
  for (std::size_t i = 0; i < times.times.size(); ++i)
    times.middles.push_back(bounds[2 * i] + (bounds[2 * i + 1] - bounds[2 * i]) / 2);
}

std::vector<std::vector<Seconds>> use_middles(std::vector<FileTimes>& files, std::vector<std::string>& notes) {
  const auto without = [](const FileTimes& file) { return file.middles.size() != file.times.size(); };
  const auto lacking = std::find_if(files.begin(), files.end(), without);
  if (lacking != files.end()) {
    if (!std::all_of(files.begin(), files.end(), without))
      notes.push_back(
          fmt::format("time bounds are not used, since not every file has usable ones: {} has none", lacking->file));
    return {};
  }
  std::vector<std::vector<Seconds>> stamps;
  for (FileTimes& file : files) {
    stamps.push_back(file.times);
    file.times = file.middles;
  }
  return stamps;
}

void note_moved_stamps(const std::vector<FileTimes>& files, const std::vector<std::vector<Seconds>>& stamps,
                       const TimeAxis& axis, std::vector<std::string>& notes) {
  std::size_t all = 0, moved = 0;
  bool differ = false;
  Seconds stamp = 0, middle = 0;
  for (std::size_t f = 0; f < stamps.size(); ++f)
    for (std::size_t s = 0; s < stamps[f].size(); ++s) {
      ++all;
      differ = differ || stamps[f][s] != files[f].times[s];
      if (axis.index_of(stamps[f][s]) == axis.index_of(files[f].times[s])) continue;
      if (moved++ == 0) {
        stamp = stamps[f][s];
        middle = files[f].times[s];
      }
    }
  if (moved > 0)
    notes.push_back(fmt::format(
        "{} of {} times lie in another step than the middle of their time bounds, which is used ({} for {})", moved,
        all, iso_text(axis.calendar(), middle), iso_text(axis.calendar(), stamp)));
  else if (differ)
    notes.push_back("the time of a step is the middle of its time bounds");
}

}  // namespace lagscape
