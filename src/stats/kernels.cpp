#include "lagscape/stats/kernels.h"

namespace lagscape {

extern const KernelTable kernels_baseline;
#if defined(__x86_64__)
extern const KernelTable kernels_avx2, kernels_avx512;
#endif

const KernelTable* kernels_for(Isa isa) noexcept {
  if (isa == Isa::baseline) return &kernels_baseline;
#if defined(__x86_64__)
  const bool avx2 = __builtin_cpu_supports("avx2") != 0 && __builtin_cpu_supports("fma") != 0;
  if (isa == Isa::avx2) return avx2 ? &kernels_avx2 : nullptr;
  const bool avx512 = avx2 && __builtin_cpu_supports("avx512f") != 0 && __builtin_cpu_supports("avx512dq") != 0 &&
                      __builtin_cpu_supports("avx512vl") != 0 && __builtin_cpu_supports("avx512bw") != 0;
  return avx512 ? &kernels_avx512 : nullptr;
#else
  return nullptr;
#endif
}

const KernelTable& best_kernels() noexcept {
  for (const Isa isa : {Isa::avx512, Isa::avx2}) {
    if (const KernelTable* table = kernels_for(isa)) return *table;
  }
  return kernels_baseline;
}

}  // namespace lagscape
