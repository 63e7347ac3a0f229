#include "io/variable_layout.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "io/coordinate_roles.h"
#include "io/value_rules.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr double kSelectTolerance = 1e-6;  // relative: a job writes 0.1 where the file holds 0.1f

/// A variable over some of the dimensions of the one to be read.
struct Companion {
  NcVariable variable;
  Attributes attributes;
  CoordinateRole role = CoordinateRole::none;
  bool of_dimension = false;  ///< 1-D, with the name of its dimension
};

bool is_dim_of(const NcVariable& variable, int dim) { return variable.position(dim).has_value(); }

std::vector<std::string> words_of(const std::string& text) {
  std::vector<std::string> words;
  for (const std::string& part : split(text, ' '))
    if (const auto word = trim(part); !word.empty()) words.emplace_back(word);
  return words;
}

std::string values_text(const std::vector<double>& values) {
  constexpr std::size_t kMost = 12;
  std::vector<std::string> parts;
  for (std::size_t i = 0; i < std::min(values.size(), kMost); ++i) parts.push_back(number_text(values[i]));
  return join(parts, ", ") + (values.size() > kMost ? fmt::format(" ... {}", number_text(values.back())) : "");
}

std::string selection_problem(const std::vector<OpenDimension>& dimensions) {
  std::vector<std::string> parts;
  for (const OpenDimension& dim : dimensions)
    parts.push_back(
        fmt::format("'{}' ({}{})", dim.name, values_text(dim.values), dim.units.empty() ? "" : " " + dim.units));
  return fmt::format("one value has to be chosen of the dimension{} {}", dimensions.size() == 1 ? "" : "s",
                     join(parts, " and "));
}

std::string selection_fix(const std::vector<OpenDimension>& dimensions) {
  std::vector<std::string> parts;
  for (const OpenDimension& dim : dimensions)
    parts.push_back(fmt::format("{} = {}", dim.name, number_text(dim.values.front())));
  return fmt::format("add to [input] for example: select = {{ {} }}", join(parts, ", "));
}

class LayoutFinder {
 public:
  LayoutFinder(const NcFile& file, NcVariable variable, const Selection& select) : file_(file), select_(select) {
    out_.variable = std::move(variable);
    out_.roles.assign(dims().size(), DimRole::fixed);
    out_.fixed.assign(dims().size(), 0);
    taken_.assign(dims().size(), false);
    attributes_ = file_.attributes(out_.variable);
    gather_companions();
  }

  VariableLayout find() {
    find_time();
    apply_selection();
    if (!find_rectangle() && !find_curvilinear() && !find_sites()) find_without_coordinates();
    find_mapping();
    refuse_open_dimensions();
    return std::move(out_);
  }

 private:
  [[nodiscard]] const std::vector<NcDim>& dims() const { return out_.variable.dims; }
  [[nodiscard]] std::string where() const {
    return fmt::format("file: {}, variable: {}", file_.path(), out_.variable.path);
  }

  void gather_companions() {
    const std::vector<std::string> listed = words_of(text_attribute(attributes_, "coordinates"));
    for (NcVariable& one : file_.variables()) {
      if (one.group == out_.variable.group && one.id == out_.variable.id) continue;
      const bool named = std::find(listed.begin(), listed.end(), one.name()) != listed.end();
      if (one.dims.size() > 2 || !(in_scope(one) || (named && one.size() > 0))) continue;
      Companion companion;
      companion.of_dimension = one.dims.size() == 1 && one.name() == one.dims[0].name;
      const bool shares =
          std::all_of(one.dims.begin(), one.dims.end(), [&](const NcDim& d) { return is_dim_of(out_.variable, d.id); });
      if (!shares && one.size() != 1 && one.type != NC_CHAR) continue;
      companion.attributes = file_.attributes(one);
      if (is_number_type(one.type)) companion.role = role_of(one, companion, named);
      companion.variable = std::move(one);
      companions_.push_back(std::move(companion));
    }
  }

  // In the variable's own group or one that encloses it.
  [[nodiscard]] bool in_scope(const NcVariable& one) const {
    const std::string folder = one.path.substr(0, one.path.size() - one.name().size());
    return folder.empty() || out_.variable.path.starts_with(folder);
  }

