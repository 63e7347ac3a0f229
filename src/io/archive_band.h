#pragma once
#include <memory>
#include <vector>

#include "io/archive_plan.h"
#include "lagscape/grid/tile_io.h"

namespace lagscape {

/// Values of a band as the files store them: file after file, each time-major with cells contiguous.
class ArchiveBand final : public Band {
 public:
  /// Reads the cells; memory of `reuse` is recycled if it is such a band and large enough.
  ArchiveBand(std::shared_ptr<const ArchivePlan> plan, CellRange cells, std::unique_ptr<Band> reuse);

  [[nodiscard]] CellRange cells() const override { return cells_; }
  void gather(std::size_t offset, std::size_t count, std::size_t lanes, std::size_t pitch, double* out,
              ValueCounts& counts) const override;

 private:
  void prefetch(std::size_t step, std::size_t cell, std::size_t count) const;
  void decode_step(std::size_t step, std::size_t cell, std::size_t count, double* out, ValueCounts& counts) const;
  [[nodiscard]] const std::byte* stored(const Holder& holder, std::size_t cell) const;

  std::shared_ptr<const ArchivePlan> plan_;
  CellRange cells_;
  std::vector<std::size_t> offset_;  ///< per file: where its values begin
  std::unique_ptr<std::byte[]> values_;
  std::size_t capacity_ = 0;
};

}  // namespace lagscape
