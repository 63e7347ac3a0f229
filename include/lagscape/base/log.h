#pragma once
#include <functional>
#include <string>

namespace lagscape {

/// Where notes and warnings go; passed in, never global. Called on the main thread only.
struct Log {
  enum class Level { note, warning };
  std::function<void(Level, const std::string&)> sink;
  void note(const std::string& text) const {
    if (sink) sink(Level::note, text);
  }
  void warn(const std::string& text) const {
    if (sink) sink(Level::warning, text);
  }
};

}  // namespace lagscape