  [[nodiscard]] static CoordinateRole role_of(const NcVariable& one, const Companion& companion, bool named) {
    const CoordinateRole shown = role_by_attributes(companion.attributes);
    const CoordinateRole meant = role_by_name(one.name());
    // axis = "Y" alone does not tell degrees from kilometres; a name such as "lat" does.
    const bool vague = shown == CoordinateRole::y || shown == CoordinateRole::x;
    if (vague && (meant == CoordinateRole::latitude || meant == CoordinateRole::longitude) &&
        text_attribute(companion.attributes, "standard_name").empty())
      return meant;
    if (shown != CoordinateRole::none) return shown;
    const bool place = meant == CoordinateRole::latitude || meant == CoordinateRole::longitude;
    return companion.of_dimension || named || place ? meant : CoordinateRole::none;
  }

  void take(std::size_t position, DimRole role) {
    out_.roles[position] = role;
    taken_[position] = true;
  }

  /// The coordinate of this role along one dimension that is still free: the dimension's own variable first.
  [[nodiscard]] const Companion* along(CoordinateRole role, std::optional<std::size_t> wanted = std::nullopt) const {
    for (const bool own : {true, false})
      for (const Companion& one : companions_) {
        if (one.role != role || one.of_dimension != own || one.variable.dims.size() != 1) continue;
        const auto position = out_.variable.position(one.variable.dims[0].id);
        if (position && !taken_[*position] && (!wanted || *wanted == *position)) return &one;
      }
    return nullptr;
  }
  [[nodiscard]] std::size_t position_of(const Companion& one) const {
    return *out_.variable.position(one.variable.dims[0].id);
  }

  void find_time() {
    if (const Companion* time = along(CoordinateRole::time)) {
      out_.time = time->variable;
      take(position_of(*time), DimRole::time);
      return;
    }
    for (const Companion& one : companions_)  // one map a file, its time in a scalar
      if (one.role == CoordinateRole::time && one.variable.size() == 1) out_.time = one.variable;
    for (std::size_t i = 0; i < dims().size(); ++i)
      if (role_by_name(dims()[i].name) == CoordinateRole::time && !(out_.time && dims()[i].length > 1)) {
        take(i, DimRole::time);
        return;
      }
  }

  [[nodiscard]] const Companion* coordinate_of(std::size_t position) const {
    for (const Companion& one : companions_)
      if (one.of_dimension && one.variable.dims[0].id == dims()[position].id) return &one;
    return nullptr;
  }

  [[nodiscard]] std::vector<double> values_of(std::size_t position) const {
    const Companion* coordinate = coordinate_of(position);
    if (coordinate != nullptr && is_number_type(coordinate->variable.type))
      return coordinate_values(file_, coordinate->variable);
    std::vector<double> index(dims()[position].length);
    for (std::size_t i = 0; i < index.size(); ++i) index[i] = static_cast<double>(i);
    return index;
  }

  void apply_selection() {
    for (const auto& [name, value] : select_) {
      const auto found =
          std::find_if(dims().begin(), dims().end(), [&n = name](const NcDim& d) { return d.name == n; });
      if (found == dims().end()) {
        std::vector<std::string> names;
        for (const NcDim& dim : dims()) names.push_back(dim.name);
        throw Error(ErrorKind::input,
                    fmt::format("select names the dimension '{}', which the variable does not have{}", name,
                                did_you_mean(name, names)),
                    where(), fmt::format("its dimensions are {}", describe_dims(out_.variable)));
      }
      const auto position = static_cast<std::size_t>(found - dims().begin());
      if (taken_[position])
        throw Error(ErrorKind::input, fmt::format("select cannot hold the time dimension '{}'", name), where(),
                    "choose a span of time by [input] period");
      out_.fixed[position] = nearest(position, name, value);
      take(position, DimRole::fixed);
    }
  }

  [[nodiscard]] std::size_t nearest(std::size_t position, const std::string& name, double value) const {
    const std::vector<double> values = values_of(position);
    std::size_t best = 0;
    for (std::size_t i = 1; i < values.size(); ++i)
      if (!(std::fabs(values[i] - value) >= std::fabs(values[best] - value))) best = i;
    if (!values.empty() &&
        std::fabs(values[best] - value) <= kSelectTolerance * std::max(std::fabs(value), std::fabs(values[best])))
      return best;
    throw Error(ErrorKind::input,
                fmt::format("select asks for {} = {}, which is not among its values: {}", name, number_text(value),
                            values_text(values)),
                where(),
                coordinate_of(position) == nullptr ? "the dimension has no coordinate: give an index, counted from 0"
                                                   : "choose one of the values");
  }

