#pragma once
#include <string>
#include <vector>

namespace lagscape {

/// Files that appear together: each is written under its name + ".part" and gets its own name when all are complete.
/// What was not committed is removed again.
class PartFiles {
 public:
  /// Makes the folder. Refuses existing names unless `replace`. Throws Error{output}.
  PartFiles(const std::string& folder, const std::vector<std::string>& names, bool replace);
  ~PartFiles();
  PartFiles(const PartFiles&) = delete;
  PartFiles& operator=(const PartFiles&) = delete;
  /// Where to write the file of this name.
  [[nodiscard]] std::string part(const std::string& name) const;
  /// Gives every file its own name; returns their paths, in the order of the names.
  std::vector<std::string> commit();

 private:
  std::string folder_;
  std::vector<std::string> names_;
  bool committed_ = false;
};

}  // namespace lagscape
