#include "forge/recipe.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <limits>
#include <numbers>
#include <set>

#include "lagscape/base/text.h"
#include "lagscape/job/toml_reader.h"

namespace lagscape {
namespace {

namespace fs = std::filesystem;

constexpr std::int64_t kMostSteps = 10'000'000;
constexpr std::int64_t kMostSide = 100'000;
constexpr std::size_t kMostVariables = 100;

struct Bounds {
  double low, high;  ///< both allowed
};
constexpr Bounds kAny{-std::numeric_limits<double>::infinity(), std::numeric_limits<double>::infinity()};
constexpr Bounds kShare{0, 1};
constexpr double kMostGapShare = 0.99;

std::string last_name(const std::string& key) { return key.substr(key.rfind('.') + 1); }

/// Turns a TOML document into a Recipe; problems go to the reader, which tells them together.
class RecipeReader {
 public:
  RecipeReader(TomlReader& toml, std::string folder) : toml_(toml), folder_(std::move(folder)) {}

  Recipe read() {
    refuse_unknown();
    recipe_.text = toml_.source_text();
    recipe_.title = toml_.text("title").value_or("");
    recipe_.seed = static_cast<std::uint64_t>(whole("seed", 1, 0, std::numeric_limits<std::int64_t>::max()));
    read_time();
    read_grid();
    read_variables();
    read_output();
    if (geometry_known_) {
      read_patches();
      read_lakes();
      check_cover();
    }
    toml_.finish();
    return std::move(recipe_);
  }

 private:
  void refuse_unknown();
  void read_time();
  void read_length(Calendar calendar, TimeStep step, Seconds start);
  void read_time_units(Calendar calendar);
  void read_grid();
  void read_axis(SpaceAxis& axis, const std::string& key, std::size_t size, Bounds bounds);
  void read_mapping();
  void read_curvilinear();
  void read_sites();
  void read_variables();
  void read_packing(const std::string& at, ForgedVariable& variable);
  void read_patches();
  [[nodiscard]] Patch read_patch(const std::string& at);
  [[nodiscard]] Process read_process(const std::string& at);
  [[nodiscard]] Gaps read_gaps(const std::string& at, Gaps gaps);
  void read_gap_period(const std::string& key, Gaps& gaps);
  [[nodiscard]] std::vector<bool> read_region(const std::string& at);
  void keep_range(const std::string& key, std::size_t size, std::size_t& first, std::size_t& last);
  void keep_sites(const std::string& key, std::vector<bool>& inside);
  void read_lakes();
  void check_cover();
  void read_output();
  void read_formats();
  void read_chunks();

  void refuse(const std::string& key, const std::string& found, const std::string& expected) {
    toml_.problem(key, fmt::format("{}: found {}, expected {}", last_name(key), found, expected));
  }
  void need(const std::string& key, const std::string& what) {
    if (!toml_.has(key)) toml_.problem(key, fmt::format("{} is missing: give {}", key, what));
  }
  double number(const std::string& key, double fallback, Bounds bounds = kAny) {
    const auto value = toml_.number(key);
    if (!value) return fallback;
    if (*value >= bounds.low && *value <= bounds.high) return *value;
    refuse(key, number_text(*value),
           fmt::format("a number from {} to {}", number_text(bounds.low), number_text(bounds.high)));
    return fallback;
  }
  std::int64_t whole(const std::string& key, std::int64_t fallback, std::int64_t low, std::int64_t high) {
    const auto value = toml_.integer(key);
    if (!value) return fallback;
    if (*value >= low && *value <= high) return *value;
    refuse(key, fmt::format("{}", *value), fmt::format("a whole number from {} to {}", low, high));
    return fallback;
  }
  /// Exactly `count` finite numbers, or nothing.
  std::optional<std::vector<double>> several(const std::string& key, std::size_t count, const std::string& what) {
    auto values = toml_.numbers(key);
    if (!values) return std::nullopt;
    const bool finite = std::all_of(values->begin(), values->end(), [](double v) { return std::isfinite(v); });
    if (values->size() == count && finite) return values;
    refuse(key, finite ? fmt::format("{} numbers", values->size()) : "a number that is not finite", what);
    return std::nullopt;
  }
  template <class Enum>
  Enum choice(const std::string& key, Enum fallback, const std::vector<std::string>& words) {
    const auto word = toml_.choice(key, words);
    return word ? static_cast<Enum>(std::find(words.begin(), words.end(), *word) - words.begin()) : fallback;
  }

