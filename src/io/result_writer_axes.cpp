#include "io/result_writer_axes.h"

#include <fmt/format.h>
#include <algorithm>
#include <array>
#include <cmath>
#include <string>
#include <string_view>

#include "lagscape/base/text.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {
namespace {

constexpr const char* kWgs84Wkt =
    "GEOGCRS[\"WGS 84\",DATUM[\"World Geodetic System 1984\",ELLIPSOID[\"WGS 84\",6378137,298.257223563,"
    "LENGTHUNIT[\"metre\",1]]],PRIMEM[\"Greenwich\",0,ANGLEUNIT[\"degree\",0.0174532925199433]],CS[ellipsoidal,2],"
    "AXIS[\"latitude\",north,ORDER[1],ANGLEUNIT[\"degree\",0.0174532925199433]],AXIS[\"longitude\",east,ORDER[2],"
    "ANGLEUNIT[\"degree\",0.0174532925199433]],ID[\"EPSG\",4326]]";
constexpr double kWgs84Axis = 6378137, kWgs84Flattening = 298.257223563;

GridMapping wgs84() {
  return {"crs",
          {{"grid_mapping_name", "latitude_longitude"},
           {"longitude_of_prime_meridian", std::vector<double>{0}},
           {"semi_major_axis", std::vector<double>{kWgs84Axis}},
           {"inverse_flattening", std::vector<double>{kWgs84Flattening}},
           {"crs_wkt", kWgs84Wkt}}};
}

// True for a mapping in degrees on an earth of its own, which our WGS 84 must not overwrite.
bool other_earth(const GridMapping& mapping) {
  if (text_attribute(mapping.attributes, "grid_mapping_name") != "latitude_longitude") return false;
  const auto differs = [&](const char* name, double usual) {
    const auto value = number_attribute(mapping.attributes, name);
    return !value.empty() && std::abs(value.front() - usual) > 1e-6 * usual;
  };
  const auto meridian = number_attribute(mapping.attributes, "longitude_of_prime_meridian");
  return find_attribute(mapping.attributes, "earth_radius") != nullptr || differs("semi_major_axis", kWgs84Axis) ||
         differs("inverse_flattening", kWgs84Flattening) || (!meridian.empty() && meridian.front() != 0);
}

// The input's attributes but for those that speak of its storage, or of its extent (GDAL's own GeoTransform would win
// over the coordinates of a result that covers a part of the input).
GridMapping carried(GridMapping mapping) {
  std::erase_if(mapping.attributes, [](const Attribute& one) {
    return one.name == "GeoTransform" || (one.name.starts_with('_') && !one.name.starts_with("_Coordinate"));
  });
  return mapping;
}

bool described_by_us(std::string_view name) {
  static constexpr std::array<std::string_view, 13> ours{
      "standard_name", "units",        "axis",        "bounds",    "calendar",    "scale_factor", "add_offset",
      "missing_value", "grid_mapping", "valid_range", "valid_min", "coordinates", "valid_max"};
  return name.starts_with('_') || std::find(ours.begin(), ours.end(), name) != ours.end();
}

}  // namespace

Attributes latitude_attributes() {
  return {{"standard_name", "latitude"}, {"long_name", "latitude"}, {"units", "degrees_north"}};
}

Attributes longitude_attributes() {
  return {{"standard_name", "longitude"}, {"long_name", "longitude"}, {"units", "degrees_east"}};
}

Attributes altitude_attributes(std::span<const double> altitude) {
  Attributes out{{"standard_name", "altitude"}, {"long_name", "altitude"}, {"units", "m"}, {"positive", "up"}};
  if (std::all_of(altitude.begin(), altitude.end(), [](double value) { return std::isfinite(value); }))
    out.push_back({"axis", "Z"});
  return out;
}

Attributes axis_attributes(const SpaceAxis& axis, AxisRole role) {
  const bool y = role.letter == 'Y';
  Attributes out;
  if (role.kind == GeometryKind::latlon) {
    out = y ? latitude_attributes() : longitude_attributes();
    std::erase_if(out, [](const Attribute& one) { return one.name == "long_name"; });
  } else {
    const std::string usual = y ? "projection_y_coordinate" : "projection_x_coordinate";
    out.push_back({"standard_name", axis.standard_name.empty() ? usual : axis.standard_name});
    if (!axis.units.empty()) out.push_back({"units", axis.units});
  }
  out.push_back({"axis", std::string(1, role.letter)});
  for (const Attribute& one : axis.extra)
    if (!described_by_us(one.name)) out.push_back(one);
  return out;
}

Attributes lag_attributes(const TimeAxis& axis, std::size_t lags) {
  Attributes out{{"long_name", "lag"}, {"units", axis.lag_unit()}};
  std::vector<std::int64_t> steps(lags);
  for (std::size_t k = 0; k < lags; ++k) steps[k] = static_cast<std::int64_t>(k);
  out.push_back({"steps", std::move(steps)});
  if (axis.step().kind != StepKind::seconds)
    out.push_back({"comment", "counts calendar " + axis.lag_unit() + "s, which are not all of the same length"});
  return out;
}

