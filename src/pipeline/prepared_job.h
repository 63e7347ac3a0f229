#pragma once
#include <functional>
#include <memory>
#include <vector>

#include "lagscape/grid/tile_io.h"
#include "lagscape/measures/analysis.h"
#include "lagscape/measures/measure.h"
#include "lagscape/pipeline/run.h"
#include "pipeline/settings.h"

namespace lagscape {

/// One variable of a job, ready to run: files opened, settings decided, maps chosen, cells cut into bands.
struct PreparedJob {
  JobPlan plan;
  std::unique_ptr<TileSource> source;
  ResolvedSettings resolved;
  std::vector<const Measure*> measures;  ///< maps, then cubes
  MapSet maps;
  std::size_t block_cells = 0;
};

/// Names of the job's variables' jobs: {variable} in output.file filled in.
[[nodiscard]] JobSpec job_of_variable(const JobSpec& job, const std::string& variable);
[[nodiscard]] PreparedJob prepare_job(const JobSpec& job, const std::string& variable, const RunOptions& options,
                                      const Log& log);

}  // namespace lagscape
