#pragma once
#include <string>
#include <vector>

#include "lagscape/measures/measure.h"
#include "lagscape/pipeline/run.h"

namespace lagscape {

/// The result's maps with units and texts, and its global attributes, from the catalogue and the plan. command: for
/// `history`.
[[nodiscard]] MapSet describe_result(const JobPlan& plan, const std::vector<const Measure*>& measures,
                                     const std::string& command);

/// Global attributes that are known only when the run is over.
[[nodiscard]] Attributes closing_attributes(const RunReport& report);

}  // namespace lagscape
