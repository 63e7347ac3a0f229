#pragma once
#include <filesystem>
#include <string>
#include <vector>

namespace lagscape {

/// The folder of a result, made if it is missing; folders made here are taken away again unless kept.
class ResultFolder {
 public:
  explicit ResultFolder(const std::filesystem::path& path);
  ResultFolder(const ResultFolder&) = delete;
  ResultFolder& operator=(const ResultFolder&) = delete;
  ~ResultFolder();

  [[nodiscard]] const std::filesystem::path& path() const { return path_; }
  void keep() { made_.clear(); }
  /// Makes names given in it so far survive a power cut.
  void sync() const;

 private:
  std::filesystem::path path_;
  std::vector<std::filesystem::path> made_;  ///< outermost first
};

/// A file under a hidden name beside its final one (".NAME.PROCESS.part"), removed unless published.
class PartFile {
 public:
  explicit PartFile(std::filesystem::path final_path);
  PartFile(const PartFile&) = delete;
  PartFile& operator=(const PartFile&) = delete;
  ~PartFile();

  [[nodiscard]] std::string path() const { return part_.string(); }
  [[nodiscard]] std::string final_path() const { return final_.string(); }
  /// Waits until the disk has the file's content.
  void sync() const;
  /// Gives the file its final name, in place of what has it now.
  void publish();

 private:
  std::filesystem::path final_, part_;
};

/// Throws Error{output} if one of these names is taken (by a folder in any case, by a file unless `replace`).
void refuse_taken_names(const std::vector<std::string>& paths, bool replace);

}  // namespace lagscape
