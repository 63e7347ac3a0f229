#pragma once
#include "lagscape/io/survey.h"
#include "lagscape/pipeline/run.h"

namespace lagscape::test {

/// Hand-made results of the invented Harrow Basin, to see how they are told. The figures are invented.
[[nodiscard]] Panel harrow_panel();
[[nodiscard]] JobPlan harrow_plan();
[[nodiscard]] RunReport harrow_report();
[[nodiscard]] SurveyReport harrow_survey();

}  // namespace lagscape::test
