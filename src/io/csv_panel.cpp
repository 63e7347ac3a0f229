#include "io/csv_panel.h"

#include <fmt/format.h>
#include <algorithm>
#include <cmath>
#include <filesystem>
#include <limits>
#include <map>
#include <set>
#include <unordered_map>

#include "io/csv_reader.h"
#include "io/grid_geometry.h"
#include "io/time_decode.h"
#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

// Without its folder, which says nothing about the data.
std::string file_name(const std::string& path) { return std::filesystem::path(path).filename().string(); }

bool is_missing_word(std::string_view text) {
  const std::string word = lower(text);
  return word.empty() || word == "na" || word == "nan" || word == "null";
}

// A cell as a number; missing words give NaN. Errors name the place and, for decimal commas, the cure.
double read_number(const CsvReader& reader, std::size_t column) {
  const std::string_view text = trim(reader.cells()[column]);
  if (const auto number = to_number(text)) return *number;
  if (is_missing_word(text)) return kNaN;
  std::string pointed(text);
  std::replace(pointed.begin(), pointed.end(), ',', '.');
  if (pointed != text && to_number(pointed))
    throw Error(ErrorKind::input, fmt::format("'{}' has a decimal comma, expected a decimal point", text),
                reader.where(column), fmt::format("write numbers as {}", pointed));
  throw Error(ErrorKind::input, fmt::format("'{}' is neither a number nor empty, NA, NaN or null", text),
              reader.where(column), "correct the cell, or empty it if the value is missing");
}

// ---- one file -------------------------------------------------------------------------------------------------------

/// One CSV file in memory, rows in file order.
struct PanelFile {
  std::string path;
  std::size_t bytes = 0;
  char separator = ',';
  std::vector<std::string> sites;
  std::string unit;
  FileTimes times;
  std::vector<std::size_t> lines;  ///< line of each row
  std::vector<double> values;      ///< row-major: row * sites + column
};

void check_names(const CsvReader& reader) {
  const auto& header = reader.header();
  const std::string where = fmt::format("file: {}:{}", reader.path(), reader.line());
  if (header.size() < 2)
    throw Error(ErrorKind::input,
                fmt::format("the header has {} column, expected a date and one column a site", header.size()), where,
                "separate columns by comma, semicolon or tab");
  if (const std::string second = lower(header[1]); second == "month" || second == "day" || second == "hour")
    throw Error(ErrorKind::input,
                fmt::format("column 2 is named '{}': the date seems to be spread over several columns", header[1]),
                where, "write the date into the first column, as 1981-01-31");
  std::set<std::string> seen;
  for (std::size_t c = 1; c < header.size(); ++c) {
    if (header[c].empty())
      throw Error(ErrorKind::input, fmt::format("column {} has no name", c + 1), where,
                  "name every site in the header");
    if (!seen.insert(header[c]).second)
      throw Error(ErrorKind::input, fmt::format("two columns are named '{}'", header[c]), where,
                  "give every site its own name");
  }
}

// "# unit: m3 s-1" anywhere in the file states the unit of all its columns.
std::string stated_unit(const CsvReader& reader) {
  constexpr std::string_view kKey = "unit:";
  for (const std::string& comment : reader.comments())
    if (lower(comment.substr(0, kKey.size())) == kKey)
      return std::string(trim(std::string_view(comment).substr(kKey.size())));
  return {};
}

Seconds read_date(const CsvReader& reader, Calendar calendar) {
  const std::string_view text = trim(reader.cells()[0]);
  if (const auto time = parse_iso(calendar, text)) return *time;
  throw Error(
      ErrorKind::input,
      fmt::format("'{}' is not a date of the {} calendar, expected ISO dates such as 1981-01-31 or 1981-01-31T06:00",
                  text, calendar_name(calendar)),
      reader.where(0),
      "write ISO dates in the first column, or, if it holds numbers, tell their unit in the job: [input] time = { unit "
      "= "
      "\"days since 1981-01-01\" }");
}

