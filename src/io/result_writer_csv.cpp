#include "io/result_writer_csv.h"

#include <fmt/format.h>

#include <cmath>
#include <fstream>
#include <vector>

#include "lagscape/io/part_file.h"

namespace lagscape {
namespace {

std::string quoted(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  std::string out = "\"";
  for (const char letter : text) out += letter == '"' ? std::string("\"\"") : std::string(1, letter);
  return out + "\"";
}

template <class T>
std::string number(T value) {
  if constexpr (std::numeric_limits<T>::is_integer)
    return value == fill_value<T>() ? "" : std::to_string(value);
  else
    return std::isnan(value) ? "" : fmt::format("{}", value);  // shortest text that reads back the same
}

// The texts of one map, a site each.
std::vector<std::string> column(const MapSet& set, std::size_t map, const ValueSpool& values) {
  const MapSpec& spec = set.maps[map];
  return with_stored_type(spec.type, [&](auto zero) {
    using T = decltype(zero);
    std::vector<T> numbers(set.geometry.cells());
    values.get(map, 0, {0, numbers.size(), 0, 1}, reinterpret_cast<std::byte*>(numbers.data()));
    std::vector<std::string> texts;
    for (const T value : numbers) {
      const bool time = spec.units.find(" since ") != std::string::npos && std::isfinite(static_cast<double>(value));
      texts.push_back(time ? iso_text(set.time.calendar(), std::llround(static_cast<double>(value) * kDay))
                           : number(value));
    }
    return texts;
  });
}

std::vector<std::string> column(const std::vector<double>& numbers) {
  std::vector<std::string> texts;
  for (const double value : numbers) texts.push_back(number(value));
  return texts;
}

}  // namespace

void write_result_csv(const std::string& path, const MapSet& set, std::span<const std::size_t> maps,
                      const ValueSpool& values) {
  std::string header = "station_id";
  std::vector<std::vector<std::string>> columns;
  const auto add = [&](const std::string& name, std::vector<std::string> texts) {
    header += "," + quoted(name);
    columns.push_back(std::move(texts));
  };
  const Geometry& place = set.geometry;
  if (!place.lat.empty()) {
    add("lat", column(place.lat));
    add("lon", column(place.lon));
  }
  if (!place.altitude.empty()) add("altitude", column(place.altitude));
  for (const std::size_t map : maps) add(set.maps[map].name, column(set, map, values));

  std::ofstream out(path, std::ios::binary | std::ios::trunc);
  out << header << "\r\n";
  for (std::size_t site = 0; site < place.cells(); ++site) {
    out << quoted(place.site_names[site]);
    for (const auto& texts : columns) out << ',' << texts[site];
    out << "\r\n";
  }
  close_text(out, path);
}

}  // namespace lagscape
