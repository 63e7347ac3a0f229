#pragma once
#include <filesystem>
#include <fstream>
#include <string>
#include <vector>

namespace lagscape {

/// Files of one folder that get their names when all of them are complete. Until then each is written under a hidden
/// name beside its own (".NAME.PROCESS.part"); what is not committed is removed, with the folders made for it.
class PartFiles {
 public:
  /// Makes the folder if it is missing. `remedy` tells how the user chooses another place: "name another file in
  /// output.file". Throws Error{output} where a name is taken or the folder cannot be made.
  PartFiles(const std::filesystem::path& folder, std::vector<std::string> names, bool replace, std::string remedy);
  PartFiles(const PartFiles&) = delete;
  PartFiles& operator=(const PartFiles&) = delete;
  ~PartFiles();

  [[nodiscard]] std::filesystem::path folder() const { return folder_.empty() ? "." : folder_; }
  /// Where to write the file of this name.
  [[nodiscard]] std::string part(const std::string& name) const;
  /// Throws Error{output} if a name is taken: by a folder in any case, by a file unless it may be replaced.
  void refuse_taken_names() const;
  /// Waits until the disk has every file, then names them, the first one last: where it is, the others are. Returns
  /// their paths. What cannot be finished is taken back. Throws Error{output}.
  std::vector<std::string> commit();
  /// Removes what was written; it may then be written again.
  void discard() const;

 private:
  [[nodiscard]] std::string path_of(const std::string& name) const { return (folder_ / name).string(); }
  void make_folder();
  void publish() const;

  std::filesystem::path folder_;
  std::vector<std::string> names_;
  bool replace_, committed_ = false;
  std::string remedy_;
  std::vector<std::filesystem::path> made_;  ///< folders made here, outermost first
};

/// Closes a text file that was being written. Throws Error{output} if not all of it could be.
void close_text(std::ofstream& file, const std::string& path);

}  // namespace lagscape
