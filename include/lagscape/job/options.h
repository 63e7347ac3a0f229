#pragma once
#include <cstddef>
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace lagscape {

/// Bounds of a number; with `open` the bounds themselves are not allowed. An infinite bound is none.
struct NumberBounds {
  double low, high;
  bool open = false;
};

/// One key of the job file: the single place from which validation, `explain`, `plan` and help follow.
struct JobOption {
  std::string_view key;           ///< "prepare.min_share"
  std::string_view type;          ///< "number", "text", "list of texts", "duration or whole number", ...
  std::string_view default_text;  ///< "0.8"; "" when the key is required or absent by default
  std::string_view choices;       ///< "auto | none | calendar | harmonics"; "" when the value is free
  NumberBounds bounds;            ///< used when low < high
  std::string_view unit;          ///< "", "degrees", "steps" ...
  std::string_view help;          ///< one or two sentences
};
[[nodiscard]] std::span<const JobOption> job_options();
/// The option of a key, or nullptr.
[[nodiscard]] const JobOption* find_option(std::string_view key);
/// What values the key takes, for people: "0 to 1", "above 0.5, below 1", "auto | none", or "".
[[nodiscard]] std::string range_text(const JobOption& option);
/// The words a choice key takes, in the order of its enum.
[[nodiscard]] std::vector<std::string> choice_words(std::string_view key);
/// The word of a choice as written in job files: choice_word("prepare.season", SeasonRule::none) is "none".
template <class Enum>
[[nodiscard]] std::string choice_word(std::string_view key, Enum value) {
  return choice_words(key).at(static_cast<std::size_t>(value));
}

/// Keys of the job file that a later version will read: told as such, not as unknown.
[[nodiscard]] std::span<const std::string_view> later_options();
/// Trend tests that a later version will have.
[[nodiscard]] std::span<const std::string_view> later_trend_tests();

}  // namespace lagscape