double read_time_value(const CsvReader& reader) {
  const double value = read_number(reader, 0);
  if (std::isnan(value))
    throw Error(ErrorKind::input, "the time is missing", reader.where(0), "give every row a time, or remove the row");
  return value;
}

Calendar panel_calendar(const std::optional<InputRequest::TimeMend>& mend) {
  if (!mend || !mend->calendar) return Calendar::standard;
  if (const auto calendar = parse_calendar(*mend->calendar)) return *calendar;
  throw Error(ErrorKind::job, fmt::format("calendar '{}' is not one of CF", *mend->calendar), "[input] time",
              "write for example time = { calendar = \"noleap\" }");
}

PanelFile read_panel_file(const std::string& path, const std::optional<InputRequest::TimeMend>& mend,
                          std::vector<std::string>& notes) {
  CsvReader reader(path);
  check_names(reader);
  PanelFile file;
  file.path = path;
  file.bytes = reader.bytes();
  file.separator = reader.separator();
  file.sites.assign(reader.header().begin() + 1, reader.header().end());
  file.times = {path, panel_calendar(mend), {}};
  const bool numeric = mend && mend->unit;
  std::vector<double> numbers;
  while (reader.next()) {
    if (numeric)
      numbers.push_back(read_time_value(reader));
    else
      file.times.times.push_back(read_date(reader, file.times.calendar));
    file.lines.push_back(reader.line());
    for (std::size_t c = 1; c <= file.sites.size(); ++c) file.values.push_back(read_number(reader, c));
  }
  if (numeric)
    file.times = decode_times(path, reader.header()[0], numbers, {*mend->unit, mend->calendar.value_or("")}, notes);
  file.unit = stated_unit(reader);
  return file;
}

// ---- sites ----------------------------------------------------------------------------------------------------------

struct Site {
  double lat = kNaN, lon = kNaN, altitude = kNaN;
};

std::optional<std::size_t> find_column(const CsvReader& reader, std::initializer_list<const char*> names) {
  for (const char* name : names)
    for (std::size_t c = 0; c < reader.header().size(); ++c)
      if (lower(reader.header()[c]) == name) return c;
  return std::nullopt;
}

std::size_t need_column(const CsvReader& reader, std::initializer_list<const char*> names, const char* what) {
  if (const auto column = find_column(reader, names)) return *column;
  throw Error(ErrorKind::input,
              fmt::format("no column holds the {} of the sites (looked for {})", what, fmt::join(names, ", ")),
              fmt::format("file: {}:{}", reader.path(), reader.line()),
              "give the file of sites a header such as name,lon,lat");
}

double read_degrees(const CsvReader& reader, std::size_t column, double low, double high) {
  const double value = read_number(reader, column);
  if (!std::isnan(value) && !(value >= low && value <= high))
    throw Error(ErrorKind::input, fmt::format("{} is not between {} and {} degrees", value, low, high),
                reader.where(column), "correct the coordinate, or the header if latitude and longitude are swapped");
  return value;
}

std::map<std::string, Site> read_sites(const std::string& path, bool& has_altitude) {
  CsvReader reader(path);
  const std::size_t name =
      need_column(reader, {"name", "site", "station", "id", "site_name", "station_name", "station_id"}, "name");
  const std::size_t lon = need_column(reader, {"lon", "longitude", "long"}, "longitude");
  const std::size_t lat = need_column(reader, {"lat", "latitude"}, "latitude");
  const auto altitude = find_column(reader, {"altitude", "elevation", "alt", "elev"});
  has_altitude = altitude.has_value();
  std::map<std::string, Site> sites;
  while (reader.next()) {
    const std::string key(trim(reader.cells()[name]));
    Site site{read_degrees(reader, lat, -90, 90), read_degrees(reader, lon, -180, 360), kNaN};
    if (altitude) site.altitude = read_number(reader, *altitude);
    if (!sites.emplace(key, site).second)
      throw Error(ErrorKind::input, fmt::format("site '{}' is listed twice", key), reader.where(name),
                  "keep one line for each site");
  }
  return sites;
}

