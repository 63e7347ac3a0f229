#pragma once
#include <span>
#include <string>
#include <string_view>

namespace lagscape {

/// One key of the job file: the single place from which validation, `explain`, `plan` and help follow.
struct JobOption {
  std::string_view key;            ///< "prepare.min_share"
  std::string_view type;           ///< "number", "text", "list of text", "duration or whole number", ...
  std::string_view default_text;   ///< "0.8"; "" when the key is required or absent by default
  std::string_view range;          ///< "0 to 1", "auto | none | calendar | harmonics", ...
  std::string_view unit;           ///< "", "degrees", "steps" ...
  std::string_view help;           ///< one or two sentences
};
[[nodiscard]] std::span<const JobOption> job_options();

}  // namespace lagscape
