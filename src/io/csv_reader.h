#pragma once
#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace lagscape {

/// Reads one CSV file row by row: comma, semicolon or tab (the commonest in the header), fields quoted as in RFC 4180
/// but on one line, a UTF-8 byte order mark, any line ends, blank lines and comment lines ('#') passed over. Throws
/// Error{input} naming file and line. Views it hands out are valid until the next call of next().
class CsvReader {
 public:
  /// Reads the file and its header, the first line that is neither blank nor a comment.
  explicit CsvReader(const std::string& path);

  [[nodiscard]] const std::string& path() const { return path_; }
  [[nodiscard]] std::size_t bytes() const { return content_.size(); }
  [[nodiscard]] char separator() const { return separator_; }
  /// Trimmed column names; empty names at the end (a trailing separator) are left out.
  [[nodiscard]] const std::vector<std::string>& header() const { return header_; }
  /// Text of the comment lines read so far, without the '#', trimmed.
  [[nodiscard]] const std::vector<std::string>& comments() const { return comments_; }

  /// Goes on to the next row, of exactly as many cells as the header has; false at the end of the file.
  bool next();
  [[nodiscard]] const std::vector<std::string_view>& cells() const { return cells_; }
  [[nodiscard]] std::size_t line() const { return line_; }
  /// "file: gauges.csv:12, column: Alder Weir".
  [[nodiscard]] std::string where(std::size_t column) const;

 private:
  bool next_line(std::string_view& text);
  void split_line(std::string_view text);
  std::string_view take_quoted(std::string_view& rest);

  std::string path_;
  std::string content_;
  std::string_view rest_;
  char separator_ = ',';
  std::vector<std::string> header_, comments_;
  std::vector<std::string_view> cells_;
  std::vector<std::string> unquoted_;  ///< cells with doubled quotes, rewritten
  std::size_t line_ = 0;
};

}  // namespace lagscape
