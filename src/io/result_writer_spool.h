#pragma once
#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <limits>
#include <span>
#include <string>
#include <vector>

#include "lagscape/grid/tile_io.h"

namespace lagscape {

/// Calls the function with a value-initialised object of the type in which maps of this kind are stored.
template <class Function>
decltype(auto) with_stored_type(MapType type, Function&& function) {
  switch (type) {
    case MapType::f64:
      return function(double{});
    case MapType::i32:
      return function(std::int32_t{});
    case MapType::i16:
      return function(std::int16_t{});
    case MapType::i8:
      return function(std::int8_t{});
    case MapType::f32:
      break;
  }
  return function(float{});
}

/// The value that stands for "missing": NaN, -1 for counts and masks, 127 for classes (reads the same signed or not).
template <class T>
constexpr T fill_value() {
  if constexpr (std::numeric_limits<T>::has_quiet_NaN) return std::numeric_limits<T>::quiet_NaN();
  return sizeof(T) == 1 ? T{127} : static_cast<T>(-1);
}

[[nodiscard]] std::size_t stored_bytes(MapType type);

/// A rectangle of a grid; sites are one column: row = site.
struct Block {
  std::size_t row = 0, rows = 0, col = 0, cols = 0;
};

/// The values of a result, as they will be stored, until the result is assembled: so the bytes of the result depend
/// neither on the order nor on the size of the bands in which values come, and memory does not grow with the result.
/// Kept in a file without a name in the result's folder, of which nothing can stay behind; its space is taken at once,
/// so that a disk that is too small shows before the work and not after it.
class ValueSpool {
 public:
  /// Throws Error{output} if the folder cannot be written to or has no room.
  ValueSpool(const std::filesystem::path& folder, const MapSet& set);
  ValueSpool(const ValueSpool&) = delete;
  ValueSpool& operator=(const ValueSpool&) = delete;
  ~ValueSpool();

  /// Values as MapSink::write takes them: layer-major, NaN = missing.
  void put(std::size_t map, CellRange cells, std::span<const float> values) { take(map, cells, values); }
  void put(std::size_t map, CellRange cells, std::span<const double> values) { take(map, cells, values); }
  /// Copies a block of one layer, row-major, stored_bytes() a value.
  void get(std::size_t map, std::size_t layer, const Block& block, std::byte* out) const;
  /// Throws Error{internal} naming the first map and cell that nothing was written to.
  void require_complete() const;
  /// Bytes of all values.
  [[nodiscard]] std::size_t bytes() const { return bytes_; }

 private:
  template <class From>
  void take(std::size_t map, CellRange cells, std::span<const From> values);
  void write_at(std::size_t offset, const std::byte* data, std::size_t count);
  void read_at(std::size_t offset, std::byte* data, std::size_t count) const;

  const MapSet& set_;
  std::string folder_;
  std::size_t rows_, cols_;  ///< of blocks: sites are rows
  std::vector<std::size_t> offsets_;
  std::vector<std::vector<bool>> written_;  ///< per map, per row
  std::size_t bytes_ = 0;
  int file_ = -1;
};

}  // namespace lagscape
