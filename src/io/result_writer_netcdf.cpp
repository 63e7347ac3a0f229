#include "io/result_writer_netcdf.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <cstring>
#include <limits>
#include <numeric>
#include <set>
#include <utility>

#include "io/result_writer_axes.h"
#include "lagscape/base/text.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {
namespace {

constexpr std::size_t kChunkSide = 512;  // 1 MiB of float32 a chunk
constexpr std::size_t kChunkValues = kChunkSide * kChunkSide;

template <class T>
constexpr nc_type netcdf_type() {
  if constexpr (std::is_same_v<T, float>) return NC_FLOAT;
  if constexpr (std::is_same_v<T, double>) return NC_DOUBLE;
  if constexpr (std::is_same_v<T, std::int32_t>) return NC_INT;
  if constexpr (std::is_same_v<T, std::int16_t>) return NC_SHORT;
  return NC_BYTE;
}

// Writes one file; a member per part of it, in the order in which they stand in the file.
class ResultFile {
 public:
  ResultFile(const std::string& path, const MapSet& set, std::span<const std::size_t> maps, const ValueSpool& values)
      : set_(set), place_(set.geometry), maps_(maps), values_(values), file_(NcFile::create(path)) {
    for (const char* own : {"lag", "order", "time", "time_bnds", "nv", "crs", "station", "station_id", "name_strlen"})
      taken_.insert(own);
    for (const MapSpec& map : set.maps) taken_.insert(map.name);
  }

  void write() {
    define_mapping();
    if (place_.is_sites())
      define_sites();
    else
      define_grid();
    define_layers();
    define_period();
    std::vector<int> variables;
    for (const std::size_t map : maps_) variables.push_back(define_map(set_.maps[map]));
    file_.put_attributes(NC_GLOBAL, set_.global);
    file_.end_define();
    for (const auto& [id, numbers] : pending_) file_.put(id, numbers);
    if (place_.is_sites()) file_.put_texts(names_id_, place_.site_names);
    for (std::size_t i = 0; i < maps_.size(); ++i) write_map(variables[i], maps_[i]);
    file_.close();
  }

 private:
  // ---- coordinates ----
  int define_coordinate(const std::string& name, std::span<const int> dims, const Attributes& attributes,
                        std::vector<double> numbers) {
    const int id = file_.define_variable(name, NC_DOUBLE, dims);
    file_.put_attributes(id, attributes);
    pending_.emplace_back(id, std::move(numbers));
    return id;
  }

  // A name for something that came from the input, free of our own names; a leading underscore is kept for the library.
  std::string free_name(std::string wanted, const std::string& otherwise) {
    wanted.erase(0, wanted.find_first_not_of('_'));
    if (wanted.empty()) wanted = otherwise;
    while (!taken_.insert(wanted).second) wanted += "_axis";
    return wanted;
  }

  void define_mapping() {
    const auto mapping = mapping_of(place_);
    if (!mapping) return;
    // Our own "crs" and a mapping called so in the input never meet: one of them is written.
    mapping_name_ = mapping->name == "crs" ? "crs" : free_name(mapping->name, "grid_mapping");
    const int id = file_.define_variable(mapping_name_, NC_INT, {});
    file_.put_attributes(id, mapping->attributes);
    pending_.emplace_back(id, std::vector<double>{0});
  }

  void define_grid() {
    const bool earth = place_.kind == GeometryKind::latlon;
    const std::string y = free_name(place_.y.name, earth ? "lat" : "y");
    const std::string x = free_name(place_.x.name, earth ? "lon" : "x");
    cell_dims_ = {file_.define_dimension(y, place_.rows), file_.define_dimension(x, place_.cols)};
    const bool uneven = earth && (!evenly_spaced(place_.y.values) || !evenly_spaced(place_.x.values));
    if (place_.kind == GeometryKind::latlon || place_.kind == GeometryKind::projected) {
      define_axis(y, cell_dims_[0], place_.y, {'Y', place_.kind}, uneven);
      define_axis(x, cell_dims_[1], place_.x, {'X', place_.kind}, uneven);
    }
    // GDAL finds no raster in uneven axes; with the place of every cell it can still warp the map, the right way up.
    if (uneven) return define_places("lat_of_cell", "lon_of_cell", spread_rows(place_), spread_cols(place_));
    if (!earth && !place_.lat.empty()) define_places("lat", "lon", place_.lat, place_.lon);
  }

