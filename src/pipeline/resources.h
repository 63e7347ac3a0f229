#pragma once
#include <cstddef>

namespace lagscape {

/// Memory a new job may take: what the system has free, or what the process' control group still allows if that is
/// less.
[[nodiscard]] std::size_t free_memory_bytes();
/// Largest resident size of this process so far.
[[nodiscard]] std::size_t peak_resident_bytes();
/// CPU time of this process, all threads.
[[nodiscard]] double cpu_seconds();

}  // namespace lagscape
