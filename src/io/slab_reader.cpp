#include "io/slab_reader.h"

#include <algorithm>
#include <cstdint>
#include <cstring>
#include <vector>

namespace lagscape {
namespace {

constexpr std::size_t kSlabBytes = std::size_t{32} << 20U;
constexpr std::size_t kMergeGap = 64;   // columns read in vain rather than by a call of their own
constexpr std::size_t kCopyBlock = 32;  // of a transposition: 32 x 32 values fit the first cache level

/// File columns read in one go, and the runs of the panel in them.
struct Span {
  std::size_t first = 0, end = 0;
  std::vector<ColumnRun> runs;
};

std::size_t lowest(const ColumnRun& run) { return run.reversed ? run.file + 1 - run.count : run.file; }

// The parts of the runs that lie in panel columns [first, first + count), renumbered from 0.
std::vector<ColumnRun> clip(const std::vector<ColumnRun>& runs, std::size_t first, std::size_t count) {
  std::vector<ColumnRun> out;
  for (const ColumnRun& run : runs) {
    const std::size_t from = std::max(run.panel, first), to = std::min(run.panel + run.count, first + count);
    if (from >= to) continue;
    const std::size_t skipped = from - run.panel;
    out.push_back({from - first, run.reversed ? run.file - skipped : run.file + skipped, to - from, run.reversed});
  }
  return out;
}

std::vector<Span> spans_of(std::vector<ColumnRun> runs) {
  std::sort(runs.begin(), runs.end(), [](const ColumnRun& a, const ColumnRun& b) { return lowest(a) < lowest(b); });
  std::vector<Span> spans;
  for (const ColumnRun& run : runs) {
    const std::size_t low = lowest(run), end = low + run.count;
    if (spans.empty() || low > spans.back().end + kMergeGap) spans.push_back({low, end, {}});
    spans.back().end = end;
    spans.back().runs.push_back(run);
  }
  return spans;
}

template <typename T>
void copy_transposed(const std::byte* from, std::ptrdiff_t step_stride, std::ptrdiff_t cell_stride, std::size_t steps,
                     std::size_t cells, std::byte* to, std::size_t to_pitch) {
  const T* const source = reinterpret_cast<const T*>(from);
  T* const target = reinterpret_cast<T*>(to);
  for (std::size_t t0 = 0; t0 < steps; t0 += kCopyBlock)
    for (std::size_t c0 = 0; c0 < cells; c0 += kCopyBlock)
      for (std::size_t t = t0; t < std::min(steps, t0 + kCopyBlock); ++t)
        for (std::size_t c = c0; c < std::min(cells, c0 + kCopyBlock); ++c)
          target[t * to_pitch + c] =
              source[static_cast<std::ptrdiff_t>(t) * step_stride + static_cast<std::ptrdiff_t>(c) * cell_stride];
}

// to[t * to_pitch + c] = from[t * step_stride + c * cell_stride], all in values of `bytes` bytes.
void copy_cells(const std::byte* from, std::ptrdiff_t step_stride, std::ptrdiff_t cell_stride, std::size_t steps,
                std::size_t cells, std::byte* to, std::size_t to_pitch, std::size_t bytes) {
  if (cell_stride == 1) {
    for (std::size_t t = 0; t < steps; ++t)
      std::memcpy(to + t * to_pitch * bytes,
                  from + static_cast<std::ptrdiff_t>(t) * step_stride * static_cast<std::ptrdiff_t>(bytes),
                  cells * bytes);
    return;
  }
  switch (bytes) {
    case 1:
      return copy_transposed<std::uint8_t>(from, step_stride, cell_stride, steps, cells, to, to_pitch);
    case 2:
      return copy_transposed<std::uint16_t>(from, step_stride, cell_stride, steps, cells, to, to_pitch);
    case 4:
      return copy_transposed<std::uint32_t>(from, step_stride, cell_stride, steps, cells, to, to_pitch);
    default:
      return copy_transposed<std::uint64_t>(from, step_stride, cell_stride, steps, cells, to, to_pitch);
  }
}

class SlabReader {
 public:
  SlabReader(const NcFile& file, const VariableLayout& layout, std::size_t bytes)
      : file_(file),
        layout_(layout),
        bytes_(bytes),
        rank_(layout.variable.dims.size()),
        start_(layout.fixed),
        count_(rank_, 1),
        chunk_(rank_, 1) {
    int storage = NC_CONTIGUOUS;
    // Classic files know no chunks and say so by an error or by contiguous storage.
    if (rank_ > 0 &&
        nc_inq_var_chunking(layout.variable.group, layout.variable.id, &storage, chunk_.data()) == NC_NOERR &&
        storage == NC_CHUNKED)
      chunked_ = true;
    if (!chunked_) std::fill(chunk_.begin(), chunk_.end(), std::size_t{1});
  }

  void read(const CellMap& map, std::size_t panel_cols, CellRange cells, std::size_t first, std::size_t count,
            std::byte* to) {
    const bool part_of_row = cells.count < panel_cols || cells.first % panel_cols != 0;
    const std::size_t columns = part_of_row ? cells.count : panel_cols, rows = cells.count / columns;
    const std::size_t row = map.first_row + cells.first / panel_cols;
    const std::vector<Span> spans = spans_of(clip(map.runs, cells.first % panel_cols, columns));
    for (const Span& span : spans) {
      if (spans.size() == 1 && span.runs.size() == 1 && !span.runs[0].reversed && time_major()) {
        set(first, count, row, rows, span);
        get(to);
      } else {
        read_slabs(span, row, rows, first, count, cells.count, columns, to);
      }
    }
  }

