#include "io/archive_band.h"

#include <algorithm>
#include <cmath>
#include <cstring>
#include <limits>
#include <utility>

#include "io/slab_reader.h"

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr std::size_t kPiece = 256;  // cells decoded at a time: 2 KiB of doubles stay in the first cache level
constexpr std::size_t kAhead = 4;    // steps fetched before they are needed
constexpr std::size_t kAlign = 16;

// Neighbouring cells of one step into their lanes. The lane count that the kernels use is copied as one block of fixed
// size.
void place(const double* from, std::size_t cell, std::size_t count, std::size_t lanes, std::size_t pitch,
           std::size_t step, double* out) {
  constexpr std::size_t kUsual = 8;
  if (lanes == kUsual && cell % kUsual == 0) {
    double* to = out + (cell / kUsual * pitch + step) * kUsual;
    for (; count >= kUsual; count -= kUsual, cell += kUsual, from += kUsual, to += pitch * kUsual)
      std::memcpy(to, from, kUsual * sizeof(double));
  }
  while (count > 0) {
    const std::size_t lane = cell % lanes, some = std::min(lanes - lane, count);
    std::copy_n(from, some, out + (cell / lanes * pitch + step) * lanes + lane);
    from += some;
    cell += some;
    count -= some;
  }
}

}  // namespace

ArchiveBand::ArchiveBand(std::shared_ptr<const ArchivePlan> plan, CellRange cells, std::unique_ptr<Band> reuse)
    : plan_(std::move(plan)), cells_(cells) {
  std::size_t size = 0;
  for (const ArchiveFile& file : plan_->files) {
    offset_.push_back(size);
    size += (file.rows * cells.count * file.rules.bytes() + kAlign - 1) / kAlign * kAlign;
  }
  if (auto* old = dynamic_cast<ArchiveBand*>(reuse.get()); old != nullptr && old->capacity_ >= size) {
    values_ = std::move(old->values_);
    capacity_ = std::exchange(old->capacity_, 0);
  } else {
    reuse.reset();  // before the new memory is taken
    values_ = std::make_unique_for_overwrite<std::byte[]>(size);
    capacity_ = size;
  }
  for (std::size_t f = 0; f < plan_->files.size(); ++f) {
    const ArchiveFile& part = plan_->files[f];
    if (part.rows == 0) continue;
    const NcFile file = NcFile::open(part.path);
    const VariableLayout layout = reopened(file, part.layout);
    for (const StepRun& run : part.runs)
      read_stored(file, layout, plan_->map, plan_->panel.geometry.cols, cells, run.file_step, run.count,
                  part.rules.bytes(), values_.get() + offset_[f] + run.row * cells.count * part.rules.bytes());
  }
}

const std::byte* ArchiveBand::stored(const Holder& holder, std::size_t cell) const {
  return values_.get() + offset_[holder.file] +
         (holder.row * cells_.count + cell) * plan_->files[holder.file].rules.bytes();
}

// Steps lie a whole band apart, too far for the machine to see them coming.
void ArchiveBand::prefetch(std::size_t step, std::size_t cell, std::size_t count) const {
  constexpr std::size_t kLine = 64;
  const std::size_t first = plan_->first_holder[step];
  if (first == plan_->first_holder[step + 1]) return;
  const Holder& holder = plan_->holders[first];
  const std::byte* const from = stored(holder, cell);
  const std::size_t bytes = count * plan_->files[holder.file].rules.bytes();
  for (std::size_t at = 0; at < bytes; at += kLine) __builtin_prefetch(from + at);
}

void ArchiveBand::decode_step(std::size_t step, std::size_t cell, std::size_t count, double* out,
                              ValueCounts& counts) const {
  const std::size_t first = plan_->first_holder[step], end = plan_->first_holder[step + 1];
  if (first == end) {
    std::fill_n(out, count, kNaN);
    return;
  }
  const Holder& holder = plan_->holders[first];
  plan_->files[holder.file].rules.decode(stored(holder, cell), count, out, counts);
  if (end - first == 1) return;
  double sum[kPiece], more[kPiece], held[kPiece];
  for (std::size_t i = 0; i < count; ++i) {
    held[i] = std::isnan(out[i]) ? 0 : 1;
    sum[i] = std::isnan(out[i]) ? 0 : out[i];
  }
  for (std::size_t h = first + 1; h < end; ++h) {
    plan_->files[plan_->holders[h].file].rules.decode(stored(plan_->holders[h], cell), count, more, counts);
    for (std::size_t i = 0; i < count; ++i) {
      held[i] += std::isnan(more[i]) ? 0 : 1;
      sum[i] += std::isnan(more[i]) ? 0 : more[i];
    }
  }
  for (std::size_t i = 0; i < count; ++i) out[i] = held[i] > 0 ? sum[i] / held[i] : kNaN;
}

void ArchiveBand::gather(std::size_t offset, std::size_t count, std::size_t lanes, std::size_t pitch, double* out,
                         ValueCounts& counts) const {
  const std::size_t steps = plan_->panel.axis.size();
  double piece[kPiece];
  ValueCounts found;
  for (std::size_t cell = 0; cell < count; cell += kPiece) {
    const std::size_t some = std::min(kPiece, count - cell);
    for (std::size_t t = 0; t < steps; ++t) {
      if (t + kAhead < steps) prefetch(t + kAhead, offset + cell, some);
      decode_step(t, offset + cell, some, piece, found);
      place(piece, cell, some, lanes, pitch, t, out);
    }
  }
  if (const std::size_t used = count % lanes; used > 0)
    for (std::size_t t = 0; t < steps; ++t)
      std::fill_n(out + (count / lanes * pitch + t) * lanes + used, lanes - used, kNaN);
  counts += found;
}

}  // namespace lagscape
