#include "forge/space.h"

#include <array>

namespace lagscape {
namespace {

const Attributes kLatitude{{"standard_name", "latitude"}, {"units", "degrees_north"}};
const Attributes kLongitude{{"standard_name", "longitude"}, {"units", "degrees_east"}};

Space define_sites(NcFile& file, const Geometry& geometry) {
  Space space;
  space.dimensions = {file.define_dimension("station", geometry.cols)};
  const int width = file.define_dimension("name_length", text_width(geometry.site_names));
  const int name = file.define_variable("station_name", NC_CHAR, std::array{space.dimensions[0], width});
  file.put_attributes(name, {{"cf_role", "timeseries_id"}, {"long_name", "name of the site"}});
  const int lat = file.define_variable("lat", NC_DOUBLE, space.dimensions);
  file.put_attributes(lat, kLatitude);
  const int lon = file.define_variable("lon", NC_DOUBLE, space.dimensions);
  file.put_attributes(lon, kLongitude);
  space.coordinates = {name, lat, lon};
  std::string words = "lat lon station_name";
  if (!geometry.altitude.empty()) {
    space.coordinates.push_back(file.define_variable("altitude", NC_DOUBLE, space.dimensions));
    file.put_attributes(space.coordinates.back(), {{"standard_name", "altitude"}, {"units", "m"}, {"positive", "up"}});
    words += " altitude";
  }
  space.attributes = {{"coordinates", words}};
  return space;
}

int define_axis(NcFile& file, const SpaceAxis& axis, int dimension, const char* letter) {
  const int variable = file.define_variable(axis.name, NC_DOUBLE, std::array{dimension});
  file.put_attributes(variable, {{"standard_name", axis.standard_name}, {"units", axis.units}, {"axis", letter}});
  return variable;
}

}  // namespace

Space define_space(NcFile& file, const Geometry& geometry) {
  if (geometry.is_sites()) return define_sites(file, geometry);
  Space space;
  space.dimensions = {file.define_dimension(geometry.y.name, geometry.rows),
                      file.define_dimension(geometry.x.name, geometry.cols)};
  if (geometry.kind == GeometryKind::latlon || geometry.kind == GeometryKind::projected) {
    space.coordinates = {define_axis(file, geometry.y, space.dimensions[0], "Y"),
                         define_axis(file, geometry.x, space.dimensions[1], "X")};
  }
  if (geometry.kind == GeometryKind::curvilinear) {
    space.coordinates = {file.define_variable("lat", NC_DOUBLE, space.dimensions),
                         file.define_variable("lon", NC_DOUBLE, space.dimensions)};
    file.put_attributes(space.coordinates[0], kLatitude);
    file.put_attributes(space.coordinates[1], kLongitude);
    space.attributes.push_back({"coordinates", "lat lon"});
  }
  if (geometry.mapping) {
    file.put_attributes(file.define_variable(geometry.mapping->name, NC_INT, {}), geometry.mapping->attributes);
    space.attributes.push_back({"grid_mapping", geometry.mapping->name});
  }
  return space;
}

void write_space(NcFile& file, const Geometry& geometry, const Space& space) {
  if (geometry.is_sites()) {
    file.put_texts(space.coordinates[0], geometry.site_names);
    file.put(space.coordinates[1], geometry.lat);
    file.put(space.coordinates[2], geometry.lon);
    if (!geometry.altitude.empty()) file.put(space.coordinates[3], geometry.altitude);
  } else if (geometry.kind == GeometryKind::curvilinear) {
    file.put(space.coordinates[0], geometry.lat);
    file.put(space.coordinates[1], geometry.lon);
  } else if (geometry.kind != GeometryKind::index) {
    file.put(space.coordinates[0], geometry.y.values);
    file.put(space.coordinates[1], geometry.x.values);
  }
}

}  // namespace lagscape
