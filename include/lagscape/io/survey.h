#pragma once
#include <string>
#include <vector>

#include "lagscape/base/log.h"
#include "lagscape/io/archive.h"

namespace lagscape {

/// One variable that could be analysed (or why not), as `lagscape survey` reports it.
struct SurveyedVariable {
  std::string name, long_name, units;
  bool usable = false;
  std::string why_not;  ///< when not usable: the reason, in words
  std::string to_do;    ///< what to put in the job ("select = { level = 850 }"), may be empty
  std::vector<std::pair<std::string, double>> select;  ///< a choice that works, for --write-job
  Panel panel;                                         ///< valid when usable
  double missing_share = -1;  ///< share of missing values in a sample of steps, -1 if not looked at
  std::size_t sampled_steps = 0;
};

struct SurveyReport {
  std::vector<std::string> files;
  std::vector<std::string> kinds;  ///< per file: "netCDF-4 (classic model)", "CDF-2", "CSV panel", ...
  std::vector<SurveyedVariable> variables;
  std::vector<std::string> quirks;  ///< what a user should know: odd units, gaps, duplicate times, unusual fills ...
  std::string mend_time;            ///< a `time = {...}` line to add when the time axis cannot be read as it is
};

/// Looks at the files together (they should belong to one archive). sites: coordinates for CSV panels, may be empty.
[[nodiscard]] SurveyReport survey_files(const std::vector<std::string>& files, const std::string& sites,
                                        const Log& log);

}  // namespace lagscape
