#include "lagscape/io/part_file.h"

#include <fcntl.h>
#include <fmt/format.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <utility>

#include "lagscape/base/error.h"

namespace lagscape {
namespace {

void sync_path(const std::string& path, int flags) {
  const int file = open(path.c_str(), flags | O_CLOEXEC);
  const bool done = file >= 0 && (fsync(file) == 0 || errno == EINVAL);  // some file systems cannot sync a folder
  const int error = errno;
  if (file >= 0) close(file);
  if (!done)
    throw Error(ErrorKind::output, fmt::format("the disk did not take the result: {}", std::strerror(error)),
                "file: " + path, "check the disk's state and room, then run the job again");
}

}  // namespace

ResultFolder::ResultFolder(const std::filesystem::path& path) : path_(path.empty() ? "." : path) {
  std::error_code error;
  for (std::filesystem::path one = path_; !one.empty() && !std::filesystem::exists(one, error); one = one.parent_path())
    made_.insert(made_.begin(), one);
  std::filesystem::create_directories(path_, error);
  if (!error && std::filesystem::is_directory(path_)) return;
  throw Error(ErrorKind::output,
              fmt::format("the result's folder cannot be made: {}", error ? error.message() : "the name is a file's"),
              "folder: " + path_.string(), "name a folder in output.file that you may write to");
}

ResultFolder::~ResultFolder() {
  std::error_code ignored;
  for (; !made_.empty(); made_.pop_back()) std::filesystem::remove(made_.back(), ignored);  // only if empty
}

void ResultFolder::sync() const { sync_path(path_.string(), O_RDONLY | O_DIRECTORY); }

PartFile::PartFile(std::filesystem::path final_path)
    : final_(std::move(final_path)),
      part_(final_.parent_path() / fmt::format(".{}.{}.part", final_.filename().string(), getpid())) {
  std::error_code ignored;
  std::filesystem::remove(part_, ignored);  // of a killed process that had our number
}

PartFile::~PartFile() {
  std::error_code ignored;
  if (!part_.empty()) std::filesystem::remove(part_, ignored);
}

void PartFile::sync() const { sync_path(part_.string(), O_RDONLY); }

void PartFile::publish() {
  std::error_code error;
  std::filesystem::rename(part_, final_, error);
  if (error)
    throw Error(ErrorKind::output, fmt::format("the finished result cannot be given its name: {}", error.message()),
                "file: " + final_.string(), "check who may write to the folder, then run the job again");
  part_.clear();
}

void refuse_taken_names(const std::vector<std::string>& paths, bool replace) {
  for (const std::string& path : paths) {
    std::error_code ignored;
    const auto status = std::filesystem::symlink_status(path, ignored);
    if (!std::filesystem::exists(status)) continue;
    if (std::filesystem::is_directory(path, ignored))
      throw Error(ErrorKind::output, "the result's name is that of a folder", "file: " + path,
                  "name a file in output.file");
    if (!replace)
      throw Error(ErrorKind::output, "the result exists already", "file: " + path,
                  "name another file in output.file, or allow it to be replaced with --replace");
  }
}

}  // namespace lagscape