 private:
  // Time, rows, columns in this order, so that the file's order is ours.
  [[nodiscard]] bool time_major() const {
    std::size_t least = 0;
    for (const DimRole role : {DimRole::time, DimRole::row, DimRole::column}) {
      const auto at = layout_.position(role);
      if (!at) continue;
      if (*at < least) return false;
      least = *at;
    }
    return true;
  }

  void set(std::size_t first, std::size_t count, std::size_t row, std::size_t rows, const Span& span) {
    const auto put = [&](DimRole role, std::size_t start, std::size_t length) {
      if (const auto at = layout_.position(role)) {
        start_[*at] = start;
        count_[*at] = length;
      }
    };
    put(DimRole::time, first, count);
    put(DimRole::row, row, rows);
    put(DimRole::column, span.first, span.end - span.first);
  }

  void get(std::byte* to) {
    file_.check(nc_get_vara(layout_.variable.group, layout_.variable.id, start_.data(), count_.data(), to), "reading",
                layout_.variable);
  }

  /// Distance between neighbours along a dimension in what get() delivers.
  [[nodiscard]] std::size_t stride(DimRole role) const {
    const auto at = layout_.position(role);
    std::size_t size = 1;
    if (at)
      for (std::size_t i = *at + 1; i < rank_; ++i) size *= count_[i];
    return size;
  }

  /// Length of a slab along a dimension: as many as the room allows, whole chunks where there are.
  [[nodiscard]] std::size_t slab(DimRole role, std::size_t room) const {
    const auto at = layout_.position(role);
    const std::size_t chunk = at ? chunk_[*at] : 1;
    return std::max<std::size_t>(1, room >= chunk ? room / chunk * chunk : chunk);
  }

  /// A slab from `from` on that ends on the last chunk edge within `length`, or is `length` long where no edge lies in
  /// it (cutting it short there would only read its chunk once more).
  [[nodiscard]] std::size_t to_chunk_edge(DimRole role, std::size_t from, std::size_t length) const {
    const auto at = layout_.position(role);
    const std::size_t chunk = at ? chunk_[*at] : 1, edge = (from + length) / chunk * chunk;
    return edge > from ? edge - from : length;
  }

  void read_slabs(const Span& span, std::size_t row, std::size_t rows, std::size_t first, std::size_t count,
                  std::size_t pitch, std::size_t columns, std::byte* to) {
    const auto time = layout_.position(DimRole::time), line = layout_.position(DimRole::row);
    const bool rows_outside = time && line && *line < *time;
    const std::size_t width = (span.end - span.first) * bytes_;
    // The dimension that varies slowest in the file is cut first, the other one only where chunks are long along the
    // first.
    std::size_t most_steps = count, most_rows = rows;
    const auto room = [&](std::size_t others) { return kSlabBytes / std::max<std::size_t>(1, width * others); };
    if (rows_outside)
      most_rows = std::min(rows, slab(DimRole::row, room(count)));
    else
      most_steps = std::min(count, slab(DimRole::time, room(rows)));
    if (most_steps * most_rows * width > kSlabBytes) {
      if (rows_outside)
        most_steps = std::min(count, slab(DimRole::time, room(most_rows)));
      else
        most_rows = std::min(rows, slab(DimRole::row, room(most_steps)));
    }
    for (std::size_t r = 0; r < rows;) {
      const std::size_t some_rows = std::min(rows - r, to_chunk_edge(DimRole::row, row + r, most_rows));
      for (std::size_t t = 0; t < count;) {
        const std::size_t steps = std::min(count - t, to_chunk_edge(DimRole::time, first + t, most_steps));
        set(first + t, steps, row + r, some_rows, span);
        buffer_.resize(std::max(buffer_.size(), steps * some_rows * width));
        get(buffer_.data());
        scatter(span, steps, some_rows, to + (t * pitch + r * columns) * bytes_, pitch, columns);
        t += steps;
      }
      r += some_rows;
    }
  }

  void scatter(const Span& span, std::size_t steps, std::size_t rows, std::byte* to, std::size_t pitch,
               std::size_t columns) const {
    const std::size_t step = stride(DimRole::time), line = stride(DimRole::row), column = stride(DimRole::column);
    for (std::size_t r = 0; r < rows; ++r)
      for (const ColumnRun& run : span.runs) {
        const auto across = static_cast<std::ptrdiff_t>(column);
        copy_cells(buffer_.data() + (r * line + (run.file - span.first) * column) * bytes_,
                   static_cast<std::ptrdiff_t>(step), run.reversed ? -across : across, steps, run.count,
                   to + (r * columns + run.panel) * bytes_, pitch, bytes_);
      }
  }

  const NcFile& file_;
  const VariableLayout& layout_;
  std::size_t bytes_, rank_;
  std::vector<std::size_t> start_, count_, chunk_;
  bool chunked_ = false;
  std::vector<std::byte> buffer_;
};

}  // namespace

void read_stored(const NcFile& file, const VariableLayout& layout, const CellMap& map, std::size_t panel_cols,
                 CellRange cells, std::size_t first, std::size_t count, std::size_t bytes, std::byte* to) {
  SlabReader(file, layout, bytes).read(map, panel_cols, cells, first, count, to);
}

}  // namespace lagscape
