#include "io/csv_reader.h"

#include <fmt/format.h>
#include <algorithm>
#include <array>
#include <fstream>
#include <iterator>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

std::string read_file(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  if (!file)
    throw Error(ErrorKind::input, "the file cannot be opened", "file: " + path,
                "check its name and that you may read it");
  std::string content{std::istreambuf_iterator<char>(file), {}};
  if (content.find('\0') != std::string::npos)
    throw Error(ErrorKind::input, "this is not a text file in UTF-8: it holds zero bytes", "file: " + path,
                "save the table as CSV in UTF-8");
  return content;
}

// The separator that occurs most often outside quotes; a tab or semicolon wins a tie against the comma.
char find_separator(std::string_view header) {
  constexpr std::array kSeparators{'\t', ';', ','};
  std::array<int, 3> counts{};
  bool quoted = false;
  for (const char c : header) {
    if (c == '"') quoted = !quoted;
    for (std::size_t i = 0; i < kSeparators.size() && !quoted; ++i) counts[i] += c == kSeparators[i] ? 1 : 0;
  }
  const auto best = std::max_element(counts.begin(), counts.end());
  return *best == 0 ? ',' : kSeparators[static_cast<std::size_t>(best - counts.begin())];
}

}  // namespace

CsvReader::CsvReader(const std::string& path) : path_(path), content_(read_file(path)), rest_(content_) {
  constexpr std::string_view kByteOrderMark = "\xEF\xBB\xBF";
  if (rest_.substr(0, kByteOrderMark.size()) == kByteOrderMark) rest_.remove_prefix(kByteOrderMark.size());
  std::string_view text;
  if (!next_line(text))
    throw Error(ErrorKind::input, "the file holds no table: it has no header line", "file: " + path,
                "name a CSV file with a header");
  separator_ = find_separator(text);
  split_line(text);
  while (!cells_.empty() && trim(cells_.back()).empty()) cells_.pop_back();
  for (const std::string_view cell : cells_) header_.emplace_back(trim(cell));
}

// The next line that is neither blank nor a comment.
bool CsvReader::next_line(std::string_view& text) {
  while (!rest_.empty()) {
    const std::size_t end = std::min(rest_.find_first_of("\r\n"), rest_.size());
    text = rest_.substr(0, end);
    const bool pair = rest_.substr(end, 2) == "\r\n";
    rest_.remove_prefix(std::min(rest_.size(), end + (pair ? 2 : 1)));
    ++line_;
    const std::string_view plain = trim(text);
    if (plain.empty()) continue;
    if (plain.front() != '#') return true;
    comments_.emplace_back(trim(plain.substr(1)));
  }
  return false;
}

std::string_view CsvReader::take_quoted(std::string_view& rest) {
  rest.remove_prefix(1);
  std::string text;
  for (;;) {
    const std::size_t quote = rest.find('"');
    if (quote == std::string_view::npos)
      throw Error(ErrorKind::input, "a quote is opened but not closed on its line",
                  fmt::format("file: {}:{}", path_, line_), "close the quote; a cell must not span lines");
    text += rest.substr(0, quote);
    rest.remove_prefix(quote + 1);
    if (rest.empty() || rest.front() != '"') break;
    text += '"';
    rest.remove_prefix(1);
  }
  rest.remove_prefix(std::min(rest.find(separator_), rest.size()));
  unquoted_.push_back(std::move(text));
  return unquoted_.back();
}

void CsvReader::split_line(std::string_view text) {
  cells_.clear();
  unquoted_.clear();
  // The views into it must survive later cells.
  unquoted_.reserve(static_cast<std::size_t>(std::count(text.begin(), text.end(), '"')));
  for (std::string_view rest = text;;) {
    std::size_t blanks = 0;
    while (blanks < rest.size() && rest[blanks] == ' ') ++blanks;
    if (blanks < rest.size() && rest[blanks] == '"') {
      rest.remove_prefix(blanks);
      cells_.push_back(take_quoted(rest));
    } else {
      const std::size_t end = std::min(rest.find(separator_), rest.size());
      cells_.push_back(rest.substr(0, end));
      rest.remove_prefix(end);
    }
    if (rest.empty()) return;
    rest.remove_prefix(1);
  }
}

bool CsvReader::next() {
  std::string_view text;
  if (!next_line(text)) return false;
  split_line(text);
  while (cells_.size() > header_.size() && trim(cells_.back()).empty()) cells_.pop_back();
  if (cells_.size() == header_.size()) return true;
  const bool decimal_comma = cells_.size() > header_.size() && separator_ == ',';
  throw Error(ErrorKind::input,
              fmt::format("the row has {} cells, the header has {}{}", cells_.size(), header_.size(),
                          decimal_comma ? "; decimal commas are not read" : ""),
              fmt::format("file: {}:{}", path_, line_),
              decimal_comma ? "write decimal points, or quote cells that hold a comma"
                            : "give every row one cell for each column; a missing value may be an empty cell");
}

std::string CsvReader::where(std::size_t column) const {
  return fmt::format("file: {}:{}, column: {}", path_, line_,
                     column < header_.size() ? header_[column] : std::to_string(column + 1));
}

}  // namespace lagscape
