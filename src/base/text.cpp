#include "lagscape/base/text.h"

#include <fmt/format.h>
#include <algorithm>
#include <cctype>
#include <charconv>
#include <cmath>
#include <limits>
#include <numeric>

namespace lagscape {

std::string_view trim(std::string_view text) {
  const auto blank = [](char c) { return std::isspace(static_cast<unsigned char>(c)) != 0 || c == '\0'; };
  while (!text.empty() && blank(text.front())) text.remove_prefix(1);
  while (!text.empty() && blank(text.back())) text.remove_suffix(1);
  return text;
}

std::string lower(std::string_view text) {
  std::string out(text);
  std::transform(out.begin(), out.end(), out.begin(),
                 [](unsigned char c) { return static_cast<char>(std::tolower(c)); });
  return out;
}

std::vector<std::string> split(std::string_view text, char separator) {
  std::vector<std::string> parts;
  std::size_t from = 0;
  for (std::size_t at = text.find(separator); at != std::string_view::npos; at = text.find(separator, from)) {
    parts.emplace_back(text.substr(from, at - from));
    from = at + 1;
  }
  parts.emplace_back(text.substr(from));
  return parts;
}

std::string join(std::span<const std::string> parts, std::string_view separator) {
  std::string out;
  for (const std::string& part : parts) {
    if (!out.empty()) out += separator;
    out += part;
  }
  return out;
}

static std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 1; i <= a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t above = row[j];
      row[j] = std::min({above + 1, row[j - 1] + 1, diagonal + (a[i - 1] == b[j - 1] ? 0U : 1U)});
      diagonal = above;
    }
  }
  return row[b.size()];
}

std::optional<std::string> nearest_name(std::string_view word, std::span<const std::string> candidates) {
  const std::string wanted = lower(word);
  std::optional<std::string> best;
  std::size_t best_distance = std::max<std::size_t>(2, wanted.size() / 3) + 1;
  for (const std::string& candidate : candidates) {
    const std::size_t distance = edit_distance(wanted, lower(candidate));
    if (distance < best_distance) {
      best_distance = distance;
      best = candidate;
    }
  }
  return best;
}

std::string did_you_mean(std::string_view word, std::span<const std::string> candidates) {
  const auto near = nearest_name(word, candidates);
  return near ? fmt::format(", did you mean '{}'?", *near) : std::string();
}

std::optional<double> to_number(std::string_view text) {
  text = trim(text);
  if (!text.empty() && text.front() == '+') text.remove_prefix(1);
  double value = 0;
  const auto [end, problem] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (problem != std::errc() || end != text.data() + text.size() || text.empty()) return std::nullopt;
  return value;
}

std::string number_text(double value) { return fmt::format("{}", value); }

std::string human_number(double value, int digits) {
  if (std::isnan(value)) return "-";
  return fmt::format("{:.{}g}", value, digits);
}

std::string grouped(std::size_t value) {
  std::string digits = fmt::format("{}", value);
  for (std::ptrdiff_t at = std::ssize(digits) - 3; at > 0; at -= 3) digits.insert(static_cast<std::size_t>(at), 1, ' ');
  return digits;
}

std::string human_bytes(double bytes) {
  const char* const names[] = {"bytes", "KiB", "MiB", "GiB", "TiB"};
  std::size_t unit = 0;
  while (bytes >= 1024 && unit < 4) {
    bytes /= 1024;
    ++unit;
  }
  return unit == 0 ? fmt::format("{:.0f} bytes", bytes) : fmt::format("{:.1f} {}", bytes, names[unit]);
}

std::optional<std::size_t> parse_bytes(std::string_view text) {
  text = trim(text);
  std::size_t digits = 0;
  while (digits < text.size() && (std::isdigit(static_cast<unsigned char>(text[digits])) != 0 || text[digits] == '.'))
    ++digits;
  const auto number = to_number(text.substr(0, digits));
  if (!number || *number <= 0) return std::nullopt;
  const std::string unit = lower(trim(text.substr(digits)));
  double factor = 0;
  if (unit.empty() || unit == "b")
    factor = 1;
  else if (unit == "k" || unit == "kib")
    factor = 1024.0;
  else if (unit == "kb")
    factor = 1e3;
  else if (unit == "m" || unit == "mib")
    factor = 1024.0 * 1024;
  else if (unit == "mb")
    factor = 1e6;
  else if (unit == "g" || unit == "gib")
    factor = 1024.0 * 1024 * 1024;
  else if (unit == "gb")
    factor = 1e9;
  else if (unit == "t" || unit == "tib")
    factor = 1024.0 * 1024 * 1024 * 1024;
  else if (unit == "tb")
    factor = 1e12;
  if (factor == 0) return std::nullopt;
  const double bytes = *number * factor;
  if (bytes < 1 || bytes > 9e18) return std::nullopt;
  return static_cast<std::size_t>(bytes);
}

}  // namespace lagscape