  bool take_pair(const Companion* y, const Companion* x, GeometryKind kind) {
    if (y == nullptr || x == nullptr || position_of(*y) == position_of(*x)) return false;
    out_.kind = kind;
    out_.y = y->variable;
    out_.x = x->variable;
    take(position_of(*y), DimRole::row);
    take(position_of(*x), DimRole::column);
    return true;
  }

  // Two 1-D coordinates along two dimensions: geographic, or projected.
  bool find_rectangle() {
    if (take_pair(along(CoordinateRole::latitude), along(CoordinateRole::longitude), GeometryKind::latlon)) return true;
    const Companion *y = along(CoordinateRole::y), *x = along(CoordinateRole::x);
    if (y == nullptr || x == nullptr) return false;
    const bool surface = pair_of_two(CoordinateRole::latitude) != nullptr;
    const bool mapped = !text_attribute(attributes_, "grid_mapping").empty();
    const bool measured =
        !text_attribute(y->attributes, "standard_name").empty() || !text_attribute(y->attributes, "units").empty();
    if (!mapped && (surface || !measured)) return false;  // plain row and column numbers
    if (!take_pair(y, x, GeometryKind::projected)) return false;
    take_surface();
    return true;
  }

  /// A 2-D coordinate over two dimensions that are not taken as anything but row and column.
  [[nodiscard]] const Companion* pair_of_two(CoordinateRole role) const {
    for (const Companion& one : companions_) {
      if (one.role != role || one.variable.dims.size() != 2) continue;
      const bool free = std::all_of(one.variable.dims.begin(), one.variable.dims.end(), [&](const NcDim& d) {
        const auto position = out_.variable.position(d.id);
        return position && (!taken_[*position] || out_.roles[*position] == DimRole::row ||
                            out_.roles[*position] == DimRole::column);
      });
      if (free && one.variable.dims[0].id != one.variable.dims[1].id) return &one;
    }
    return nullptr;
  }

  bool take_surface() {
    const Companion *lat = pair_of_two(CoordinateRole::latitude), *lon = pair_of_two(CoordinateRole::longitude);
    if (lat == nullptr || lon == nullptr) return false;
    if (!is_dim_of(lon->variable, lat->variable.dims[0].id) || !is_dim_of(lon->variable, lat->variable.dims[1].id))
      return false;
    out_.lat = lat->variable;
    out_.lon = lon->variable;
    return true;
  }

  bool find_curvilinear() {
    if (!take_surface()) return false;
    out_.kind = GeometryKind::curvilinear;
    std::size_t row = *out_.variable.position(out_.lat->dims[0].id),
                column = *out_.variable.position(out_.lat->dims[1].id);
    if (row > column) std::swap(row, column);
    order_by_name(row, column);
    take(row, DimRole::row);
    take(column, DimRole::column);
    return true;
  }

  // (x, y) by name are columns first, whatever their order in the file.
  void order_by_name(std::size_t& row, std::size_t& column) const {
    const auto role = [&](std::size_t at) {
      const Companion* own = coordinate_of(at);
      const auto shown = own == nullptr ? CoordinateRole::none : own->role;
      return shown == CoordinateRole::none ? role_by_name(dims()[at].name) : shown;
    };
    const auto across = [](CoordinateRole r) { return r == CoordinateRole::x || r == CoordinateRole::longitude; };
    const auto along_y = [](CoordinateRole r) { return r == CoordinateRole::y || r == CoordinateRole::latitude; };
    if (across(role(row)) && (along_y(role(column)) || !across(role(column)))) std::swap(row, column);
  }

  bool find_sites() {
    std::optional<std::size_t> position;
    for (std::size_t i = 0; i < dims().size() && !position; ++i) {
      if (taken_[i]) continue;
      const bool placed =
          along(CoordinateRole::latitude, i) != nullptr && along(CoordinateRole::longitude, i) != nullptr;
      if (placed || identified(i)) position = i;
    }
    if (!position) return false;
    take_sites(*position);
    return true;
  }

  [[nodiscard]] bool identified(std::size_t position) const {
    return std::any_of(companions_.begin(), companions_.end(), [&](const Companion& one) {
      return !one.variable.dims.empty() && one.variable.dims[0].id == dims()[position].id &&
             text_attribute(one.attributes, "cf_role") == "timeseries_id";
    });
  }