// "Alder Weir, Harrow Bridge and 3 more".
std::string some_names(const std::vector<std::string>& names) {
  constexpr std::size_t kShown = 5;
  const std::span<const std::string> shown(names.data(), std::min(names.size(), kShown));
  return join(shown, ", ") + (names.size() > kShown ? fmt::format(" and {} more", names.size() - kShown) : "");
}

// Lays coordinates beside the site names.
void add_coordinates(const std::string& path, Geometry& geometry, std::vector<std::string>& notes) {
  bool has_altitude = false;
  const std::map<std::string, Site> known = read_sites(path, has_altitude);
  std::vector<std::string> unlisted, blank, unused, names;
  for (const auto& [name, site] : known) names.push_back(name);
  for (const std::string& name : geometry.site_names) {
    const auto found = known.find(name);
    const Site site = found == known.end() ? Site{} : found->second;
    if (found == known.end())
      unlisted.push_back(name);
    else if (std::isnan(site.lat) || std::isnan(site.lon))
      blank.push_back(name);
    geometry.lat.push_back(site.lat);
    geometry.lon.push_back(site.lon);
    if (has_altitude) geometry.altitude.push_back(site.altitude);
  }
  const std::string list = file_name(path);
  const std::set<std::string> wanted(geometry.site_names.begin(), geometry.site_names.end());
  std::copy_if(names.begin(), names.end(), std::back_inserter(unused),
               [&](const std::string& name) { return !wanted.contains(name); });
  if (unlisted.size() == geometry.site_names.size())
    throw Error(ErrorKind::input,
                fmt::format("none of the sites of the panel is listed: the panel has {}, the list has {}",
                            some_names(unlisted), names.empty() ? "no line" : some_names(names)),
                "file: " + path, "use the same names in the header of the panel and in the file of sites");
  if (!unlisted.empty())
    notes.push_back(fmt::format("without coordinates, because {} does not list them: {}{}", list, some_names(unlisted),
                                did_you_mean(unlisted.front(), unused)));
  if (!blank.empty())
    notes.push_back(fmt::format("without coordinates, because {} leaves them empty: {}", list, some_names(blank)));
  if (!unused.empty()) notes.push_back(fmt::format("listed in {} but in no panel file: {}", list, some_names(unused)));
}

bool in_box(const std::array<double, 4>& box, double lat, double lon) {
  const double west = box[0], south = box[1], east = box[2], north = box[3];
  const auto turned = [&](double degrees) {
    return degrees - 360 * std::floor((degrees - west) / 360);
  };  // into [west, west + 360)
  return lat >= south && lat <= north && (east - west >= 360 || turned(lon) <= turned(east));
}

// Drops the sites outside the box, and those of which nobody can say whether they lie in it.
void cut_to_box(const std::array<double, 4>& box, Geometry& geometry, std::vector<std::string>& notes) {
  if (geometry.lat.empty())
    throw Error(ErrorKind::job, "[input] box needs the coordinates of the sites", "",
                "name a file of coordinates: sites = \"sites.csv\"");
  std::vector<std::string> unknown;
  std::vector<std::size_t> kept;
  for (std::size_t i = 0; i < geometry.site_names.size(); ++i) {
    if (std::isnan(geometry.lat[i]) || std::isnan(geometry.lon[i]))
      unknown.push_back(geometry.site_names[i]);
    else if (in_box(box, geometry.lat[i], geometry.lon[i]))
      kept.push_back(i);
  }
  if (kept.empty())
    throw Error(ErrorKind::input,
                fmt::format("none of the {} sites lies in the box: they cover {}", geometry.site_names.size(),
                            extent_words(geometry.lat, geometry.lon)),
                "[input] box", "the box is [west, south, east, north] in degrees; widen it or leave it out");
  if (!unknown.empty())
    notes.push_back("left out by the box, because their coordinates are unknown: " + some_names(unknown));
  const auto keep = [&](auto& values) {
    if (values.empty()) return;
    for (std::size_t i = 0; i < kept.size(); ++i) values[i] = values[kept[i]];
    values.resize(kept.size());
  };
  const std::size_t before = geometry.site_names.size();
  keep(geometry.site_names);
  keep(geometry.lat);
  keep(geometry.lon);
  keep(geometry.altitude);
  notes.push_back(fmt::format("{} of {} sites lie in the box", kept.size(), before));
}

