#include "io/result_writer_spool.h"

#include <fcntl.h>
#include <fmt/format.h>
#include <unistd.h>

#include <cerrno>
#include <cmath>
#include <cstdlib>
#include <cstring>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

[[noreturn]] void refuse(int error, const std::string& folder, std::size_t bytes) {
  if (error == ENOSPC || error == EDQUOT || error == EFBIG)
    throw Error(ErrorKind::output,
                fmt::format("no room for the result: its maps take {} while they are gathered ({})",
                            human_bytes(static_cast<double>(bytes)), std::strerror(error)),
                "folder: " + folder, "make room there, name another folder in output.file, or ask for fewer cubes");
  throw Error(ErrorKind::output, fmt::format("the result's folder cannot be written to: {}", std::strerror(error)),
              "folder: " + folder, "name a folder in output.file that you may write to");
}

// A file that has no name any more: the system takes it back when it is closed, whatever happens to us.
int open_nameless(const std::filesystem::path& folder) {
  std::string name = (folder / ".lagscape-values-XXXXXX").string();
  const int file = mkostemp(name.data(), O_CLOEXEC);
  if (file >= 0) unlink(name.c_str());
  return file;
}

template <class To, class From>
To stored_value(From value, const std::string& map) {
  if (std::isnan(value)) return fill_value<To>();  // one NaN for all: their sign differs between instruction sets
  if constexpr (std::numeric_limits<To>::is_integer) {
    const auto whole = std::nearbyint(value);
    if (whole < static_cast<From>(std::numeric_limits<To>::min()) ||
        whole > static_cast<From>(std::numeric_limits<To>::max()))
      throw Error(ErrorKind::internal, fmt::format("the value {} does not fit the map's integer type", value),
                  "map: " + map);
    return static_cast<To>(whole);
  } else {
    return static_cast<To>(value);
  }
}

}  // namespace

std::size_t stored_bytes(MapType type) {
  return with_stored_type(type, [](auto value) { return sizeof(value); });
}

ValueSpool::ValueSpool(const std::filesystem::path& folder, const MapSet& set)
    : set_(set),
      folder_(folder.string()),
      rows_(set.geometry.is_sites() ? set.geometry.cells() : set.geometry.rows),
      cols_(set.geometry.is_sites() ? 1 : set.geometry.cols),
      written_(set.maps.size(), std::vector<bool>(rows_, false)) {
  for (const MapSpec& map : set.maps) {
    offsets_.push_back(bytes_);
    bytes_ += set.layers(map) * rows_ * cols_ * stored_bytes(map.type);
  }
  file_ = open_nameless(folder);
  if (file_ < 0) refuse(errno, folder_, bytes_);
  // File systems that cannot set space aside say so; then a full disk shows at the first write it has no room for.
  if (bytes_ > 0 && fallocate(file_, 0, 0, static_cast<off_t>(bytes_)) != 0 && errno != EOPNOTSUPP && errno != ENOSYS) {
    const int error = errno;
    close(file_);
    refuse(error, folder_, bytes_);
  }
}

ValueSpool::~ValueSpool() { close(file_); }

template <class From>
void ValueSpool::take(std::size_t map, CellRange cells, std::span<const From> values) {
  const MapSpec& spec = set_.maps.at(map);
  const std::size_t layers = set_.layers(spec);
  if (cells.first % cols_ != 0 || cells.count % cols_ != 0 || cells.first + cells.count > rows_ * cols_ ||
      values.size() != layers * cells.count)
    throw Error(ErrorKind::internal,
                fmt::format("{} values for {} layers of cells {} to {} are not whole rows of the grid", values.size(),
                            layers, cells.first, cells.first + cells.count),
                "map: " + spec.name);
  with_stored_type(spec.type, [&](auto zero) {
    using To = decltype(zero);
    std::vector<To> line(cells.count);
    for (std::size_t layer = 0; layer < layers; ++layer) {
      for (std::size_t c = 0; c < cells.count; ++c)
        line[c] = stored_value<To>(values[layer * cells.count + c], spec.name);
      write_at(offsets_[map] + (layer * rows_ * cols_ + cells.first) * sizeof(To),
               reinterpret_cast<const std::byte*>(line.data()), line.size() * sizeof(To));
    }
  });
  for (std::size_t row = cells.first / cols_; row < (cells.first + cells.count) / cols_; ++row)
    written_[map][row] = true;
}

template void ValueSpool::take(std::size_t, CellRange, std::span<const float>);
template void ValueSpool::take(std::size_t, CellRange, std::span<const double>);

void ValueSpool::get(std::size_t map, std::size_t layer, const Block& block, std::byte* out) const {
  const std::size_t size = stored_bytes(set_.maps.at(map).type);
  const std::size_t start = offsets_[map] + layer * rows_ * cols_ * size;
  if (block.cols == cols_) {  // whole rows lie one after the other
    read_at(start + block.row * cols_ * size, out, block.rows * cols_ * size);
    return;
  }
  for (std::size_t row = 0; row < block.rows; ++row)
    read_at(start + ((block.row + row) * cols_ + block.col) * size, out + row * block.cols * size, block.cols * size);
}

void ValueSpool::require_complete() const {
  for (std::size_t map = 0; map < written_.size(); ++map)
    for (std::size_t row = 0; row < rows_; ++row)
      if (!written_[map][row])
        throw Error(ErrorKind::internal, "no values were written for a part of the result",
                    fmt::format("map: {}, {}", set_.maps[map].name, set_.geometry.describe_cell(row * cols_)));
}

void ValueSpool::write_at(std::size_t offset, const std::byte* data, std::size_t count) {
  while (count > 0) {
    const ssize_t done = pwrite(file_, data, count, static_cast<off_t>(offset));
    if (done < 0 && errno == EINTR) continue;
    if (done <= 0) refuse(done < 0 ? errno : ENOSPC, folder_, bytes_);
    data += done;
    offset += static_cast<std::size_t>(done);
    count -= static_cast<std::size_t>(done);
  }
}

void ValueSpool::read_at(std::size_t offset, std::byte* data, std::size_t count) const {
  while (count > 0) {
    const ssize_t done = pread(file_, data, count, static_cast<off_t>(offset));
    if (done < 0 && errno == EINTR) continue;
    if (done <= 0)
      throw Error(
          ErrorKind::output,
          fmt::format("values set aside cannot be read back: {}", done < 0 ? std::strerror(errno) : "cut short"),
          "folder: " + folder_, "check the disk, then run the job again");
    data += done;
    offset += static_cast<std::size_t>(done);
    count -= static_cast<std::size_t>(done);
  }
}

}  // namespace lagscape