Attributes time_attributes(const TimeAxis& axis) {
  return {{"standard_name", "time"},
          {"long_name", "middle of the period covered"},
          {"units", axis.cf_units()},
          {"calendar", std::string(calendar_name(axis.calendar()))},
          {"bounds", "time_bnds"}};
}

Period covered_period(const TimeAxis& axis) {
  const Calendar calendar = axis.calendar();
  const Seconds first = axis.time(0), last = axis.time(axis.size() - 1);
  const TimeStep step = axis.step();
  if (step.kind == StepKind::seconds) {
    // A time of day in a record of whole days marks the day, not the moment at which the day begins.
    const bool days = step.count % kDay == 0;
    const auto begin = [&](Seconds time) { return days ? floor_div(time, kDay) * kDay : time; };
    return {begin(first), begin(last) + step.count};
  }
  const auto start = [&](Seconds time, std::int64_t after) {
    const std::int64_t month = month_number(calendar, moment_of(calendar, time).date);
    const std::int64_t slot = step.kind == StepKind::years ? 12 * floor_div(month, 12) : month;
    return seconds_of(calendar, month_start(calendar, slot + after));
  };
  return {start(first, 0), start(last, step.kind == StepKind::years ? 12 * step.count : step.count)};
}

std::vector<double> without_float_noise(std::span<const double> centres) {
  std::vector<double> out(centres.begin(), centres.end());
  if (out.size() < 3 || out.front() == out.back()) return out;
  const auto rounded = [](double value) { return static_cast<double>(static_cast<float>(value)); };
  const bool floats = std::all_of(out.begin(), out.end(), [&](double value) { return value == rounded(value); });
  if (!floats && evenly_spaced(centres)) return out;
  // The shortest decimal that reads back as the same float is what was meant: 59.95, not 59.95000076.
  const auto meant = [&](double value) {
    return floats ? to_number(fmt::format("{}", static_cast<float>(value))).value_or(value) : value;
  };
  const double first = meant(out.front()), last = meant(out.back());
  const double step = (last - first) / static_cast<double>(out.size() - 1);
  const double noise = 1.2e-7 * std::max(std::abs(first), std::abs(last));  // one unit in the last place of float32
  for (std::size_t i = 0; i < out.size(); ++i) {
    const double even = first + static_cast<double>(i) * step;
    if (std::abs(out[i] - even) > noise) return {centres.begin(), centres.end()};
    out[i] = even;
  }
  return out;
}

bool evenly_spaced(std::span<const double> centres) {
  if (centres.size() < 3) return true;
  const double step = (centres.back() - centres.front()) / static_cast<double>(centres.size() - 1);
  for (std::size_t i = 0; i < centres.size(); ++i)
    if (std::abs(centres[i] - (centres.front() + static_cast<double>(i) * step)) > 1e-4 * std::abs(step)) return false;
  return true;
}

std::vector<double> bounds_between(std::span<const double> centres, AxisRole role) {
  const std::size_t size = centres.size();
  if (size < 2) return {};
  const auto end = [&](double value) {
    return role.letter == 'Y' && role.kind == GeometryKind::latlon ? std::clamp(value, -90.0, 90.0) : value;
  };
  std::vector<double> out(2 * size);
  for (std::size_t i = 0; i < size; ++i) {
    const double before = i > 0 ? centres[i - 1] : 2 * centres[0] - centres[1];
    const double after = i + 1 < size ? centres[i + 1] : 2 * centres[i] - centres[i - 1];
    out[2 * i] = end((before + centres[i]) / 2);
    out[2 * i + 1] = end((centres[i] + after) / 2);
  }
  return out;
}

std::vector<double> spread_rows(const Geometry& place) {
  std::vector<double> out;
  out.reserve(place.cells());
  for (const double value : place.y.values) out.insert(out.end(), place.cols, value);
  return out;
}

std::vector<double> spread_cols(const Geometry& place) {
  std::vector<double> out;
  out.reserve(place.cells());
  for (std::size_t row = 0; row < place.rows; ++row)
    out.insert(out.end(), place.x.values.begin(), place.x.values.end());
  return out;
}

std::optional<GridMapping> mapping_of(const Geometry& place) {
  const bool degrees = place.kind == GeometryKind::latlon || place.kind == GeometryKind::curvilinear ||
                       (place.is_sites() && !place.lat.empty());
  if (place.kind == GeometryKind::projected && place.mapping) return carried(*place.mapping);
  if (!degrees) return std::nullopt;
  if (place.mapping && other_earth(*place.mapping)) return carried(*place.mapping);
  return wgs84();
}

}  // namespace lagscape