// ---- the table ------------------------------------------------------------------------------------------------------

/// Why a value is set aside, or nothing.
struct ValueRules {
  std::vector<double> missing_values;
  std::optional<std::array<double, 2>> valid_range;

  [[nodiscard]] std::size_t ValueCounts::*set_aside(double value) const {
    if (std::isnan(value)) return &ValueCounts::fill;
    if (std::isinf(value)) return &ValueCounts::infinite;
    if (std::find(missing_values.begin(), missing_values.end(), value) != missing_values.end())
      return &ValueCounts::job_missing;
    if (valid_range && !(value >= (*valid_range)[0] && value <= (*valid_range)[1])) return &ValueCounts::out_of_range;
    return nullptr;
  }
};

/// All values of the panel, site after site.
struct Table {
  std::size_t steps = 0;
  std::vector<double> values;       ///< site * steps + step, as read
  std::vector<unsigned char> held;  ///< same layout: 1 if some file has a cell for it
  ValueRules rules;
};

/// Lays the rows of all files on the table and applies the rule for duplicates.
class TableBuilder {
 public:
  TableBuilder(const std::vector<PanelFile>& files, const JoinedAxis& joined, const std::vector<std::string>& names,
               DuplicateRule rule, Table& table)
      : files_(files), joined_(joined), rule_(rule), table_(table) {
    for (std::size_t i = 0; i < names.size(); ++i) index_.emplace(names[i], i);
    table.values.assign(names.size() * table.steps, kNaN);
    table.held.assign(table.values.size(), 0);
  }

  void build() {
    for (std::size_t f = 0; f < files_.size(); ++f)
      for (std::size_t c = 0; c < files_[f].sites.size(); ++c) {
        const auto site = index_.find(files_[f].sites[c]);
        if (site == index_.end()) continue;  // outside the box
        for (std::size_t row = 0; row < files_[f].lines.size(); ++row)
          if (joined_.axis_step[f][row] >= 0) put(f, row, c, site->second);
      }
    for (const auto& [cell, values] : several_) table_.values[cell] = mean_of(values);
  }

 private:
  void put(std::size_t f, std::size_t row, std::size_t column, std::size_t site) {
    const auto step = static_cast<std::size_t>(joined_.axis_step[f][row]);
    const std::size_t cell = site * table_.steps + step;
    const double value = files_[f].values[row * files_[f].sites.size() + column];
    if (table_.held[cell] == 0) {
      table_.held[cell] = 1;
      table_.values[cell] = value;
      return;
    }
    const double earlier = table_.values[cell];
    if (rule_ == DuplicateRule::mean) {
      auto& values = several_[cell];
      if (values.empty()) values.push_back(earlier);
      values.push_back(value);
    } else if (rule_ == DuplicateRule::refuse && !(earlier == value || (std::isnan(earlier) && std::isnan(value)))) {
      refuse(f, row, column, step, earlier, value);
    }
  }

  [[nodiscard]] double mean_of(const std::vector<double>& values) const {
    double sum = 0;
    std::size_t count = 0;
    for (const double value : values) {
      if (table_.rules.set_aside(value) != nullptr) continue;
      sum += value;
      ++count;
    }
    return count > 0 ? sum / static_cast<double>(count) : values.front();
  }

