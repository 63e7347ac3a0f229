#pragma once
#include <cstdint>
#include <vector>

#include "lagscape/job/job_spec.h"
#include "lagscape/pipeline/run.h"

namespace lagscape {

/// What is kept of every cell until all are done.
struct FieldInput {
  std::vector<double> p, p_independent;  ///< NaN where not tested
  std::vector<float> slope;
  std::vector<std::uint8_t> order;  ///< of the fitted autoregression
};

struct FieldResult {
  std::vector<double> adjusted;
  std::vector<float> trend_class;  ///< NaN where not tested
  RunReport::TrendCounts counts;
};

/// Testing all cells together: false discovery control over the cells that were tested (NaN is not counted). A trend
/// stands if it passes its own cell's level and the adjusted p passes the rate.
[[nodiscard]] FieldResult field_step(const FieldInput& input, const JobSpec& job);

}  // namespace lagscape
