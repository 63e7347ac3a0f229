#pragma once
#include <string>
#include <vector>

#include "io/time_decode.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {

/// Reads the bounds that the time coordinate names into `times.middles`: the middle of the period that each stored step
/// covers (CF 1.10, section 7.1). `text` is what the stamps were decoded by. Bounds that are in other units, have
/// another shape, are reversed, leave out their time or grow from one start are not used, which `notes` receives.
void read_middles(const NcFile& file, const NcVariable& time, const TimeText& text, FileTimes& times,
                  std::vector<std::string>& notes);

/// Puts the middles in the place of the stamps, if every file has them: a stamp at the end of a month belongs to that
/// month. Returns the stamps as they were; empty if they stay.
[[nodiscard]] std::vector<std::vector<Seconds>> use_middles(std::vector<FileTimes>& files,
                                                            std::vector<std::string>& notes);

/// Tells if stamps belong to another step than the middles that took their place, or differ from them at all.
void note_moved_stamps(const std::vector<FileTimes>& files, const std::vector<std::vector<Seconds>>& stamps,
                       const TimeAxis& axis, std::vector<std::string>& notes);

}  // namespace lagscape
