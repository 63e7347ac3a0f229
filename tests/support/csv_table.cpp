#include "support/csv_table.h"

#include <algorithm>
#include <charconv>
#include <fstream>
#include <limits>
#include <stdexcept>

namespace lagscape::test {
namespace {

std::string trimmed(std::string_view text) {
  const auto first = text.find_first_not_of(" \t\r");
  if (first == std::string_view::npos) return {};
  return std::string(text.substr(first, text.find_last_not_of(" \t\r") - first + 1));
}

std::vector<std::string> cells_of(std::string_view line) {
  std::vector<std::string> cells;
  for (;;) {
    const auto comma = line.find(',');
    cells.push_back(trimmed(line.substr(0, comma)));
    if (comma == std::string_view::npos) return cells;
    line.remove_prefix(comma + 1);
  }
}

}  // namespace

CsvTable::CsvTable(const std::string& path) : path_(path) {
  std::ifstream file(path);
  std::string line;
  if (!std::getline(file, line)) throw std::runtime_error(path + ": cannot be read, or is empty");
  columns_ = cells_of(line);
  for (std::size_t number = 2; std::getline(file, line); ++number) {
    cells_.push_back(cells_of(line));
    if (cells_.back().size() != columns_.size()) {
      throw std::runtime_error(path + ", line " + std::to_string(number) + ": not as many cells as the header");
    }
  }
}

bool CsvTable::has(std::string_view column) const {
  return std::find(columns_.begin(), columns_.end(), column) != columns_.end();
}

std::size_t CsvTable::index(std::string_view column) const {
  const auto found = std::find(columns_.begin(), columns_.end(), column);
  if (found == columns_.end()) throw std::runtime_error(path_ + ": no column '" + std::string(column) + "'");
  return static_cast<std::size_t>(found - columns_.begin());
}

const std::string& CsvTable::text(std::size_t row, std::string_view column) const {
  return cells_.at(row)[index(column)];
}

double CsvTable::number(std::size_t row, std::string_view column) const {
  const std::string& cell = text(row, column);
  if (cell.empty() || cell == "NA" || cell == "NaN") return std::numeric_limits<double>::quiet_NaN();
  double value = 0;
  const auto [end, error] = std::from_chars(cell.data(), cell.data() + cell.size(), value);
  if (error != std::errc{} || end != cell.data() + cell.size()) {
    throw std::runtime_error(path_ + ", line " + std::to_string(row + 2) + ": '" + cell + "' is not a number");
  }
  return value;
}

std::vector<double> CsvTable::numbers(std::string_view column) const {
  std::vector<double> values(rows());
  for (std::size_t row = 0; row < rows(); ++row) values[row] = number(row, column);
  return values;
}

std::vector<std::size_t> CsvTable::where(
    const std::vector<std::pair<std::string_view, std::string_view>>& conditions) const {
  std::vector<std::size_t> found;
  for (std::size_t row = 0; row < rows(); ++row) {
    if (std::all_of(conditions.begin(), conditions.end(),
                    [&](const auto& condition) { return text(row, condition.first) == condition.second; })) {
      found.push_back(row);
    }
  }
  return found;
}

CsvTable reference_table(const std::string& name) { return CsvTable(LAGSCAPE_TEST_DATA "/" + name); }

}  // namespace lagscape::test
