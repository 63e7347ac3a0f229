#include "forge/space.h"

#include <netcdf.h>

#include <algorithm>

namespace lagscape {
namespace {

const Attributes kLatitude{{"standard_name", "latitude"}, {"units", "degrees_north"}};
const Attributes kLongitude{{"standard_name", "longitude"}, {"units", "degrees_east"}};

std::size_t longest(const std::vector<std::string>& texts) {
  std::size_t width = 1;
  for (const std::string& text : texts) width = std::max(width, text.size());
  return width;
}

Space define_sites(NcWriter& file, const Geometry& geometry) {
  Space space;
  space.dimensions = {file.dimension("station", geometry.cols)};
  const int width = file.dimension("name_length", longest(geometry.site_names));
  const int name = file.variable("station_name", NC_CHAR, {space.dimensions[0], width});
  file.attributes(name, {{"cf_role", "timeseries_id"}, {"long_name", "name of the site"}});
  const int lat = file.variable("lat", NC_DOUBLE, space.dimensions);
  file.attributes(lat, kLatitude);
  const int lon = file.variable("lon", NC_DOUBLE, space.dimensions);
  file.attributes(lon, kLongitude);
  space.coordinates = {name, lat, lon};
  std::string words = "lat lon station_name";
  if (!geometry.altitude.empty()) {
    space.coordinates.push_back(file.variable("altitude", NC_DOUBLE, space.dimensions));
    file.attributes(space.coordinates.back(), {{"standard_name", "altitude"}, {"units", "m"}, {"positive", "up"}});
    words += " altitude";
  }
  space.attributes = {{"coordinates", words}};
  return space;
}

int define_axis(NcWriter& file, const SpaceAxis& axis, int dimension, const char* letter) {
  const int variable = file.variable(axis.name, NC_DOUBLE, {dimension});
  file.attributes(variable, {{"standard_name", axis.standard_name}, {"units", axis.units}, {"axis", letter}});
  return variable;
}

}  // namespace

Space define_space(NcWriter& file, const Geometry& geometry) {
  if (geometry.is_sites()) return define_sites(file, geometry);
  Space space;
  space.dimensions = {file.dimension(geometry.y.name, geometry.rows), file.dimension(geometry.x.name, geometry.cols)};
  if (geometry.kind == GeometryKind::latlon || geometry.kind == GeometryKind::projected) {
    space.coordinates = {define_axis(file, geometry.y, space.dimensions[0], "Y"),
                         define_axis(file, geometry.x, space.dimensions[1], "X")};
  }
  if (geometry.kind == GeometryKind::curvilinear) {
    space.coordinates = {file.variable("lat", NC_DOUBLE, space.dimensions),
                         file.variable("lon", NC_DOUBLE, space.dimensions)};
    file.attributes(space.coordinates[0], kLatitude);
    file.attributes(space.coordinates[1], kLongitude);
    space.attributes.push_back({"coordinates", "lat lon"});
  }
  if (geometry.mapping) {
    file.attributes(file.variable(geometry.mapping->name, NC_INT, {}), geometry.mapping->attributes);
    space.attributes.push_back({"grid_mapping", geometry.mapping->name});
  }
  return space;
}

void write_space(NcWriter& file, const Geometry& geometry, const Space& space) {
  if (geometry.is_sites()) {
    file.put_texts(space.coordinates[0], geometry.site_names, longest(geometry.site_names));
    file.put(space.coordinates[1], {0}, {geometry.cols}, geometry.lat.data());
    file.put(space.coordinates[2], {0}, {geometry.cols}, geometry.lon.data());
    if (!geometry.altitude.empty()) file.put(space.coordinates[3], {0}, {geometry.cols}, geometry.altitude.data());
  } else if (geometry.kind == GeometryKind::curvilinear) {
    file.put(space.coordinates[0], {0, 0}, {geometry.rows, geometry.cols}, geometry.lat.data());
    file.put(space.coordinates[1], {0, 0}, {geometry.rows, geometry.cols}, geometry.lon.data());
  } else if (geometry.kind != GeometryKind::index) {
    file.put(space.coordinates[0], {0}, {geometry.rows}, geometry.y.values.data());
    file.put(space.coordinates[1], {0}, {geometry.cols}, geometry.x.values.data());
  }
}

}  // namespace lagscape
