#include "pipeline/resources.h"

#include "lagscape/pipeline/run.h"

#include <omp.h>
#include <sys/resource.h>

#include <algorithm>
#include <fstream>
#include <optional>
#include <string>

namespace lagscape {
namespace {

std::optional<std::size_t> number_in(const std::string& path) {
  std::ifstream file(path);
  std::size_t value = 0;
  if (file >> value) return value;
  return std::nullopt;  // no such file, or "max"
}

std::optional<std::size_t> group_allowance() {
  for (const auto& [limit, used] :
       {std::pair{"/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory.current"},
        std::pair{"/sys/fs/cgroup/memory/memory.limit_in_bytes", "/sys/fs/cgroup/memory/memory.usage_in_bytes"}}) {
    const auto most = number_in(limit), now = number_in(used);
    if (most && now) return *most > *now ? *most - *now : 0;
  }
  return std::nullopt;
}

}  // namespace

std::size_t free_memory_bytes() {
  constexpr std::size_t kGuess = std::size_t{2} << 30;  // where the system does not tell
  std::size_t bytes = kGuess;
  std::ifstream file("/proc/meminfo");
  for (std::string word; file >> word;) {
    std::size_t kib = 0;
    if (word == "MemAvailable:" && file >> kib) bytes = kib * 1024;
  }
  return std::min(bytes, group_allowance().value_or(bytes));
}

std::size_t peak_resident_bytes() {
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
  return static_cast<std::size_t>(usage.ru_maxrss) * 1024;
}

double cpu_seconds() {
  rusage usage{};
  getrusage(RUSAGE_SELF, &usage);
  const auto seconds = [](const timeval& time) {
    return static_cast<double>(time.tv_sec) + 1e-6 * static_cast<double>(time.tv_usec);
  };
  return seconds(usage.ru_utime) + seconds(usage.ru_stime);
}

int usable_cores() { return omp_get_num_procs(); }

}  // namespace lagscape
