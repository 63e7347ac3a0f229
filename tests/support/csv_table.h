#pragma once
#include <cstddef>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace lagscape::test {

/// A small CSV file with one header line, as those of tests/reference: no quoting, blanks around cells are dropped.
/// Throws std::runtime_error naming file and line for a missing file, a ragged row, an unknown column or a bad number.
class CsvTable {
 public:
  explicit CsvTable(const std::string& path);

  [[nodiscard]] std::size_t rows() const { return cells_.size(); }
  [[nodiscard]] const std::vector<std::string>& columns() const { return columns_; }
  [[nodiscard]] bool has(std::string_view column) const;

  [[nodiscard]] const std::string& text(std::size_t row, std::string_view column) const;
  /// The cell as a number; NaN for "", "NA" and "NaN".
  [[nodiscard]] double number(std::size_t row, std::string_view column) const;
  [[nodiscard]] std::vector<double> numbers(std::string_view column) const;

  /// Rows in which every named column has the given text.
  [[nodiscard]] std::vector<std::size_t> where(
      const std::vector<std::pair<std::string_view, std::string_view>>& conditions) const;

 private:
  [[nodiscard]] std::size_t index(std::string_view column) const;
  std::string path_;
  std::vector<std::string> columns_;
  std::vector<std::vector<std::string>> cells_;
};

/// tests/reference/NAME.
[[nodiscard]] CsvTable reference_table(const std::string& name);

}  // namespace lagscape::test
