#include "cli/progress.h"

#include <fmt/format.h>

#include <cmath>
#include <cstdio>

#include "lagscape/base/text.h"
#include "lagscape/report/layout.h"

namespace lagscape {

std::string progress_words(std::size_t done, std::size_t total, double seconds) {
  std::string text = fmt::format("{} of {} cells", grouped(done), grouped(total));
  if (done == 0 || seconds <= 0) return text;
  const double rate = static_cast<double>(done) / seconds;
  text += fmt::format(", {} cells/s", grouped(static_cast<std::size_t>(std::llround(rate))));
  if (done < total) text += fmt::format(", {} left", duration_words(static_cast<double>(total - done) / rate));
  return text;
}

void ProgressLine::update(std::size_t done, std::size_t total, double seconds) {
  constexpr auto kPause = std::chrono::milliseconds(200);
  if (!shown_ || Clock::now() - last_ < kPause) return;
  last_ = Clock::now();
  const std::string text = progress_words(done, total, seconds);
  const std::size_t rest = width_ > text.size() ? width_ - text.size() : 0;
  width_ = text.size();
  fmt::print(stderr, "\r{}{}", text, std::string(rest, ' '));
  std::fflush(stderr);
}

void ProgressLine::clear() {
  if (width_ == 0) return;
  fmt::print(stderr, "\r{}\r", std::string(width_, ' '));
  width_ = 0;
}

}  // namespace lagscape