  TomlReader& toml_;
  std::string folder_;
  Recipe recipe_;
  bool time_known_ = false, geometry_known_ = false;
};

// ---- what a recipe may say ------------------------------------------------------------------------------------------

void RecipeReader::refuse_unknown() {
  std::vector<std::string> known = recipe_keys();
  // The attributes of a grid mapping are CF's, whatever they are.
  for (const std::string& name : toml_.keys("grid.mapping")) known.push_back("grid.mapping." + name);
  toml_.refuse_unknown(known);
}

// ---- time -----------------------------------------------------------------------------------------------------------

void RecipeReader::read_time() {
  need("time.start", "the date of the first step, such as \"1981-01-15\"");
  need("time.step", "an ISO 8601 duration, such as \"P1M\", \"P1D\", \"PT6H\" or \"P1Y\"");
  const std::string name = toml_.text("time.calendar").value_or("standard");
  const auto calendar = parse_calendar(name);
  if (!calendar) {
    refuse("time.calendar", fmt::format("\"{}\"", name),
           "standard | proleptic_gregorian | julian | noleap | all_leap | 360_day");
    return;
  }
  read_time_units(*calendar);
  std::optional<TimeStep> step;
  if (const auto text = toml_.text("time.step")) {
    step = parse_duration(*text);
    if (!step)
      refuse("time.step", fmt::format("\"{}\"", *text),
             "an ISO 8601 duration in one kind of unit, such as \"P1M\" or \"PT6H\"");
  }
  std::optional<Seconds> start;
  if (const auto text = toml_.text("time.start")) {
    start = parse_iso(*calendar, *text);
    if (!start)
      refuse("time.start", fmt::format("\"{}\"", *text),
             fmt::format("a date of the {} calendar", calendar_name(*calendar)));
  }
  if (step && start) read_length(*calendar, *step, *start);
}

void RecipeReader::read_length(Calendar calendar, TimeStep step, Seconds start) {
  if (toml_.has("time.steps") == toml_.has("time.end")) {
    toml_.problem("time", "give either steps = 480 or end = \"2020-12-31\"");
    return;
  }
  std::int64_t steps = whole("time.steps", 0, 2, kMostSteps);
  if (const auto text = toml_.text("time.end")) {
    const auto end = parse_iso(calendar, *text, true);
    Seconds off = 0;
    if (end) {
      const TimeAxis open(calendar, step, start, 1);
      steps = open.index_of(*end, &off) + (off >= 0 ? 1 : 0);
    }
    if (!end || steps < 2 || steps > kMostSteps) {
      refuse("time.end", fmt::format("\"{}\"", *text),
             fmt::format("a date at least one step after the start, for 2 to {} steps", kMostSteps));
      return;
    }
  }
  if (steps < 2) return;
  recipe_.axis = TimeAxis(calendar, step, start, static_cast<std::size_t>(steps));
  time_known_ = true;
}

void RecipeReader::read_time_units(Calendar calendar) {
  const std::string text = toml_.text("time.units").value_or("days since 1900-01-01");
  const std::size_t since = text.find(" since ");
  const std::string unit = text.substr(0, since);
  const std::vector<std::pair<std::string, Seconds>> units{
      {"seconds", 1}, {"minutes", 60}, {"hours", 3600}, {"days", kDay}};
  const auto found = std::find_if(units.begin(), units.end(), [&](const auto& u) { return u.first == unit; });
  const auto epoch = since == std::string::npos ? std::nullopt : parse_iso(calendar, text.substr(since + 7));
  if (found == units.end() || !epoch) {
    refuse("time.units", fmt::format("\"{}\"", text), "\"days since DATE\", or hours, minutes, seconds");
    return;
  }
  recipe_.time_units = text;
  recipe_.time_unit_seconds = found->second;
  recipe_.time_epoch = *epoch;
}

// ---- space ----------------------------------------------------------------------------------------------------------

void RecipeReader::read_grid() {
  if (toml_.has("site") && toml_.has("grid"))
    toml_.problem("site", "give either a [grid] or sites ([[site]]), not both");
  if (toml_.array_size("site") > 0) return read_sites();
  need("grid.kind", "latlon | projected | curvilinear | index, or list sites as [[site]] instead");
  if (!toml_.has("grid.kind")) return;
  const auto kind = toml_.choice("grid.kind", {"latlon", "projected", "curvilinear", "index"});
  need("grid.rows", "the number of rows");
  need("grid.cols", "the number of columns");
  Geometry& geometry = recipe_.geometry;
  geometry.rows = static_cast<std::size_t>(whole("grid.rows", 0, 1, kMostSide));
  geometry.cols = static_cast<std::size_t>(whole("grid.cols", 0, 1, kMostSide));
  if (!kind || geometry.cells() == 0) return;
  geometry_known_ = true;
  if (*kind == "latlon") {
    geometry.kind = GeometryKind::latlon;
    geometry.y = {
        .name = "lat", .standard_name = "latitude", .units = "degrees_north", .values = {}, .bounds = {}, .extra = {}};
    geometry.x = {
        .name = "lon", .standard_name = "longitude", .units = "degrees_east", .values = {}, .bounds = {}, .extra = {}};
    read_axis(geometry.y, "grid.lat", geometry.rows, {-90, 90});
    read_axis(geometry.x, "grid.lon", geometry.cols, {-360, 720});
  } else if (*kind == "projected") {
    geometry.kind = GeometryKind::projected;
    const std::string units = toml_.text("grid.units").value_or("m");
    geometry.y = {.name = "y",
                  .standard_name = "projection_y_coordinate",
                  .units = units,
                  .values = {},
                  .bounds = {},
                  .extra = {}};
    geometry.x = {.name = "x",
                  .standard_name = "projection_x_coordinate",
                  .units = units,
                  .values = {},
                  .bounds = {},
                  .extra = {}};
    read_axis(geometry.y, "grid.y", geometry.rows, kAny);
    read_axis(geometry.x, "grid.x", geometry.cols, kAny);
    read_mapping();
  } else {
    geometry.y.name = "y";
    geometry.x.name = "x";
    if (*kind == "curvilinear") read_curvilinear();
  }
}

void RecipeReader::read_axis(SpaceAxis& axis, const std::string& key, std::size_t size, Bounds bounds) {
  need(key, fmt::format("the first and the last {} as [first, last] (cell centres)", last_name(key)));
  const auto ends = several(key, 2, "two numbers, the first and the last cell centre");
  if (!ends) return;
  const double first = ends->at(0), last = ends->at(1);
  if ((size > 1 && first == last) || std::min(first, last) < bounds.low || std::max(first, last) > bounds.high) {
    refuse(key, fmt::format("[{}, {}]", number_text(first), number_text(last)),
           fmt::format("two different numbers from {} to {}", number_text(bounds.low), number_text(bounds.high)));
    return;
  }
  for (std::size_t i = 0; i < size; ++i) {
    axis.values.push_back(size == 1 ? first
                                    : first + (last - first) * static_cast<double>(i) / static_cast<double>(size - 1));
  }
}

void RecipeReader::read_mapping() {
  need("grid.mapping.grid_mapping_name", "the CF name of the projection and its parameters in [grid.mapping]");
  GridMapping mapping{"crs", {}};
  std::vector<std::string> names = toml_.keys("grid.mapping");
  std::sort(names.begin(), names.end());
  for (const std::string& name : names) {
    const std::string key = "grid.mapping." + name;
    if (toml_.is_text(key))
      mapping.attributes.push_back({name, toml_.text(key).value_or("")});
    else if (toml_.is_number(key))
      mapping.attributes.push_back({name, std::vector<double>{toml_.number(key).value_or(0)}});
    else if (const auto values = toml_.numbers(key))
      mapping.attributes.push_back({name, *values});
  }
  recipe_.geometry.mapping = std::move(mapping);
}

// A regular grid turned by an angle: straight rows that follow no parallel.
void RecipeReader::read_curvilinear() {
  Geometry& geometry = recipe_.geometry;
  geometry.kind = GeometryKind::curvilinear;
  need("grid.centre", "[lat, lon] of the middle of the grid");
  need("grid.spacing", "[between rows, between columns] in degrees");
  const auto centre = several("grid.centre", 2, "[lat, lon]");
  const auto spacing = several("grid.spacing", 2, "[between rows, between columns] in degrees");
  const double angle = number("grid.angle", 0, {-180, 180}) * std::numbers::pi / 180;
  if (!centre || !spacing) return;
  for (std::size_t row = 0; row < geometry.rows; ++row) {
    for (std::size_t col = 0; col < geometry.cols; ++col) {
      const double up = (static_cast<double>(row) - 0.5 * static_cast<double>(geometry.rows - 1)) * spacing->at(0);
      const double right = (static_cast<double>(col) - 0.5 * static_cast<double>(geometry.cols - 1)) * spacing->at(1);
      geometry.lat.push_back(centre->at(0) + up * std::cos(angle) + right * std::sin(angle));
      geometry.lon.push_back(centre->at(1) + right * std::cos(angle) - up * std::sin(angle));
    }
  }
  const auto [low, high] = std::minmax_element(geometry.lat.begin(), geometry.lat.end());
  if (*low < -90 || *high > 90) {
    toml_.problem(
        "grid", fmt::format("the grid reaches from latitude {} to {}", human_number(*low, 5), human_number(*high, 5)));
  }
}

void RecipeReader::read_sites() {
  Geometry& geometry = recipe_.geometry;
  geometry.kind = GeometryKind::sites;
  geometry.rows = 1;
  geometry.cols = toml_.array_size("site");
  geometry_known_ = true;
  std::size_t with_altitude = 0;
  std::set<std::string> names;
  for (std::size_t i = 0; i < geometry.cols; ++i) {
    const std::string at = fmt::format("site[{}]", i);
    need(at + ".name", "a name");
    need(at + ".lat", "degrees north");
    need(at + ".lon", "degrees east");
    geometry.site_names.push_back(toml_.text(at + ".name").value_or(at));
    const std::string& name = geometry.site_names.back();
    if (!names.insert(name).second)
      refuse(at + ".name", fmt::format("\"{}\" twice", name), "a name of its own for every site");
    if (name.empty() || name.find_first_of(",;\"\t\n") != std::string::npos) {
      refuse(at + ".name", fmt::format("\"{}\"", name), "a name without comma, semicolon, quote, tab or line end");
    }
    geometry.lat.push_back(number(at + ".lat", 0, {-90, 90}));
    geometry.lon.push_back(number(at + ".lon", 0, {-180, 360}));
    if (toml_.has(at + ".altitude")) ++with_altitude;
    geometry.altitude.push_back(number(at + ".altitude", 0));
  }
  if (with_altitude == 0)
    geometry.altitude.clear();
  else if (with_altitude < geometry.cols)
    toml_.problem("site", "give the altitude of every site or of none");
}

// ---- variables ------------------------------------------------------------------------------------------------------

void RecipeReader::read_variables() {
  const std::size_t count = toml_.array_size("variable");
  if (count == 0 || count > kMostVariables) {
    toml_.problem("variable",
                  fmt::format("found {} variables, expected 1 to {}, each as [[variable]]", count, kMostVariables));
  }
  for (std::size_t i = 0; i < std::min(count, kMostVariables); ++i) {
    const std::string at = fmt::format("variable[{}]", i);
    need(at + ".name", "a name");
    ForgedVariable variable;
    variable.name = toml_.text(at + ".name").value_or("");
    const std::set<std::string> taken{"lat", "lon", "x", "y", "time", "crs", "station", "station_name", "altitude"};
    const bool again = std::any_of(recipe_.variables.begin(), recipe_.variables.end(),
                                   [&](const auto& v) { return v.name == variable.name; });
    const bool letters = std::all_of(variable.name.begin(), variable.name.end(),
                                     [](unsigned char c) { return std::isalnum(c) != 0 || c == '_'; });
    if (toml_.has(at + ".name") && (variable.name.empty() || again || !letters || taken.contains(variable.name))) {
      refuse(at + ".name", fmt::format("\"{}\"", variable.name),
             "letters, digits and _, used for no other variable or axis");
    }
    variable.long_name = toml_.text(at + ".long_name").value_or("");
    variable.standard_name = toml_.text(at + ".standard_name").value_or("");
    variable.units = toml_.text(at + ".units").value_or("1");
    read_packing(at, variable);
    recipe_.variables.push_back(std::move(variable));
  }
}

void RecipeReader::read_packing(const std::string& at, ForgedVariable& variable) {
  variable.type = choice(at + ".type", StoredType::f32, {"float", "double", "short", "int"});
  constexpr double kFloatFill = 9.9692099683868690e+36;  // NC_FILL_FLOAT and NC_FILL_DOUBLE
  constexpr double kShortLow = std::numeric_limits<std::int16_t>::min(),
                   kShortHigh = std::numeric_limits<std::int16_t>::max();
  constexpr double kIntLow = std::numeric_limits<std::int32_t>::min(),
                   kIntHigh = std::numeric_limits<std::int32_t>::max();
  if (!variable.packed()) {
    variable.fill = number(at + ".fill", kFloatFill);
    for (const char* key : {".scale", ".offset"}) {
      if (toml_.has(at + key))
        toml_.problem(at + key, fmt::format("{}: only values of type short or int are packed", key + 1));
    }
    return;
  }
  need(at + ".scale", "the unit of the last stored digit, such as 0.001");
  variable.scale = number(at + ".scale", 1);
  if (!(variable.scale > 0)) refuse(at + ".scale", number_text(variable.scale), "a number above 0");
  variable.offset = number(at + ".offset", 0);
  const Bounds range = variable.type == StoredType::i16 ? Bounds{kShortLow, kShortHigh} : Bounds{kIntLow, kIntHigh};
  variable.fill = number(at + ".fill", range.low, range);
  if (variable.fill != std::floor(variable.fill)) refuse(at + ".fill", number_text(variable.fill), "a whole number");
}

// ---- patches --------------------------------------------------------------------------------------------------------

void RecipeReader::read_patches() {
  const std::size_t count = toml_.array_size("patch");
  if (count == 0)
    toml_.problem("patch", "no patch: give at least one [[patch]]; one without a place covers everything");
  for (ForgedVariable& variable : recipe_.variables) variable.patch_of_cell.assign(recipe_.geometry.cells(), kLake);
  for (std::size_t i = 0; i < count; ++i) {
    const std::string at = fmt::format("patch[{}]", i);
    const Patch patch = read_patch(at);
    const std::vector<bool> inside = read_region(at);
    const auto only = toml_.text(at + ".variable");
    bool used = false;
    for (ForgedVariable& variable : recipe_.variables) {
      if (only && *only != variable.name) continue;
      used = true;
      for (std::size_t cell = 0; cell < inside.size(); ++cell) {
        if (inside[cell]) variable.patch_of_cell[cell] = static_cast<int>(variable.patches.size());
      }
      variable.patches.push_back(patch);
    }
    if (!used && only) refuse(at + ".variable", fmt::format("\"{}\"", *only), "the name of a [[variable]]");
  }
}

Patch RecipeReader::read_patch(const std::string& at) {
  need(at + ".name", "a name of one word");
  Patch patch;
  patch.name = toml_.text(at + ".name").value_or("");
  if (patch.name.find_first_of(" \t\n") != std::string::npos) {
    refuse(at + ".name", fmt::format("\"{}\"", patch.name), "one word (it becomes a CF flag meaning)");
  }
  patch.process = read_process(at);
  patch.mean = number(at + ".mean", 0);
  patch.sd = number(at + ".sd", 1, {0, std::numeric_limits<double>::max()});
  patch.trend = number(at + ".trend", 0);
  patch.season = number(at + ".season", 0);
  patch.peak = number(at + ".peak", 0, kShare);
  patch.day_season = number(at + ".day_season", 0);
  patch.day_peak = number(at + ".day_peak", 0, kShare);
  if (const auto values = several(at + ".month_values", 12, "12 numbers, January to December")) {
    patch.month_values.emplace();
    std::copy(values->begin(), values->end(), patch.month_values->begin());
  }
  patch.gaps = toml_.has(at + ".gaps") ? read_gaps(at + ".gaps", {}) : read_gaps("gaps", {});
  return patch;
}

Process RecipeReader::read_process(const std::string& at) {
  const bool both = toml_.has(at + ".ar") && toml_.has(at + ".d");
  if (both) toml_.problem(at + ".d", "give either ar or d: a patch has short or long memory");
  if (const auto d = toml_.number(at + ".d"); d && !both) {
    if (*d > -0.5 && *d < 0.5 && *d != 0) return Process::long_memory(*d);
    refuse(at + ".d", number_text(*d), "a number above -0.5 and below 0.5, not 0");
  }
  const auto coefficients = toml_.numbers(at + ".ar");
  if (!coefficients) return Process::autoregression({});
  if (Process::stationary(*coefficients)) return Process::autoregression(*coefficients);
  std::vector<std::string> texts;
  for (const double value : *coefficients) texts.push_back(number_text(value));
  refuse(at + ".ar", fmt::format("[{}], which is not stationary", join(texts, ", ")),
         "coefficients whose partial autocorrelations all lie inside (-1, 1)");
  return Process::autoregression({});
}

Gaps RecipeReader::read_gaps(const std::string& at, Gaps gaps) {
  gaps.random = number(at + ".random", 0, {0, kMostGapShare});
  gaps.block = number(at + ".block", 0, {0, kMostGapShare});
  for (const double month : toml_.numbers(at + ".months").value_or(std::vector<double>{})) {
    const bool good = month >= 1 && month <= 12 && month == std::floor(month);
    if (good)
      gaps.months.push_back(static_cast<int>(month));
    else
      refuse(at + ".months", number_text(month), "months from 1 to 12");
  }
  if (toml_.has(at + ".period") && time_known_) read_gap_period(at + ".period", gaps);
  return gaps;
}

void RecipeReader::read_gap_period(const std::string& key, Gaps& gaps) {
  const auto dates = toml_.texts(key);
  if (!dates) return;
  const TimeAxis& axis = recipe_.axis;
  std::optional<Seconds> from, to;
  if (dates->size() == 2) {
    from = parse_iso(axis.calendar(), dates->at(0));
    to = parse_iso(axis.calendar(), dates->at(1), true);
  }
  std::size_t first = 0, last = 0, count = 0;
  for (std::size_t t = 0; from && to && t < axis.size(); ++t) {
    if (axis.time(t) < *from || axis.time(t) > *to) continue;
    if (count++ == 0) first = t;
    last = t;
  }
  if (count == 0)
    refuse(key, fmt::format("\"{}\"", join(*dates, "\", \"")),
           "[\"DATE\", \"DATE\"] that hold at least one step between them");
  else
    gaps.period = {first, last};
}

// ---- where patches and lakes lie ------------------------------------------------------------------------------------

void RecipeReader::keep_range(const std::string& key, std::size_t size, std::size_t& first, std::size_t& last) {
  const auto ends = several(key, 2, "[first, last], counted from 0");
  if (!ends) return;
  const double low = ends->at(0), high = ends->at(1);
  if (low < 0 || high < low || high >= static_cast<double>(size) || low != std::floor(low) ||
      high != std::floor(high)) {
    refuse(key, fmt::format("[{}, {}]", number_text(low), number_text(high)),
           fmt::format("[first, last] within 0 to {}", size - 1));
    return;
  }
  first = static_cast<std::size_t>(low);
  last = static_cast<std::size_t>(high);
}

void RecipeReader::keep_sites(const std::string& key, std::vector<bool>& inside) {
  const auto wanted = toml_.texts(key);
  if (!wanted) return;
  const std::vector<std::string>& names = recipe_.geometry.site_names;
  inside.assign(inside.size(), false);
  for (const std::string& name : *wanted) {
    const auto found = std::find(names.begin(), names.end(), name);
    if (found != names.end())
      inside[static_cast<std::size_t>(found - names.begin())] = true;
    else
      refuse(key, fmt::format("\"{}\"", name), "names of [[site]]s" + did_you_mean(name, names));
  }
}

/// Cells of a patch or lake; everywhere if it names no place.
std::vector<bool> RecipeReader::read_region(const std::string& at) {
  const Geometry& geometry = recipe_.geometry;
  std::vector<bool> inside(geometry.cells(), true);
  if (geometry.is_sites()) {
    for (const char* key : {".rows", ".cols", ".circle"}) {
      if (toml_.has(at + key))
        toml_.problem(at + key, fmt::format("{}: sites have no rows; use sites = [\"NAME\"]", key + 1));
    }
    keep_sites(at + ".sites", inside);
    return inside;
  }
  if (toml_.has(at + ".sites")) toml_.problem(at + ".sites", "sites: a grid has none; use rows, cols or circle");
  std::size_t row0 = 0, row1 = geometry.rows - 1, col0 = 0, col1 = geometry.cols - 1;
  keep_range(at + ".rows", geometry.rows, row0, row1);
  keep_range(at + ".cols", geometry.cols, col0, col1);
  const auto circle = several(at + ".circle", 3, "[row, column, radius] in cells");
  for (std::size_t cell = 0; cell < inside.size(); ++cell) {
    const std::size_t row = cell / geometry.cols, col = cell % geometry.cols;
    inside[cell] = row >= row0 && row <= row1 && col >= col0 && col <= col1;
    if (circle && std::hypot(static_cast<double>(row) - circle->at(0), static_cast<double>(col) - circle->at(1)) >
                      circle->at(2)) {
      inside[cell] = false;
    }
  }
  return inside;
}

void RecipeReader::read_lakes() {
  for (std::size_t i = 0; i < toml_.array_size("lake"); ++i) {
    const std::string at = fmt::format("lake[{}]", i);
    if (toml_.keys(at).empty()) toml_.problem(at, "a lake needs a place: rows, cols, circle or sites");
    const std::vector<bool> inside = read_region(at);
    for (ForgedVariable& variable : recipe_.variables) {
      for (std::size_t cell = 0; cell < inside.size(); ++cell) {
        if (inside[cell]) variable.patch_of_cell[cell] = kLake - 1;  // told apart from cells that no patch covers
      }
    }
  }
}

void RecipeReader::check_cover() {
  for (ForgedVariable& variable : recipe_.variables) {
    const auto bare = std::find(variable.patch_of_cell.begin(), variable.patch_of_cell.end(), kLake);
    if (bare != variable.patch_of_cell.end() && !variable.patches.empty()) {
      const std::size_t cell = static_cast<std::size_t>(bare - variable.patch_of_cell.begin());
      const std::string place =
          recipe_.geometry.is_sites()
              ? fmt::format("site '{}'", recipe_.geometry.site_names[cell])
              : fmt::format("row {}, column {}", cell / recipe_.geometry.cols, cell % recipe_.geometry.cols);
      toml_.problem(
          "patch",
          fmt::format("no patch of '{}' covers {}: begin with a patch that names no place, or make it a [[lake]]",
                      variable.name, place));
    }
    std::replace(variable.patch_of_cell.begin(), variable.patch_of_cell.end(), kLake - 1, kLake);
  }
}

// ---- output ---------------------------------------------------------------------------------------------------------

void RecipeReader::read_output() {
  Recipe::Output& output = recipe_.output;
  need("output.folder", "the folder to write to, relative to the recipe");
  need("output.name", "the beginning of the names of the files");
  const std::string folder = toml_.text("output.folder").value_or(".");
  output.folder = (fs::path(toml_.overridden("output.folder") ? "" : folder_) / folder).lexically_normal().string();
  output.name = toml_.text("output.name").value_or("");
  output.sites_file = toml_.text("output.sites_file").value_or(output.name + "_sites.csv");
  for (const char* key : {"output.name", "output.sites_file"}) {
    const auto text = toml_.text(key);
    if (text && (text->empty() || text->find('/') != std::string::npos))
      refuse(key, fmt::format("\"{}\"", *text), "a name without folder");
  }
  output.split = choice("output.split", FileSplit::none, {"none", "year", "decade"});
  output.layout = choice("output.layout", FileLayout::map, {"map", "series", "contiguous"});
  output.deflate = static_cast<int>(whole("output.deflate", 4, 0, 9));
  output.decimals = static_cast<int>(whole("output.decimals", 4, 0, 17));
  output.unlimited = toml_.boolean("output.unlimited").value_or(true);
  output.truth = toml_.boolean("output.truth").value_or(true);
  read_formats();
  read_chunks();
}

void RecipeReader::read_formats() {
  const std::vector<std::string> words{"netcdf4", "classic", "64bit", "cdf5", "csv"};
  const auto names = toml_.texts("output.format");
  if (!names) return;
  std::vector<FileFormat>& formats = recipe_.output.formats;
  formats.clear();
  for (const std::string& name : *names) {
    const auto found = std::find(words.begin(), words.end(), name);
    if (found == words.end())
      refuse("output.format", fmt::format("\"{}\"", name), join(words, " | ") + did_you_mean(name, words));
    else
      formats.push_back(static_cast<FileFormat>(found - words.begin()));
  }
  const auto csvs = std::count(formats.begin(), formats.end(), FileFormat::csv);
  if (csvs > 1 || std::ssize(formats) - csvs > 1)
    toml_.problem("output.format", "format: give one NetCDF format, csv, or one of each");
  const bool csv = csvs > 0;
  if (csv && geometry_known_ && !recipe_.geometry.is_sites())
    toml_.problem("output.format", "format: csv is for sites, not for grids");
  if (csv && recipe_.variables.size() > 1) toml_.problem("output.format", "format: a csv file holds one variable");
}

void RecipeReader::read_chunks() {
  Recipe::Output& output = recipe_.output;
  const bool netcdf4 =
      std::find(output.formats.begin(), output.formats.end(), FileFormat::netcdf4) != output.formats.end();
  for (const char* key : {"output.chunks", "output.deflate"}) {
    if (toml_.has(key) && !netcdf4)
      toml_.problem(key, fmt::format("{}: only netcdf4 files have chunks", last_name(key)));
    if (toml_.has(key) && output.layout == FileLayout::contiguous) {
      toml_.problem(key, fmt::format("{}: layout = \"contiguous\" means no chunks", last_name(key)));
    }
  }
  if (output.layout != FileLayout::map && !netcdf4 && geometry_known_ && !recipe_.geometry.is_sites()) {
    toml_.problem("output.layout", "layout: a grid in this format is always stored map after map");
  }
  const auto sizes = several("output.chunks", 3, "[time steps, rows, columns]");
  if (!sizes) return;
  if (std::any_of(sizes->begin(), sizes->end(),
                  [](double v) { return v < 1 || v != std::floor(v) || v > static_cast<double>(kMostSteps); })) {
    refuse("output.chunks", "a size that is no whole number above 0", "[time steps, rows, columns]");
    return;
  }
  output.chunks.emplace();
  for (std::size_t i = 0; i < 3; ++i) (*output.chunks)[i] = static_cast<std::size_t>(sizes->at(i));
}

}  // namespace

const std::vector<std::string>& recipe_keys() {
  static const std::vector<std::string> keys = [] {
    constexpr std::array<std::pair<const char*, const char*>, 10> kTables{{
        {"", "seed title"},
        {"time.", "start step steps end calendar units"},
        {"grid.", "kind rows cols lat lon y x units mapping centre spacing angle"},
        {"site[].", "name lat lon altitude"},
        {"variable[].", "name long_name standard_name units type scale offset fill"},
        {"patch[].",
         "name variable rows cols circle sites ar d sd mean trend season peak month_values day_season day_peak"},
        {"patch[].gaps.", "random months block period"},
        {"gaps.", "random months block period"},
        {"lake[].", "rows cols circle sites"},
        {"output.", "folder name format split layout chunks deflate unlimited decimals sites_file truth"},
    }};
    std::vector<std::string> all;
    for (const auto& [table, names] : kTables) {
      for (const std::string& name : split(names, ' ')) all.push_back(table + name);
    }
    return all;
  }();
  return keys;
}

Recipe read_recipe(const std::string& path, const std::vector<std::string>& overrides) {
  TomlReader toml = TomlReader::from_file(path, overrides);
  const std::string folder = toml.folder();
  return RecipeReader(toml, folder).read();
}

Recipe parse_recipe(const std::string& text, const std::string& name, const std::string& folder,
                    const std::vector<std::string>& overrides) {
  TomlReader toml = TomlReader::from_text(text, name, overrides);
  return RecipeReader(toml, folder).read();
}

}  // namespace lagscape
