#pragma once
#include <cstddef>
#include <string>
#include <string_view>

namespace lagscape {

/// The text broken at blanks so that no line is longer than `width`; lines after the first begin with `indent` blanks.
/// Words longer than a line stand alone. `used`: columns already taken on the first line.
[[nodiscard]] std::string wrapped(std::string_view text, std::size_t width, std::size_t indent = 0,
                                  std::size_t used = 0);

/// One line of a two-column listing, with its end of line: two blanks, the label, the text wrapped in a column of its
/// own that begins at `column`. Labels that do not fit stand on a line of their own.
[[nodiscard]] std::string listed(std::string_view label, std::string_view text, std::size_t column, std::size_t width);

/// A word of a shell command, in single quotes only where the shell would not take it as it is.
[[nodiscard]] std::string shell_word(const std::string& word);

/// A time span for people: "0.4 s", "16 s", "3 min 20 s", "2 h 5 min".
[[nodiscard]] std::string duration_words(double seconds);

}  // namespace lagscape
