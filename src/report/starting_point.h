#pragma once
#include "lagscape/io/survey.h"

namespace lagscape {

/// The variable a first job should analyse: the first usable one, or, when only the time axis has to be mended, the
/// first for which there is something to do; nullptr if there is none.
[[nodiscard]] const SurveyedVariable* starting_variable(const SurveyReport& report);

}  // namespace lagscape
