#include "forge/part_files.h"

#include <fmt/format.h>

#include <filesystem>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace fs = std::filesystem;

PartFiles::PartFiles(const std::string& folder, const std::vector<std::string>& names, bool replace)
    : folder_(folder), names_(names) {
  std::vector<std::string> there;
  std::error_code problem;
  for (const std::string& name : names) {
    if (fs::exists(fs::path(folder) / name, problem)) there.push_back(name);
  }
  if (!there.empty() && !replace) {
    const std::string what =
        there.size() == 1 ? "a file of this name exists" : fmt::format("{} files of these names exist", there.size());
    throw Error(ErrorKind::output, what + ": " + join(there, ", "), "folder: " + folder,
                "allow them to be replaced with --replace, or choose another folder with --set output.folder=DIR");
  }
  fs::create_directories(folder, problem);
  if (problem) {
    throw Error(ErrorKind::output, fmt::format("the folder cannot be made: {}", problem.message()), "folder: " + folder,
                "choose another folder with --set output.folder=DIR");
  }
}

PartFiles::~PartFiles() {
  std::error_code ignored;
  for (const std::string& name : names_) {
    if (!committed_) fs::remove(part(name), ignored);
  }
}

std::string PartFiles::part(const std::string& name) const { return (fs::path(folder_) / (name + ".part")).string(); }

std::vector<std::string> PartFiles::commit() {
  std::vector<std::string> paths;
  for (const std::string& name : names_) {
    paths.push_back((fs::path(folder_) / name).string());
    std::error_code problem;
    fs::rename(part(name), paths.back(), problem);
    if (problem) {
      throw Error(ErrorKind::output, fmt::format("the finished file cannot be given its name: {}", problem.message()),
                  "file: " + paths.back(), "check that the folder may be written to");
    }
  }
  committed_ = true;
  return paths;
}

}  // namespace lagscape
