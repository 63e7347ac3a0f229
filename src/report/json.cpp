#include "report/json.h"

#include <fmt/format.h>

#include <cmath>

#include "lagscape/base/text.h"

namespace lagscape::json {
namespace {

unsigned byte_at(std::string_view value, std::size_t at) { return static_cast<unsigned char>(value[at]); }

/// Length of the well-formed UTF-8 sequence of two bytes or more that begins here (Unicode 15, table 3-7), or 0.
std::size_t utf8_length(std::string_view value, std::size_t at) {
  const unsigned lead = byte_at(value, at);
  const std::size_t length = lead >= 0xF0 && lead <= 0xF4 ? 4 : lead >= 0xE0 ? 3 : lead >= 0xC2 ? 2 : 0;
  if (lead > 0xF4 || length == 0 || at + length > value.size()) return 0;
  for (std::size_t i = 1; i < length; ++i) {
    if ((byte_at(value, at + i) & 0xC0U) != 0x80U) return 0;
  }
  const unsigned second = byte_at(value, at + 1);
  const bool overlong = (lead == 0xE0 && second < 0xA0) || (lead == 0xF0 && second < 0x90);
  const bool surrogate = lead == 0xED && second >= 0xA0;
  const bool beyond = lead == 0xF4 && second >= 0x90;
  return overlong || surrogate || beyond ? 0 : length;
}

/// Values one to a line between two brackets.
std::string bracketed(char open, std::span<const std::string> values, char close) {
  if (values.empty()) return fmt::format("{}{}", open, close);
  std::string inner = "\n" + join(values, ",\n");
  std::string out(1, open);
  for (const char c : inner) {
    out += c;
    if (c == '\n') out += "  ";
  }
  return out + "\n" + close;
}

}  // namespace

std::string text(std::string_view value) {
  std::string out = "\"";
  for (std::size_t at = 0; at < value.size();) {
    const unsigned code = byte_at(value, at);
    const std::size_t length = code < 0x80 ? 1 : utf8_length(value, at);
    if (length > 1)
      out += value.substr(at, length);
    else if (code == '"' || code == '\\')
      out += fmt::format("\\{}", value[at]);
    else if (code == '\n')
      out += "\\n";
    else if (code < 0x20 || code >= 0x7F)
      out += fmt::format("\\u{:04x}", code);
    else
      out += value[at];
    at += length > 1 ? length : 1;
  }
  return out + '"';
}

std::string number(double value) { return std::isfinite(value) ? number_text(value) : "null"; }
std::string number(std::size_t value) { return fmt::format("{}", value); }
std::string boolean(bool value) { return value ? "true" : "false"; }

std::string list(std::span<const std::string> values) { return bracketed('[', values, ']'); }

std::string texts(std::span<const std::string> values) {
  std::vector<std::string> quoted;
  for (const std::string& value : values) quoted.push_back(text(value));
  return list(quoted);
}

std::string object(const std::vector<std::pair<std::string_view, std::string>>& members) {
  std::vector<std::string> lines;
  for (const auto& [key, value] : members) lines.push_back(fmt::format("{}: {}", text(key), value));
  return bracketed('{', lines, '}');
}

}  // namespace lagscape::json
