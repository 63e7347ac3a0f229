#include "lagscape/stats/effective_size.h"

#include <algorithm>
#include <cmath>

namespace lagscape {

EffectiveSizes effective_sizes(const ArModel& model, PairCounts& pairs, double values) {
  constexpr double kNegligible = 1e-6;
  const auto negligible = [](double rho) { return std::abs(rho) < kNegligible; };
  ModelCorrelation correlation(model);
  double sum = 0, sum_squared = 0;
  int small_in_a_row = 0;  // an oscillating correlation passes through zero: the end is `order` small lags in a row
  for (std::size_t lag = 1;; ++lag) {
    const double count = pairs.at(lag);
    const double rho = correlation.next();
    small_in_a_row = negligible(rho) ? small_in_a_row + 1 : 0;
    if (small_in_a_row >= std::max(1, model.order) || lag >= pairs.span()) break;
    sum += count * rho;
    sum_squared += count * rho * rho;
  }
  const auto size = [values](double weighted) {
    const double inflated = values + 2 * weighted;
    return inflated > 0 ? std::clamp(values * values / inflated, 2.0, std::max(2.0, values)) : std::max(2.0, values);
  };
  return {size(sum), size(sum_squared)};
}

double effective_size_for_trend(double lag1, PairCounts& pairs, double values, double span) {
  constexpr double kNegligible = 1e-12;
  double size = values * (1 - lag1) / (1 + lag1);
  if (values < span) {
    double gappy = 0, complete = 0, power = lag1;
    for (std::size_t lag = 1; static_cast<double>(lag) < span && std::abs(power) > kNegligible; ++lag, power *= lag1) {
      gappy += pairs.at(lag) * power;
      complete += (span - static_cast<double>(lag)) * power;
    }
    size /= ((values + 2 * gappy) / values) / ((span + 2 * complete) / span);
  }
  return std::clamp(size, 2.0, std::max(2.0, values));
}

}  // namespace lagscape
