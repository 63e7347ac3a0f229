#pragma once
#include <string>
#include <vector>

#include "lagscape/io/survey.h"
#include "lagscape/pipeline/run.h"

namespace lagscape {

/// Texts for people (72-90 columns, plain) and the same as JSON. No numerics here.
[[nodiscard]] std::string summary_text(const RunReport& report);
[[nodiscard]] std::string summary_json(const std::vector<RunReport>& reports);
[[nodiscard]] std::string plan_text(const JobPlan& plan);
[[nodiscard]] std::string plan_json(const std::vector<JobPlan>& plans);
[[nodiscard]] std::string survey_text(const SurveyReport& report);
[[nodiscard]] std::string survey_json(const SurveyReport& report);
/// A commented job to start from; runs unchanged when saved at `path`.
[[nodiscard]] std::string starter_job(const SurveyReport& report, const std::string& path);

/// `explain`: without a word the index; with a word a map, status, option (job key), test or method. Unknown words throw
/// Error{usage} with the nearest names.
[[nodiscard]] std::string explain_text(const std::string& word);
/// The README's table of maps, Markdown, from the catalogue.
[[nodiscard]] std::string catalogue_markdown();

}  // namespace lagscape
