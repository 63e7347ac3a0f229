#include <algorithm>
#include <cmath>
#include <utility>

#include "forge/data_files.h"
#include "forge/generator.h"
#include "forge/space.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {
namespace {

constexpr std::size_t kBlockValues = std::size_t{1} << 22;  // values made before they are written: 32 MB
constexpr std::size_t kSeriesSide = 8;                      // cells along a side of a chunk of series
constexpr std::size_t kChunkValues = std::size_t{1} << 18;
constexpr std::size_t kPanelChunkValues = std::size_t{1} << 14;

int creation_mode(FileFormat format) {
  switch (format) {
    case FileFormat::classic:
      return 0;
    case FileFormat::offset64:
      return NC_64BIT_OFFSET;
    case FileFormat::cdf5:
      return NC_64BIT_DATA;
    default:
      return NC_NETCDF4 | NC_CLASSIC_MODEL;
  }
}

/// Chunk sizes for a file of so many steps: time, rows, columns.
std::array<std::size_t, 3> chunk_sizes(const Recipe& recipe, std::size_t steps) {
  const Geometry& geometry = recipe.geometry;
  const std::array<std::size_t, 3> whole{steps, geometry.rows, geometry.cols};
  std::array<std::size_t, 3> chunks{1, geometry.rows, geometry.cols};
  if (recipe.output.chunks) {
    chunks = *recipe.output.chunks;
  } else if (recipe.output.layout == FileLayout::series) {
    const std::size_t side = geometry.is_sites() ? 1 : kSeriesSide;
    chunks = {kChunkValues / (side * side), side, side};
  } else if (geometry.is_sites()) {
    chunks[0] = std::max<std::size_t>(1, kPanelChunkValues / geometry.cells());
  }
  for (std::size_t i = 0; i < 3; ++i) chunks[i] = std::clamp<std::size_t>(chunks[i], 1, whole[i]);
  return chunks;
}

/// How the values of a run of cells go to disk.
class NetcdfWriter {
 public:
  NetcdfWriter(const Recipe& recipe, FileFormat format, const PartFiles& files, const Checkpoint& check)
      : recipe_(recipe), format_(format), files_(files), check_(check) {}

  MissingCounts write() {
    const std::vector<TimePiece> pieces = time_pieces(recipe_);
    MissingCounts missing(recipe_.variables.size());
    const std::size_t band = cells_per_band(pieces.front().steps);
    for (std::size_t first = 0; first < recipe_.geometry.cells(); first += band) {
      const std::size_t count = std::min(band, recipe_.geometry.cells() - first);
      std::vector<Generator> generators;
      for (std::size_t v = 0; v < recipe_.variables.size(); ++v) generators.emplace_back(recipe_, v, first, count);
      for (const TimePiece& piece : pieces) {
        NcFile file = first == 0 ? define(piece) : NcFile::reopen(files_.part(piece.stem + ".nc"));
        write_piece(file, piece, first, count, generators);
        file.close();
      }
      for (std::size_t v = 0; v < generators.size(); ++v) {
        missing[v].insert(missing[v].end(), generators[v].missing().begin(), generators[v].missing().end());
      }
    }
    return missing;
  }

 private:
  /// Panels in series have time last; everything else has it first.
  [[nodiscard]] bool time_last() const {
    return recipe_.geometry.is_sites() && recipe_.output.layout == FileLayout::series;
  }
  /// Series are made in bands of whole chunks, maps all cells at once.
  [[nodiscard]] std::size_t cells_per_band(std::size_t steps) const {
    const Geometry& geometry = recipe_.geometry;
    if (recipe_.output.layout != FileLayout::series) return geometry.cells();
    const auto chunks = chunk_sizes(recipe_, steps);
    const std::size_t unit = geometry.is_sites() ? chunks[2] : chunks[1] * geometry.cols;
    return unit * std::max<std::size_t>(1, kBlockValues / recipe_.axis.size() / unit);
  }
  [[nodiscard]] NcFile define(const TimePiece& piece) const;
  void define_variable(NcFile& file, const ForgedVariable& variable, int time, const Space& space,
                       std::size_t steps) const;
  void write_times(NcFile& file, int time, const TimePiece& piece) const;
  void write_piece(NcFile& file, const TimePiece& piece, std::size_t first, std::size_t count,
                   std::vector<Generator>& generators);
  void put(NcFile& file, const ForgedVariable& variable, std::size_t step, std::size_t steps, std::size_t first,
           std::size_t count);
  template <class Stored>
  void put_as(NcFile& file, const ForgedVariable& variable, const std::vector<std::size_t>& start,
              const std::vector<std::size_t>& size, std::size_t steps, std::size_t count);

