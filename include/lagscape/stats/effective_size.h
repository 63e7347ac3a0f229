#pragma once
#include "lagscape/stats/ar_model.h"
#include "lagscape/stats/pair_counts.h"

namespace lagscape {

/// Effective sizes of a record with gaps, clipped to [2, m].
struct EffectiveSizes {
  double mean = 0;      ///< m^2 / (m + 2 sum nu_k rho_k): for a complete record the exact finite-n expression
  double variance = 0;  ///< the same with rho_k^2
};
/// rho: the model's autocorrelations, summed until |rho_k| < 1e-6. [Bayley & Hammersley 1946; gaps: pair counts nu_k]
[[nodiscard]] EffectiveSizes effective_sizes(const ArModel& model, PairCounts& pairs, double values);

/// Independent values for a trend under AR(1) noise: m (1-f)/(1+f) / I, clipped to [2, m];
/// I = ([m + 2 sum nu_k f^k]/m) / ([n + 2 sum (n-k) f^k]/n) allows for gaps (1 for a complete record of n = m steps).
/// [Santer et al. 2000, J. Geophys. Res. 105:7337; gap factor checked by simulation]
[[nodiscard]] double effective_size_for_trend(double lag1, PairCounts& pairs, double values, double span);

}  // namespace lagscape