  // The first row that holds this step and site.
  [[nodiscard]] std::string first_holder(const std::string& site, std::size_t step) const {
    for (std::size_t f = 0; f < files_.size(); ++f) {
      if (std::find(files_[f].sites.begin(), files_[f].sites.end(), site) == files_[f].sites.end()) continue;
      for (std::size_t row = 0; row < files_[f].lines.size(); ++row)
        if (joined_.axis_step[f][row] == static_cast<std::int64_t>(step))
          return fmt::format("{}:{}", files_[f].path, files_[f].lines[row]);
    }
    return {};
  }

  [[noreturn]] void refuse(std::size_t f, std::size_t row, std::size_t column, std::size_t step, double earlier,
                           double value) const {
    const std::string& site = files_[f].sites[column];
    const auto text = [](double v) { return std::isnan(v) ? std::string("missing") : number_text(v); };
    throw Error(ErrorKind::input,
                fmt::format("{} of site '{}' is given twice with different values: {} and {}", joined_.axis.label(step),
                            site, text(earlier), text(value)),
                fmt::format("files: {} and {}:{}", first_holder(site, step), files_[f].path, files_[f].lines[row]),
                "remove one of the rows, or choose in the job: [input] duplicates = \"first\" or \"mean\"");
  }

  const std::vector<PanelFile>& files_;
  const JoinedAxis& joined_;
  DuplicateRule rule_;
  Table& table_;
  std::unordered_map<std::string, std::size_t> index_;
  std::map<std::size_t, std::vector<double>> several_;  ///< cells given more than once, for the mean
};

// ---- source and band ------------------------------------------------------------------------------------------------

class PanelBand final : public Band {
 public:
  PanelBand(std::shared_ptr<const Table> table, CellRange cells) : table_(std::move(table)), cells_(cells) {}
  [[nodiscard]] CellRange cells() const override { return cells_; }

  void gather(std::size_t offset, std::size_t count, std::size_t lanes, std::size_t pitch, double* out,
              ValueCounts& counts) const override {
    const std::size_t padded = (count + lanes - 1) / lanes * lanes;
    for (std::size_t cell = 0; cell < padded; ++cell) {
      double* const to = out + cell / lanes * pitch * lanes + cell % lanes;
      const std::size_t from = (cells_.first + offset + cell) * table_->steps;
      for (std::size_t t = 0; t < table_->steps; ++t) to[t * lanes] = cell < count ? decode(from + t, counts) : kNaN;
    }
  }

 private:
  [[nodiscard]] double decode(std::size_t at, ValueCounts& counts) const {
    if (table_->held[at] == 0) return kNaN;
    const double value = table_->values[at];
    const auto reason = table_->rules.set_aside(value);
    if (reason == nullptr) return value;
    ++(counts.*reason);
    return kNaN;
  }

  std::shared_ptr<const Table> table_;
  CellRange cells_;
};

class PanelSource final : public TileSource {
 public:
  PanelSource(Panel panel, std::shared_ptr<const Table> table) : panel_(std::move(panel)), table_(std::move(table)) {}
  [[nodiscard]] const Panel& panel() const override { return panel_; }
  [[nodiscard]] std::span<const unsigned char> excluded() const override { return {}; }
  [[nodiscard]] std::unique_ptr<Band> read(CellRange cells, std::unique_ptr<Band> /*reuse*/) override {
    return std::make_unique<PanelBand>(table_, cells);
  }

 private:
  Panel panel_;
  std::shared_ptr<const Table> table_;
};

// ---- opening --------------------------------------------------------------------------------------------------------

void check_request(const InputRequest& request) {
  if (request.mask)
    throw Error(ErrorKind::job, "[input] mask does not apply to a CSV panel", "",
                "leave out mask, or leave out columns of the panel");
  if (!request.select.empty())
    throw Error(ErrorKind::job, "[input] select does not apply to a CSV panel: it has no further dimension", "",
                "leave out select");
}