  const Recipe& recipe_;
  FileFormat format_;
  const PartFiles& files_;
  const Checkpoint& check_;
  std::vector<double> block_;  ///< steps of one block, time-major
};

NcFile NetcdfWriter::define(const TimePiece& piece) const {
  NcFile file = NcFile::create(files_.part(piece.stem + ".nc"), creation_mode(format_));
  const bool unlimited = recipe_.output.unlimited && recipe_.output.layout != FileLayout::contiguous && !time_last();
  const int time_dimension = file.define_dimension("time", unlimited ? NC_UNLIMITED : piece.steps);
  const Space space = define_space(file, recipe_.geometry);
  const int time = file.define_variable("time", NC_DOUBLE, std::array{time_dimension});
  file.put_attributes(time, {{"standard_name", "time"},
                             {"units", recipe_.time_units},
                             {"calendar", std::string(calendar_name(recipe_.axis.calendar()))},
                             {"axis", "T"}});
  if (format_ == FileFormat::netcdf4 && unlimited)
    file.define_storage(time, std::array{std::min<std::size_t>(piece.steps, 1024)}, 0);
  for (const ForgedVariable& variable : recipe_.variables)
    define_variable(file, variable, time_dimension, space, piece.steps);
  file.put_attributes(
      NC_GLOBAL,
      provenance(recipe_, "Series whose memory and trend are known exactly; the truth stands in a file of its own."));
  file.end_define();
  write_space(file, recipe_.geometry, space);
  write_times(file, time, piece);
  return file;
}

void NetcdfWriter::define_variable(NcFile& file, const ForgedVariable& variable, int time, const Space& space,
                                   std::size_t steps) const {
  std::vector<int> dimensions = space.dimensions;
  dimensions.insert(time_last() ? dimensions.end() : dimensions.begin(), time);
  constexpr std::array<int, 4> kTypes{NC_FLOAT, NC_DOUBLE, NC_SHORT, NC_INT};
  const int id = file.define_variable(variable.name, kTypes[static_cast<std::size_t>(variable.type)], dimensions);
  file.define_fill(id, variable.fill);
  file.put_attributes(
      id, {{"long_name", variable.long_name}, {"standard_name", variable.standard_name}, {"units", variable.units}});
  if (variable.packed()) {
    file.put_attributes(id, {{"scale_factor", std::vector<double>{variable.scale}},
                             {"add_offset", std::vector<double>{variable.offset}}});
  }
  file.put_attributes(id, space.attributes);
  if (format_ != FileFormat::netcdf4) return;
  if (recipe_.output.layout == FileLayout::contiguous) return file.define_storage(id, {}, 0);
  const auto chunks = chunk_sizes(recipe_, steps);
  std::vector<std::size_t> sizes{chunks[1], chunks[2]};
  if (recipe_.geometry.is_sites()) sizes = {chunks[2]};
  sizes.insert(time_last() ? sizes.end() : sizes.begin(), chunks[0]);
  file.define_storage(id, sizes, recipe_.output.deflate);
}

void NetcdfWriter::write_times(NcFile& file, int time, const TimePiece& piece) const {
  std::vector<double> values;
  for (std::size_t t = piece.first; t < piece.first + piece.steps; ++t) {
    values.push_back(static_cast<double>(recipe_.axis.time(t) - recipe_.time_epoch) /
                     static_cast<double>(recipe_.time_unit_seconds));
  }
  file.put(time, {0}, {piece.steps}, values.data());
}

void NetcdfWriter::write_piece(NcFile& file, const TimePiece& piece, std::size_t first, std::size_t count,
                               std::vector<Generator>& generators) {
  const std::size_t unit = chunk_sizes(recipe_, piece.steps)[0];
  const std::size_t block_steps = unit * std::max<std::size_t>(1, kBlockValues / count / unit);
  for (std::size_t step = 0; step < piece.steps; step += block_steps) {
    const std::size_t steps = std::min(block_steps, piece.steps - step);
    block_.resize(steps * count);
    for (std::size_t v = 0; v < generators.size(); ++v) {
      for (std::size_t t = 0; t < steps; ++t) {
        check_();
        generators[v].next(std::span(block_).subspan(t * count, count));
      }
      put(file, recipe_.variables[v], step, steps, first, count);
    }
  }
}

void NetcdfWriter::put(NcFile& file, const ForgedVariable& variable, std::size_t step, std::size_t steps,
                       std::size_t first, std::size_t count) {
  const Geometry& geometry = recipe_.geometry;
  std::vector<std::size_t> start{step, first / geometry.cols, 0}, size{steps, count / geometry.cols, geometry.cols};
  if (geometry.is_sites()) {
    start = time_last() ? std::vector{first, step} : std::vector{step, first};
    size = time_last() ? std::vector{count, steps} : std::vector{steps, count};
  }
  switch (variable.type) {
    case StoredType::f32:
      return put_as<float>(file, variable, start, size, steps, count);
    case StoredType::f64:
      return put_as<double>(file, variable, start, size, steps, count);
    case StoredType::i16:
      return put_as<std::int16_t>(file, variable, start, size, steps, count);
    case StoredType::i32:
      return put_as<std::int32_t>(file, variable, start, size, steps, count);
  }
}

template <class Stored>
void NetcdfWriter::put_as(NcFile& file, const ForgedVariable& variable, const std::vector<std::size_t>& start,
                          const std::vector<std::size_t>& size, std::size_t steps, std::size_t count) {
  std::vector<Stored> raw(block_.size());
  for (std::size_t t = 0; t < steps; ++t) {
    for (std::size_t c = 0; c < count; ++c) {
      const double value = block_[t * count + c];
      const double stored = std::isnan(value)   ? variable.fill
                            : variable.packed() ? packed_number(variable, value)
                                                : stored_value(variable, value);
      raw[time_last() ? c * steps + t : t * count + c] = static_cast<Stored>(stored);
    }
  }
  file.put(file.find(variable.name).value().id, start, size, raw.data());
}

}  // namespace

MissingCounts write_netcdf(const Recipe& recipe, FileFormat format, const PartFiles& files, const Checkpoint& check) {
  return NetcdfWriter(recipe, format, files, check).write();
}

}  // namespace lagscape
