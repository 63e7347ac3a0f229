#include "pipeline/field.h"

#include <cmath>
#include <limits>

#include "lagscape/measures/trend_test.h"
#include "lagscape/stats/false_discovery.h"

namespace lagscape {

FieldResult field_step(const FieldInput& input, const JobSpec& job) {
  FieldResult result;
  const FieldControl control = job.field.control;
  result.adjusted = control == FieldControl::none ? input.p : adjusted_p(input.p, control == FieldControl::by);
  result.trend_class.assign(input.p.size(), std::numeric_limits<float>::quiet_NaN());
  RunReport::TrendCounts& counts = result.counts;
  counts.test = job.trend.tests.front();
  const int covered = find_trend_test(counts.test)->covered_order;
  for (std::size_t c = 0; c < input.p.size(); ++c) {
    if (input.p_independent[c] <= job.trend.alpha) ++counts.independent;
    if (std::isnan(input.p[c])) continue;
    ++counts.tested;
    const bool local = input.p[c] <= job.trend.alpha;
    const bool stands = local && (control == FieldControl::none || result.adjusted[c] <= job.field.rate);
    counts.local += static_cast<std::size_t>(local);
    counts.standing += static_cast<std::size_t>(stands);
    counts.rising += static_cast<std::size_t>(stands && input.slope[c] > 0);
    counts.falling += static_cast<std::size_t>(stands && input.slope[c] < 0);
    counts.beyond_order += static_cast<std::size_t>(stands && covered > 0 && input.order[c] > covered);
    result.trend_class[c] = !stands ? 0.0F : input.slope[c] > 0 ? 1.0F : 2.0F;
  }
  const double rate = control == FieldControl::none ? 0 : job.field.rate;
  counts.expected_false = static_cast<double>(counts.standing) * rate;
  return result;
}

}  // namespace lagscape