std::optional<TimeStep> given_step(const std::optional<InputRequest::TimeMend>& mend) {
  if (!mend || !mend->step) return std::nullopt;
  if (const auto step = parse_duration(*mend->step)) return step;
  throw Error(ErrorKind::job, fmt::format("step '{}' is not an ISO 8601 duration", *mend->step), "[input] time",
              "write for example time = { step = \"P1D\" }");
}

std::string common_unit(const std::vector<PanelFile>& files) {
  const PanelFile* stated = nullptr;
  for (const PanelFile& file : files) {
    if (file.unit.empty()) continue;
    if (stated != nullptr && stated->unit != file.unit)
      throw Error(ErrorKind::input,
                  fmt::format("the files state different units: '{}' and '{}'", stated->unit, file.unit),
                  fmt::format("files: {} and {}", stated->path, file.path),
                  "convert the values of one file, or correct its '# unit:' line");
    stated = &file;
  }
  return stated == nullptr ? "" : stated->unit;
}

// The sites of all files, in the order in which they first appear.
std::vector<std::string> all_sites(const std::vector<PanelFile>& files) {
  std::vector<std::string> names;
  std::set<std::string> seen;
  for (const PanelFile& file : files)
    for (const std::string& site : file.sites)
      if (seen.insert(site).second) names.push_back(site);
  return names;
}

std::string source_line(const PanelFile& file) {
  const std::string name = file_name(file.path);
  if (file.times.times.empty()) return fmt::format("{}, {} bytes, no steps", name, file.bytes);
  const auto [low, high] = std::minmax_element(file.times.times.begin(), file.times.times.end());
  return fmt::format("{}, {} bytes, steps {} to {}", name, file.bytes, iso_text(file.times.calendar, *low),
                     iso_text(file.times.calendar, *high));
}

std::string storage_words(const PanelFile& file) {
  return fmt::format("CSV, separated by {}", file.separator == ','   ? "commas"
                                             : file.separator == ';' ? "semicolons"
                                                                     : "tabs");
}

}  // namespace

bool is_csv_name(const std::string& path) {
  const std::string name = lower(path);
  return name.ends_with(".csv") || name.ends_with(".txt") || name.ends_with(".tsv");
}

std::unique_ptr<TileSource> open_csv_panel(const InputRequest& request,
                                           const Log& /*log: what there is to say stands in Panel::notes*/) {
  check_request(request);
  Panel panel;
  panel.variable = request.variable.empty() ? "value" : request.variable;
  std::vector<PanelFile> files;
  std::vector<FileTimes> times;
  for (const std::string& path : request.files) {
    files.push_back(read_panel_file(path, request.time, panel.notes));
    times.push_back(files.back().times);
    panel.sources.push_back(source_line(files.back()));
  }
  JoinedAxis joined = join_times(times, given_step(request.time), request.period);
  panel.notes.insert(panel.notes.end(), joined.notes.begin(), joined.notes.end());
  panel.axis = joined.axis;
  panel.steps_present = joined.steps_present;
  panel.units = common_unit(files);
  panel.storage = storage_words(files.front());
  panel.stored_bytes_per_value = sizeof(double);

  Geometry& geometry = panel.geometry;
  geometry.kind = GeometryKind::sites;
  geometry.site_names = all_sites(files);
  if (request.sites) add_coordinates(*request.sites, geometry, panel.notes);
  if (request.box) cut_to_box(*request.box, geometry, panel.notes);
  geometry.rows = 1;
  geometry.cols = geometry.site_names.size();

  auto table = std::make_shared<Table>();
  table->steps = panel.axis.size();
  table->rules = {request.missing_values, request.valid_range};
  TableBuilder(files, joined, geometry.site_names, request.duplicates, *table).build();
  return std::make_unique<PanelSource>(std::move(panel), std::move(table));
}

}  // namespace lagscape