  void define_axis(const std::string& name, int dim, const SpaceAxis& axis, AxisRole role, bool uneven) {
    Attributes attributes = axis_attributes(axis, role);
    const std::vector<double> bounds = axis.bounds.empty() && uneven ? bounds_between(axis.values, role) : axis.bounds;
    const std::string bounds_name = bounds.empty() ? "" : free_name(name + "_bnds", "bnds");
    if (!bounds.empty()) attributes.push_back({"bounds", bounds_name});
    define_coordinate(name, std::array{dim}, attributes, axis.values);
    if (!bounds.empty()) define_coordinate(bounds_name, std::array{dim, ends_dim()}, {}, bounds);
  }

  // Latitude and longitude of every cell, and their place in `coordinates`.
  void define_places(const std::string& lat, const std::string& lon, std::vector<double> lats,
                     std::vector<double> lons) {
    const std::array names{free_name(lat, "lat"), free_name(lon, "lon")};
    const int lat_id = define_coordinate(names[0], cell_dims_, latitude_attributes(), std::move(lats));
    const int lon_id = define_coordinate(names[1], cell_dims_, longitude_attributes(), std::move(lons));
    for (const int id : {lat_id, lon_id})
      if (!place_.is_sites()) file_.define_storage(id, cell_chunk(), set_.deflate);
    coordinates_.insert(coordinates_.end(), names.begin(), names.end());
  }

  void define_sites() {
    cell_dims_ = {file_.define_dimension("station", place_.cells())};
    const int letters = file_.define_dimension("name_strlen", text_width(place_.site_names));
    names_id_ = file_.define_variable("station_id", NC_CHAR, std::array{cell_dims_[0], letters});
    file_.put_attributes(names_id_, {{"long_name", "name of the site"}, {"cf_role", "timeseries_id"}});
    if (place_.lat.empty()) return;
    // GDAL asks the first variable that is no coordinate for the reference system of the points.
    file_.put_text(names_id_, "grid_mapping", mapping_name_);
    define_places("lat", "lon", place_.lat, place_.lon);
    if (place_.altitude.empty()) return;
    coordinates_.push_back(free_name("altitude", "altitude"));
    define_coordinate(coordinates_.back(), cell_dims_, altitude_attributes(place_.altitude), place_.altitude);
  }

  void define_layers() {
    bool lags = false, orders = false;
    for (const std::size_t map : maps_) {
      lags = lags || set_.maps[map].axis == LayerAxis::lag;
      orders = orders || set_.maps[map].axis == LayerAxis::order;
    }
    if (lags) {
      lag_dim_ = file_.define_dimension("lag", set_.lags);
      std::vector<double> values(set_.lags);
      for (std::size_t k = 0; k < set_.lags; ++k) values[k] = static_cast<double>(k) * set_.time.lag_unit_per_step();
      define_coordinate("lag", std::array{lag_dim_}, lag_attributes(set_.time, set_.lags), std::move(values));
    }
    if (orders) {
      order_dim_ = file_.define_dimension("order", set_.orders);
      std::vector<double> values(set_.orders);
      std::iota(values.begin(), values.end(), 1.0);
      const int id = file_.define_variable("order", NC_INT, std::array{order_dim_});
      file_.put_attributes(id,
                           {{"long_name", "number of the autoregressive coefficient, in steps back"}, {"units", "1"}});
      pending_.emplace_back(id, std::move(values));
    }
  }

  void define_period() {
    if (set_.time.size() == 0) return;
    const Period period = covered_period(set_.time);
    const double begin = set_.time.cf_value(period.begin), end = set_.time.cf_value(period.end);
    define_coordinate("time", {}, time_attributes(set_.time), {begin + (end - begin) / 2});
    define_coordinate("time_bnds", std::array{ends_dim()}, {}, {begin, end});
    coordinates_.emplace_back("time");
  }

