#include "lagscape/io/result_writer.h"

#include <fmt/format.h>

#include <algorithm>
#include <filesystem>
#include <utility>

#include "io/result_writer_axes.h"
#include "io/result_writer_csv.h"
#include "io/result_writer_netcdf.h"
#include "io/result_writer_spool.h"
#include "lagscape/base/error.h"
#include "lagscape/io/part_file.h"

namespace lagscape {
namespace {

// What one file of a result holds.
struct Member {
  enum class Kind { netcdf, csv } kind;
  std::string name;  ///< in the result's folder
  std::vector<std::size_t> maps;
};

// Sites: GIS sees points only in a file whose variables all run over the sites alone, so cubes go into a file of their
// own.
std::vector<Member> members_of(const std::filesystem::path& path, const MapSet& set) {
  const std::string name = path.filename().string(), stem = path.stem().string();
  std::vector<std::size_t> all, flat, cubes;
  for (std::size_t map = 0; map < set.maps.size(); ++map) {
    all.push_back(map);
    (set.maps[map].axis == LayerAxis::none ? flat : cubes).push_back(map);
  }
  if (!set.geometry.is_sites()) return {{Member::Kind::netcdf, name, all}};
  std::vector<Member> members{{Member::Kind::netcdf, name, flat}};
  if (!cubes.empty()) members.push_back({Member::Kind::netcdf, stem + "_cubes.nc", cubes});
  members.push_back({Member::Kind::csv, stem + ".csv", flat});
  return members;
}

// Mistakes of the caller that would make a file no program understands.
void require_sound(const MapSet& set) {
  const Geometry& place = set.geometry;
  const auto bug = [](const std::string& problem, const std::string& where) {
    throw Error(ErrorKind::internal, problem, where);
  };
  if (place.cells() == 0) bug("a result without cells", {});
  const auto fits = [&](std::size_t size, std::size_t wanted) { return size == 0 || size == wanted; };
  if (!fits(place.lat.size(), place.cells()) || place.lon.size() != place.lat.size() ||
      !fits(place.altitude.size(), place.cells()))
    bug("coordinates that do not fit the number of cells", place.describe());
  if (place.is_sites() && place.site_names.size() != place.cells()) bug("sites without names", {});
  if ((place.kind == GeometryKind::latlon || place.kind == GeometryKind::projected) &&
      (place.y.values.size() != place.rows || place.x.values.size() != place.cols))
    bug("axes that do not fit the grid", place.describe());
  for (const MapSpec& map : set.maps)
    if (set.layers(map) == 0) bug("a cube without layers", "map: " + map.name);
}

MapSet with_clean_axes(MapSet set) {
  for (SpaceAxis* axis : {&set.geometry.y, &set.geometry.x}) axis->values = without_float_noise(axis->values);
  return set;
}

std::vector<std::string> names_of(const std::vector<Member>& members) {
  std::vector<std::string> names;
  for (const Member& member : members) names.push_back(member.name);
  return names;
}

class Result final : public MapSink {
 public:
  Result(const std::string& path, const MapSet& set, bool replace)
      : set_(with_clean_axes(set)),
        members_(members_of(path, set)),
        files_(std::filesystem::path(path).parent_path(), names_of(members_), replace,
               "name another file in output.file"),
        values_(files_.folder(), set_) {}

  void write(std::size_t map, CellRange cells, std::span<const float> values) override { put(map, cells, values); }
  void write(std::size_t map, CellRange cells, std::span<const double> values) override { put(map, cells, values); }

  void add_global(const Attributes& attributes) override {
    require_open();
    for (const Attribute& one : attributes) {
      const auto same = std::find_if(set_.global.begin(), set_.global.end(),
                                     [&](const Attribute& other) { return other.name == one.name; });
      if (same == set_.global.end())
        set_.global.push_back(one);
      else
        same->value = one.value;
    }
  }

  void commit() override {
    require_open();
    values_.require_complete();
    files_.refuse_taken_names();  // before the long work of assembling; commit() asks again
    try {
      for (const Member& member : members_) assemble(member, files_.part(member.name));
      files_.commit();
    } catch (...) {
      files_.discard();
      throw;
    }
    committed_ = true;
  }

 private:
  template <class Values>
  void put(std::size_t map, CellRange cells, Values values) {
    require_open();
    values_.put(map, cells, values);
  }

  void require_open() const {
    if (committed_)
      throw Error(ErrorKind::internal, "the result is finished already", "file: " + members_.front().name);
  }

  void assemble(const Member& member, const std::string& part) const {
    if (member.kind == Member::Kind::csv) return write_result_csv(part, set_, member.maps, values_);
    write_result_netcdf(part, set_, member.maps, values_);
    check_result_netcdf(part, set_, member.maps, values_);
  }

  MapSet set_;
  bool committed_ = false;
  std::vector<Member> members_;
  PartFiles files_;
  ValueSpool values_;
};

}  // namespace

std::vector<std::string> result_files(const std::string& path, const MapSet& set) {
  std::vector<std::string> paths;
  for (const Member& member : members_of(path, set))
    paths.push_back((std::filesystem::path(path).parent_path() / member.name).string());
  return paths;
}

std::unique_ptr<MapSink> create_result(const std::string& path, const MapSet& set, bool replace) {
  if (std::filesystem::path(path).filename().empty())
    throw Error(ErrorKind::output, "the result has no file name", "file: " + path, "name a file in output.file");
  require_sound(set);
  return std::make_unique<Result>(path, set, replace);
}

}  // namespace lagscape
