#pragma once
#include <chrono>
#include <cstddef>
#include <string>

namespace lagscape {

/// One line on stderr that tells how far a run is; rewritten at most five times a second, silent unless `shown`.
class ProgressLine {
 public:
  explicit ProgressLine(bool shown) : shown_(shown) {}
  ProgressLine(const ProgressLine&) = delete;
  ProgressLine& operator=(const ProgressLine&) = delete;
  ~ProgressLine() { clear(); }
  void update(std::size_t done, std::size_t total, double seconds);
  /// Wipes the line, so that something else can be printed.
  void clear();

 private:
  using Clock = std::chrono::steady_clock;
  bool shown_;
  std::size_t width_ = 0;
  Clock::time_point last_{};
};

/// "12 345 of 64 800 cells, 3 210 cells/s, 16 s left".
[[nodiscard]] std::string progress_words(std::size_t done, std::size_t total, double seconds);

}  // namespace lagscape
