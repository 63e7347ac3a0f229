#pragma once
#include <string>
#include <utility>
#include <vector>

#include "lagscape/job/job_spec.h"

namespace lagscape {

/// Reads a TOML job and applies --set overrides (each "key.path=value", paths in them relative to the shell).
/// Throws one Error{job} that lists every problem as "file:line:column: text" (or "--set key: text"), unknown keys with
/// the nearest name. Relative paths of the file are resolved against the file's folder.
[[nodiscard]] JobSpec read_job(const std::string& path, const std::vector<std::string>& overrides);
/// The same from text (tests, editors); `folder` resolves relative paths.
[[nodiscard]] JobSpec parse_job(const std::string& text, const std::string& name, const std::string& folder,
                                const std::vector<std::string>& overrides);

/// Every key with its effective value as TOML, one canonical spelling: equal work gives equal text. Stored in results,
/// so it holds no path of a user or machine: input files, mask and sites are given by their base names, and
/// output.file, which changes nothing in a result, is left out.
[[nodiscard]] std::string job_text(const JobSpec& job);

}  // namespace lagscape