  void take_sites(std::size_t position) {
    out_.kind = GeometryKind::sites;
    if (const Companion* lat = along(CoordinateRole::latitude, position)) out_.lat = lat->variable;
    if (const Companion* lon = along(CoordinateRole::longitude, position)) out_.lon = lon->variable;
    if (!out_.lat || !out_.lon) out_.lat = out_.lon = std::nullopt;
    for (const Companion& one : companions_) {
      if (one.variable.dims.size() != 1 || one.variable.dims[0].id != dims()[position].id || one.of_dimension) continue;
      const bool height =
          one.role == CoordinateRole::vertical || role_by_name(one.variable.name()) == CoordinateRole::vertical;
      if (height && is_number_type(one.variable.type) && !out_.altitude) out_.altitude = one.variable;
    }
    find_names(position);
    take(position, DimRole::column);
  }

  // Names of sites, the best of: identifiers by cf_role, platform names, any text over the dimension, its numbers.
  void find_names(std::size_t position) {
    int best = 0;
    for (const Companion& one : companions_) {
      if (one.variable.dims.empty() || one.variable.dims[0].id != dims()[position].id) continue;
      const bool text = one.variable.type == NC_STRING ? one.variable.dims.size() == 1
                                                       : one.variable.type == NC_CHAR && one.variable.dims.size() == 2;
      if (!text && one.variable.dims.size() != 1) continue;
      const std::string standard = text_attribute(one.attributes, "standard_name"), name = lower(one.variable.name());
      const bool identifies = text_attribute(one.attributes, "cf_role") == "timeseries_id";
      const bool names_it = standard.starts_with("platform_") || standard.starts_with("station_") ||
                            name.find("name") != std::string::npos || name.find("id") != std::string::npos;
      const int rank = identifies                  ? 5
                       : text && names_it          ? 4
                       : text                      ? 3
                       : standard == "platform_id" ? 2
                       : one.of_dimension          ? 1
                                                   : 0;
      if (rank <= best) continue;
      best = rank;
      out_.names = one.variable;
    }
  }

  // No usable coordinates: the free dimensions that are longer than one are rows and columns, or sites if there is but
  // one.
  void find_without_coordinates() {
    std::vector<std::size_t> free;
    for (std::size_t i = 0; i < dims().size(); ++i)
      if (!taken_[i]) free.push_back(i);
    const auto hinted = [&](CoordinateRole a, CoordinateRole b) {
      for (const std::size_t i : free)
        if (const auto role = role_by_name(dims()[i].name); role == a || role == b) return std::optional(i);
      return std::optional<std::size_t>();
    };
    const auto y = hinted(CoordinateRole::y, CoordinateRole::latitude),
               x = hinted(CoordinateRole::x, CoordinateRole::longitude);
    if (y && x) return take_index_grid(*y, *x);
    std::erase_if(free, [&](std::size_t i) { return dims()[i].length == 1; });
    if (free.size() > 1)
      std::erase_if(free, [&](std::size_t i) {
        const Companion* own = coordinate_of(i);
        return role_by_name(dims()[i].name) == CoordinateRole::vertical ||
               (own != nullptr && own->role == CoordinateRole::vertical);
      });
    if (free.size() >= 2) return take_index_grid(free[free.size() - 2], free[free.size() - 1]);
    if (free.size() == 1) return take_sites(free.front());
    take_single_series();
  }

  // A file of one site, with its place and name in scalars.
  void take_single_series() {
    out_.kind = GeometryKind::sites;
    for (const Companion& one : companions_) {
      const bool scalar = one.variable.size() == 1 && is_number_type(one.variable.type);
      if (scalar && one.role == CoordinateRole::latitude) out_.lat = one.variable;
      if (scalar && one.role == CoordinateRole::longitude) out_.lon = one.variable;
      if (text_attribute(one.attributes, "cf_role") == "timeseries_id") out_.names = one.variable;
    }
    if (!out_.lat || !out_.lon) out_.lat = out_.lon = std::nullopt;
  }

  void take_index_grid(std::size_t row, std::size_t column) {
    out_.kind = GeometryKind::index;
    order_by_name(row, column);
    take(row, DimRole::row);
    take(column, DimRole::column);
    out_.notes.push_back(fmt::format("no coordinates: rows and columns of '{}' and '{}' are numbered", dims()[row].name,
                                     dims()[column].name));
  }