  int ends_dim() {
    if (ends_dim_ < 0) ends_dim_ = file_.define_dimension("nv", 2);
    return ends_dim_;
  }

  // ---- maps ----
  // Layers stand left of the cells of a grid, as GDAL and CF 2.4 want them, and right of a site.
  std::vector<int> dims_of(const MapSpec& map) const {
    std::vector<int> dims = cell_dims_;
    if (map.axis == LayerAxis::none) return dims;
    dims.insert(place_.is_sites() ? dims.end() : dims.begin(), map.axis == LayerAxis::lag ? lag_dim_ : order_dim_);
    return dims;
  }

  std::vector<std::size_t> cell_chunk() const {
    return {std::min(place_.rows, kChunkSide), std::min(place_.cols, kChunkSide)};
  }

  std::size_t sites_at_once(const MapSpec& map) const {
    return std::clamp<std::size_t>(kChunkValues / set_.layers(map), 1, place_.cells());
  }

  std::vector<std::size_t> chunk_of(const MapSpec& map) const {
    if (place_.is_sites()) {
      std::vector<std::size_t> chunk{sites_at_once(map)};
      if (map.axis != LayerAxis::none) chunk.push_back(set_.layers(map));
      return chunk;
    }
    std::vector<std::size_t> chunk = cell_chunk();
    if (map.axis != LayerAxis::none) chunk.insert(chunk.begin(), 1);
    return chunk;
  }

  int define_map(const MapSpec& map) {
    return with_stored_type(map.type, [&](auto zero) {
      using T = decltype(zero);
      const int id = file_.define_variable(map.name, netcdf_type<T>(), dims_of(map));
      const auto chunk = chunk_of(map);
      file_.define_storage(id, chunk, set_.deflate);
      // Chunks are written whole and once: a cache of one chunk bounds memory and fixes the order in the file.
      const std::size_t bytes = std::accumulate(chunk.begin(), chunk.end(), sizeof(T), std::multiplies<>());
      file_.check(nc_set_var_chunk_cache(file_.id(), id, bytes, 1, 1.0F), "setting the chunk cache", map.name);
      file_.define_fill(id, static_cast<double>(fill_value<T>()));
      describe_map<T>(id, map);
      return id;
    });
  }

  template <class T>
  void describe_map(int id, const MapSpec& map) {
    const auto text = [&](const char* name, const std::string& value) { file_.put_text(id, name, value); };
    const auto numbers = [&](const char* name, const auto& values) {
      if (values.empty()) return;
      std::vector<T> typed;  // CF: flags and ranges have the type of their variable
      for (const auto value : values) typed.push_back(static_cast<T>(value));
      file_.check(nc_put_att(file_.id(), id, name, netcdf_type<T>(), typed.size(), typed.data()), "writing attributes",
                  map.name);
    };
    text("long_name", map.long_name);
    text("standard_name", map.standard_name);
    text("units", map.units);
    if (map.units.find(" since ") != std::string::npos)
      text("calendar", std::string(calendar_name(set_.time.calendar())));
    text("cell_methods", map.cell_methods);
    text("comment", map.comment);
    text("references", map.references);
    text("ancillary_variables", companions(map));
    numbers("flag_values", map.flag_values);
    numbers("flag_masks", map.flag_masks);
    text("flag_meanings", map.flag_meanings);
    numbers("valid_range", map.valid_range);
    text("grid_mapping", mapping_name_);
    text("coordinates", join(coordinates_, " "));
  }

  // Of the companions a map names, those that are in this file.
  std::string companions(const MapSpec& map) const {
    std::vector<std::string> present;
    for (const std::string& name : split(map.ancillary, ' '))
      if (std::any_of(maps_.begin(), maps_.end(), [&](std::size_t other) { return set_.maps[other].name == name; }))
        present.push_back(name);
    return join(present, " ");
  }

