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
/// Ends with the exact command to give next. sites: the CSV of coordinates that was given; written_job: the job file
/// that was written, both "" if none.
[[nodiscard]] std::string survey_text(const SurveyReport& report, const std::string& sites = {},
                                      const std::string& written_job = {});
[[nodiscard]] std::string survey_json(const SurveyReport& report);
/// A commented job to start from; runs unchanged when saved at `path`. sites: as for survey_text.
[[nodiscard]] std::string starter_job(const SurveyReport& report, const std::string& path,
                                      const std::string& sites = {});

/// `explain`: without a word the index; with a word a map, status, option (job key), test or method. Unknown words
/// throw Error{usage} with the nearest name, which may be one of `others`, words that the caller explains.
[[nodiscard]] std::string explain_text(const std::string& word, const std::vector<std::string>& others = {});
/// The README's table of maps, Markdown, from the catalogue.
[[nodiscard]] std::string catalogue_markdown();

}  // namespace lagscape
