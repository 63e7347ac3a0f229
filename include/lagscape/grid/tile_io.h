#pragma once
#include <cstddef>
#include <memory>
#include <span>
#include <vector>

#include "lagscape/grid/map_set.h"
#include "lagscape/grid/panel.h"

namespace lagscape {

/// A run of whole grid rows (for sites: of sites), as cells [first, first + count).
struct CellRange {
  std::size_t first = 0, count = 0;
};

/// Counts of values set aside while decoding, by reason (per band, added up by the caller).
struct ValueCounts {
  std::size_t fill = 0;  ///< equal to the fill or a missing value, or NaN
  std::size_t infinite = 0;
  std::size_t out_of_range = 0;  ///< outside the file's or the job's valid range
  std::size_t job_missing = 0;   ///< equal to one of the job's missing_values
  ValueCounts& operator+=(const ValueCounts& other) {
    fill += other.fill;
    infinite += other.infinite;
    out_of_range += other.out_of_range;
    job_missing += other.job_missing;
    return *this;
  }
};

/// Values of one band of cells over the whole axis, in the file's own precision.
class Band {
 public:
  virtual ~Band() = default;
  [[nodiscard]] virtual CellRange cells() const = 0;
  /// Decodes `count` cells starting `offset` cells into the band to doubles, missing = NaN (packing undone, fills and
  /// ranges tested in the raw domain). Layout: groups of `lanes` cells, time-major inside a group:
  /// out[(g * pitch + t) * lanes + lane], g = cell / lanes; lanes past `count` in the last group are NaN.
  /// out holds ceil(count / lanes) * pitch * lanes doubles; rows steps .. pitch-1 are left untouched.
  /// Thread-safe (const); counts are added to `counts`.
  virtual void gather(std::size_t offset, std::size_t count, std::size_t lanes, std::size_t pitch, double* out,
                      ValueCounts& counts) const = 0;
};

/// Reads bands of one variable. Used from one thread.
class TileSource {
 public:
  virtual ~TileSource() = default;
  [[nodiscard]] virtual const Panel& panel() const = 0;
  /// Cells excluded by the job's mask or box (curvilinear), one byte a cell, 1 = excluded; empty if none.
  [[nodiscard]] virtual std::span<const unsigned char> excluded() const = 0;
  /// Reads the whole record of these cells; `reuse` may hand back a band of the same source to recycle its memory.
  [[nodiscard]] virtual std::unique_ptr<Band> read(CellRange cells, std::unique_ptr<Band> reuse = nullptr) = 0;
};

/// Takes the maps of a result. Used from one thread. Nothing appears under the final name before commit().
class MapSink {
 public:
  virtual ~MapSink() = default;
  /// values: layer-major, layer l of cell c at values[l * cells.count + c]; NaN becomes the map's fill value.
  virtual void write(std::size_t map, CellRange cells, std::span<const float> values) = 0;
  virtual void write(std::size_t map, CellRange cells, std::span<const double> values) = 0;
  /// Adds or replaces global attributes known only at the end (counts by status, ...).
  virtual void add_global(const Attributes& attributes) = 0;
  /// Closes, checks, renames to the final name(s). Throws Error{output}.
  virtual void commit() = 0;
};

}  // namespace lagscape
