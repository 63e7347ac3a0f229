#include "lagscape/io/part_file.h"

#include <fcntl.h>
#include <fmt/format.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <utility>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

void sync_path(const std::string& path, int flags) {
  const int file = open(path.c_str(), flags | O_CLOEXEC);
  const bool done = file >= 0 && (fsync(file) == 0 || errno == EINVAL);  // some file systems cannot sync a folder
  const int error = errno;
  if (file >= 0) close(file);
  if (!done)
    throw Error(ErrorKind::output, fmt::format("the disk did not take the file: {}", std::strerror(error)),
                "file: " + path, "check the disk's state and room, then run the command again");
}

}  // namespace

PartFiles::PartFiles(const std::filesystem::path& folder, std::vector<std::string> names, bool replace,
                     std::string remedy)
    : folder_(folder), names_(std::move(names)), replace_(replace), remedy_(std::move(remedy)) {
  refuse_taken_names();
  make_folder();
  discard();  // of a killed process that had our number
}

PartFiles::~PartFiles() {
  if (committed_) return;
  discard();
  std::error_code ignored;
  for (; !made_.empty(); made_.pop_back()) std::filesystem::remove(made_.back(), ignored);  // only if empty
}

void PartFiles::discard() const {
  std::error_code ignored;
  for (const std::string& name : names_) std::filesystem::remove(part(name), ignored);
}

std::string PartFiles::part(const std::string& name) const {
  return path_of(fmt::format(".{}.{}.part", name, getpid()));
}

void PartFiles::make_folder() {
  std::error_code error;
  for (std::filesystem::path one = folder_; !one.empty() && !std::filesystem::exists(one, error);
       one = one.parent_path())
    made_.insert(made_.begin(), one);
  std::filesystem::create_directories(folder(), error);
  if (!error && std::filesystem::is_directory(folder())) return;
  throw Error(ErrorKind::output,
              fmt::format("the folder cannot be made: {}", error ? error.message() : "the name is a file's"),
              "folder: " + folder_.string(), remedy_ + ", where you may write");
}

void PartFiles::refuse_taken_names() const {
  std::vector<std::string> taken;
  for (const std::string& name : names_) {
    std::error_code ignored;
    if (!std::filesystem::exists(std::filesystem::symlink_status(path_of(name), ignored))) continue;
    if (std::filesystem::is_directory(path_of(name), ignored))
      throw Error(ErrorKind::output, "the file's name is that of a folder", "file: " + path_of(name), remedy_);
    taken.push_back(name);
  }
  if (taken.empty() || replace_) return;
  const bool one = taken.size() == 1;
  throw Error(ErrorKind::output, one ? "the file exists already" : "these files exist already: " + join(taken, ", "),
              one ? "file: " + path_of(taken.front()) : "folder: " + folder().string(),
              fmt::format("{}, or allow {} to be replaced with --replace", remedy_, one ? "it" : "them"));
}

std::vector<std::string> PartFiles::commit() {
  for (const std::string& name : names_) sync_path(part(name), O_RDONLY);
  refuse_taken_names();
  publish();
  committed_ = true;
  sync_path(folder().string(), O_RDONLY | O_DIRECTORY);  // makes the names survive a power cut
  std::vector<std::string> paths;
  for (const std::string& name : names_) paths.push_back(path_of(name));
  return paths;
}

void PartFiles::publish() const {
  for (auto name = names_.rbegin(); name != names_.rend(); ++name) {
    std::error_code error, ignored;
    std::filesystem::rename(part(*name), path_of(*name), error);
    if (!error) continue;
    for (auto done = names_.rbegin(); done != name && !replace_; ++done)
      std::filesystem::remove(path_of(*done), ignored);
    throw Error(ErrorKind::output, fmt::format("the finished file cannot be given its name: {}", error.message()),
                "file: " + path_of(*name), "check who may write to the folder, then run the command again");
  }
}

void close_text(std::ofstream& file, const std::string& path) {
  file.close();
  if (!file)
    throw Error(ErrorKind::output, fmt::format("the file could not be written: {}", std::strerror(errno)),
                "file: " + path, "check that the disk has room and can be written to");
}

}  // namespace lagscape
