#pragma once
#include <optional>
#include <vector>

#include "io/archive_plan.h"
#include "lagscape/grid/tile_io.h"

namespace lagscape {

/// Decodes single stored steps of an archive, keeping one file open: to compare overlaps and to sample.
class StepReader {
 public:
  explicit StepReader(const ArchivePlan& plan) : plan_(plan) {}

  /// Values of these cells at a step of file `file`, missing = NaN; valid until the next call.
  const std::vector<double>& read(std::size_t file, std::size_t step, CellRange cells, ValueCounts& counts);

 private:
  const ArchivePlan& plan_;
  std::optional<NcFile> file_;
  std::size_t open_ = 0;
  VariableLayout layout_;
  std::vector<std::byte> stored_;
  std::vector<double> values_;
};

}  // namespace lagscape