  // "crs" or, in the longer form, "crs: x y other: lat lon".
  void find_mapping() {
    const std::vector<std::string> words = words_of(text_attribute(attributes_, "grid_mapping"));
    if (words.empty()) return;
    const std::string name = words[0].substr(0, words[0].find(':'));
    out_.mapping = file_.find(name, out_.variable.group);
    if (!out_.mapping) out_.notes.push_back(fmt::format("the grid_mapping variable '{}' is not in the file", name));
  }

  void refuse_open_dimensions() const {
    std::vector<OpenDimension> open;
    for (std::size_t i = 0; i < dims().size(); ++i) {
      if (taken_[i] || dims()[i].length == 1) continue;
      const Companion* own = coordinate_of(i);
      open.push_back({dims()[i].name, own == nullptr ? "" : text_attribute(own->attributes, "units"), values_of(i)});
      if (open.back().values.empty())
        throw Error(ErrorKind::input, fmt::format("the dimension '{}' is empty", dims()[i].name), where(),
                    "leave this file out");
    }
    if (!open.empty()) throw NeedsSelection(std::move(open), where());
  }

  const NcFile& file_;
  const Selection& select_;
  Attributes attributes_;
  std::vector<Companion> companions_;
  std::vector<bool> taken_;
  VariableLayout out_;
};

[[noreturn]] void refuse_name(const NcFile& file, const std::string& name) {
  std::vector<std::string> usable;
  for (const NcVariable& one : file.variables())
    if (is_number_type(one.type) && one.dims.size() > 1) usable.push_back(one.path);
  const std::string found =
      usable.empty() ? "it has no variable of numbers with two or more dimensions" : "it has " + join(usable, ", ");
  throw Error(ErrorKind::input, fmt::format("there is no variable '{}'{}", name, did_you_mean(name, usable)),
              "file: " + file.path(), found + " (HDF5 data of compound, enum or reference type cannot be read)");
}

void refuse_ragged(const NcFile& file, const NcVariable& variable) {
  for (const NcVariable& one : file.variables()) {
    if (one.dims.size() != 1) continue;
    const Attributes attributes = file.attributes(one);
    const std::string sample = text_attribute(attributes, "sample_dimension");
    const bool counted = !sample.empty() && variable.dims.size() == 1 && variable.dims[0].name == sample;
    const bool indexed =
        find_attribute(attributes, "instance_dimension") != nullptr && variable.position(one.dims[0].id);
    if (counted || indexed)
      throw Error(
          ErrorKind::input,
          "the sites are stored one after the other in a ragged array (CF-1.10 section 9.3.3), which is not read",
          fmt::format("file: {}, variable: {}", file.path(), variable.path),
          "rewrite it with dimensions (station, time), or as a wide CSV panel with one column a site");
  }
}

}  // namespace

std::optional<std::size_t> VariableLayout::position(DimRole role) const {
  const auto found = std::find(roles.begin(), roles.end(), role);
  return found == roles.end() ? std::nullopt : std::optional(static_cast<std::size_t>(found - roles.begin()));
}

std::size_t VariableLayout::length(DimRole role) const {
  const auto at = position(role);
  return at ? variable.dims[*at].length : 1;
}

NeedsSelection::NeedsSelection(std::vector<OpenDimension> dimensions, const std::string& where)
    : Error(ErrorKind::input, selection_problem(dimensions), where, selection_fix(dimensions)),
      dimensions_(std::move(dimensions)) {}

VariableLayout find_layout(const NcFile& file, const std::string& name, const Selection& select) {
  auto variable = file.find(name);
  if (!variable) refuse_name(file, name);
  const std::string where = fmt::format("file: {}, variable: {}", file.path(), variable->path);
  if (!is_number_type(variable->type))
    throw Error(ErrorKind::input, "the variable holds text or structures, expected numbers", where,
                "choose another variable");
  if (variable->size() == 0)
    throw Error(ErrorKind::input,
                fmt::format("the variable holds no values: its dimensions are {}", describe_dims(*variable)), where,
                "leave this file out");
  refuse_ragged(file, *variable);
  return LayoutFinder(file, std::move(*variable), select).find();
}

std::string describe_dims(const NcVariable& variable) {
  std::vector<std::string> parts;
  for (const NcDim& dim : variable.dims) parts.push_back(fmt::format("{} {}", dim.name, dim.length));
  return parts.empty() ? "none" : join(parts, ", ");
}

}  // namespace lagscape