  // ---- values ----
  void write_map(int id, std::size_t map) {
    if (place_.is_sites()) return write_site_map(id, map);
    const MapSpec& spec = set_.maps[map];
    const auto side = cell_chunk();
    std::vector<std::byte> buffer(side[0] * side[1] * stored_bytes(spec.type));
    for (std::size_t layer = 0; layer < set_.layers(spec); ++layer)
      for (std::size_t row = 0; row < place_.rows; row += side[0])
        for (std::size_t col = 0; col < place_.cols; col += side[1]) {
          const Block block{row, std::min(side[0], place_.rows - row), col, std::min(side[1], place_.cols - col)};
          values_.get(map, layer, block, buffer.data());
          std::vector<std::size_t> start{row, col}, count{block.rows, block.cols};
          if (spec.axis != LayerAxis::none) {
            start.insert(start.begin(), layer);
            count.insert(count.begin(), 1);
          }
          file_.put(id, start, count, buffer.data());
        }
  }

  void write_site_map(int id, std::size_t map) {
    const MapSpec& spec = set_.maps[map];
    const std::size_t size = stored_bytes(spec.type), layers = set_.layers(spec), at_once = sites_at_once(spec);
    std::vector<std::byte> column(at_once * size), buffer(at_once * layers * size);
    for (std::size_t site = 0; site < place_.cells(); site += at_once) {
      const std::size_t sites = std::min(at_once, place_.cells() - site);
      for (std::size_t layer = 0; layer < layers; ++layer) {
        values_.get(map, layer, {site, sites, 0, 1}, column.data());
        for (std::size_t one = 0; one < sites; ++one)
          std::memcpy(buffer.data() + (one * layers + layer) * size, column.data() + one * size, size);
      }
      std::vector<std::size_t> start{site}, count{sites};
      if (spec.axis != LayerAxis::none) {
        start.push_back(0);
        count.push_back(layers);
      }
      file_.put(id, start, count, buffer.data());
    }
  }

  const MapSet& set_;
  const Geometry& place_;
  std::span<const std::size_t> maps_;
  const ValueSpool& values_;
  NcFile file_;
  std::set<std::string> taken_;
  std::vector<int> cell_dims_;
  int lag_dim_ = -1, order_dim_ = -1, ends_dim_ = -1, names_id_ = -1;
  std::vector<std::string> coordinates_;
  std::string mapping_name_;
  std::vector<std::pair<int, std::vector<double>>> pending_;  ///< numbers to write when the header is done
};

[[noreturn]] void refuse_read_back(const std::string& path, const std::string& problem) {
  throw Error(ErrorKind::output, "the result written does not read back as it should: " + problem, "file: " + path,
              "check the disk's state and room, then run the job again");
}

}  // namespace

void write_result_netcdf(const std::string& path, const MapSet& set, std::span<const std::size_t> maps,
                         const ValueSpool& values) {
  ResultFile(path, set, maps, values).write();
}

void check_result_netcdf(const std::string& path, const MapSet& set, std::span<const std::size_t> maps,
                         const ValueSpool& values) {
  const bool sites = set.geometry.is_sites();
  try {
    const NcFile file = NcFile::open(path);
    for (const std::size_t map : maps) {
      const MapSpec& spec = set.maps[map];
      const auto found = file.find(spec.name);
      const std::size_t layers = set.layers(spec);
      if (!found || found->size() != layers * set.geometry.cells())
        refuse_read_back(path, fmt::format("map '{}' is not whole", spec.name));
      std::vector<std::size_t> last, one(found->dims.size(), 1);
      for (const NcDim& dim : found->dims) last.push_back(dim.length - 1);
      std::array<std::byte, sizeof(double)> stored{}, wanted{};
      file.check(nc_get_vara(found->group, found->id, last.data(), one.data(), stored.data()), "reading", *found);
      const std::size_t rows = sites ? set.geometry.cells() : set.geometry.rows;
      values.get(map, layers - 1, {rows - 1, 1, sites ? 0 : set.geometry.cols - 1, 1}, wanted.data());
      if (stored != wanted) refuse_read_back(path, fmt::format("the last value of map '{}' differs", spec.name));
    }
  } catch (const Error& error) {
    if (error.kind() == ErrorKind::output) throw;
    refuse_read_back(path, error.problem());
  }
}

}  // namespace lagscape
