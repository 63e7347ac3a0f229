#include "lagscape/report/layout.h"

#include <fmt/format.h>

#include <cmath>

#include "lagscape/base/text.h"

namespace lagscape {

std::string wrapped(std::string_view text, std::size_t width, std::size_t indent, std::size_t used) {
  std::string out;
  std::size_t column = used;
  bool first_on_line = true;
  for (const std::string& word : split(text, ' ')) {
    if (word.empty()) continue;
    if (!first_on_line && column + 1 + word.size() > width) {
      out += "\n" + std::string(indent, ' ');
      column = indent;
      first_on_line = true;
    }
    if (!first_on_line) {
      out += ' ';
      ++column;
    }
    out += word;
    column += word.size();
    first_on_line = false;
  }
  return out;
}

std::string listed(std::string_view label, std::string_view text, std::size_t column, std::size_t width) {
  std::string head = fmt::format("  {}", label);
  if (head.size() + 1 >= column && !text.empty())
    head += "\n" + std::string(column, ' ');
  else if (!text.empty())
    head.resize(column, ' ');
  return head + wrapped(text, width, column, column) + "\n";
}

std::string shell_word(const std::string& word) {
  constexpr std::string_view kPlain = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789_-./,:=+@%";
  if (!word.empty() && word.find_first_not_of(kPlain) == std::string::npos) return word;
  std::string out = "'";
  for (const char c : word) {
    if (c == '\'')
      out += "'\\''";
    else
      out += c;
  }
  return out + "'";
}

std::string duration_words(double seconds) {
  if (seconds < 9.95) return fmt::format("{:.1f} s", seconds);
  const auto whole = std::llround(seconds);
  if (whole < 60) return fmt::format("{} s", whole);
  if (whole < 3600) return fmt::format("{} min {} s", whole / 60, whole % 60);
  return fmt::format("{} h {} min", whole / 3600, whole % 3600 / 60);
}

}  // namespace lagscape
