#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>

#include "forge/data_files.h"
#include "forge/space.h"
#include "lagscape/base/text.h"
#include "lagscape/base/units.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// One truth map: a number for each patch.
struct TruthMap {
  std::string name, long_name, units;
  std::function<double(const Patch&)> value;
};

std::vector<TruthMap> truth_maps(const ForgedVariable& variable, const TimeAxis& axis) {
  const std::string& unit = variable.units;
  return {
      {"decorrelation_time",
       "decorrelation time: 1 + 2 times the sum of all autocorrelations; missing with long memory, where it does not "
       "exist",
       axis.lag_unit(), [&axis](const Patch& p) { return p.process.decorrelation_time() * axis.lag_unit_per_step(); }},
      {"lag1_autocorrelation", "autocorrelation at a lag of one step", "1",
       [](const Patch& p) { return p.process.autocorrelation(1)[1]; }},
      {"long_memory_exponent", "exponent d of ARFIMA(0,d,0); 0 where memory is short", "1",
       [](const Patch& p) { return p.process.exponent(); }},
      {"trend_slope", "linear trend", rate_unit(unit, "year"), [](const Patch& p) { return p.trend; }},
      {"mean", "mean of the record without trend, season and noise", unit, [](const Patch& p) { return p.mean; }},
      {"season_amplitude", "amplitude of the yearly wave", difference_unit(unit),
       [](const Patch& p) { return p.season; }},
      {"noise_sd", "standard deviation of the noise about mean, trend and season", difference_unit(unit),
       [](const Patch& p) { return p.sd; }},
      {"innovation_sd", "standard deviation of what the past of the noise does not predict", difference_unit(unit),
       [](const Patch& p) { return p.sd * std::sqrt(p.process.innovation_variance()); }},
  };
}

std::vector<double> by_cell(const ForgedVariable& variable, const std::function<double(const Patch&)>& value) {
  std::vector<double> of_patch, of_cell;
  for (const Patch& patch : variable.patches) of_patch.push_back(value(patch));
  for (const int patch : variable.patch_of_cell)
    of_cell.push_back(patch == kLake ? kNaN : of_patch[static_cast<std::size_t>(patch)]);
  return of_cell;
}

std::size_t highest_order(const ForgedVariable& variable) {
  std::size_t order = 0;
  for (const Patch& patch : variable.patches) order = std::max(order, patch.process.coefficients().size());
  return order;
}

class TruthFile {
 public:
  TruthFile(const Recipe& recipe, std::size_t variable, const std::string& path)
      : recipe_(recipe),
        variable_(recipe.variables[variable]),
        file_(NcFile::create(path)),
        space_(define_space(file_, recipe.geometry)) {}

  void write(const std::vector<std::size_t>& missing) {
    const std::vector<TruthMap> maps = truth_maps(variable_, recipe_.axis);
    std::vector<int> ids;
    for (const TruthMap& map : maps) ids.push_back(define(map.name, map.long_name, map.units, {}));
    const int share = define("gap_share", "share of the steps that are missing", "1", {});
    const int patch = define_patch();
    const std::size_t orders = highest_order(variable_);
    if (orders > 0) define_coefficients(orders);
    file_.put_attributes(
        NC_GLOBAL, provenance(recipe_, fmt::format("What is true of '{}', cell by cell, of data made by a recipe.",
                                                   variable_.name)));
    file_.put_attributes(NC_GLOBAL, {{"recipe", recipe_.text}});
    file_.end_define();
    write_space(file_, recipe_.geometry, space_);
    for (std::size_t i = 0; i < maps.size(); ++i) put(ids[i], by_cell(variable_, maps[i].value));
    std::vector<double> shares;
    for (const std::size_t count : missing)
      shares.push_back(static_cast<double>(count) / static_cast<double>(recipe_.axis.size()));
    put(share, shares);
    put(patch, std::vector<double>(variable_.patch_of_cell.begin(), variable_.patch_of_cell.end()));
    for (std::size_t order = 0; order < orders; ++order) put_coefficients(order);
    file_.close();
  }

 private:
  int define(const std::string& name, const std::string& long_name, const std::string& units,
             std::vector<int> dimensions) {
    dimensions.insert(dimensions.end(), space_.dimensions.begin(), space_.dimensions.end());
    const int id = file_.define_variable(name, NC_DOUBLE, dimensions);
    file_.define_fill(id, kNaN);
    file_.put_attributes(id, {{"long_name", long_name}, {"units", units}});
    file_.put_attributes(id, space_.attributes);
    return id;
  }
  int define_patch() {
    const int id = file_.define_variable("patch", NC_INT, space_.dimensions);
    std::string names;
    std::vector<std::int64_t> values;
    for (const Patch& patch : variable_.patches) {
      values.push_back(std::ssize(values));
      names += (names.empty() ? "" : " ") + patch.name;
    }
    file_.define_fill(id, kLake);
    file_.put_attributes(
        id,
        {{"long_name", "patch of the recipe; missing in lakes"}, {"flag_values", values}, {"flag_meanings", names}});
    file_.put_attributes(id, space_.attributes);
    return id;
  }
  void define_coefficients(std::size_t orders) {
    const int order = file_.define_dimension("order", orders);
    order_ = file_.define_variable("order", NC_DOUBLE, std::array{order});
    file_.put_attributes(order_, {{"long_name", "number of the coefficient"}, {"units", "1"}});
    coefficients_ = define("ar_coefficients",
                           "autoregressive coefficients; 0 beyond the order, missing with long memory", "1", {order});
  }
  void put(int id, const std::vector<double>& values, std::vector<std::size_t> start = {}) {
    std::vector<std::size_t> count(start.size(), 1);
    const Geometry& geometry = recipe_.geometry;
    if (!geometry.is_sites()) {
      start.push_back(0);
      count.push_back(geometry.rows);
    }
    start.push_back(0);
    count.push_back(geometry.cols);
    file_.put(id, start, count, values.data());
  }
  void put_coefficients(std::size_t order) {
    const auto number = static_cast<double>(order + 1);
    file_.put(order_, {order}, {1}, &number);
    put(coefficients_,
        by_cell(variable_,
                [order](const Patch& p) {
                  if (p.process.is_long_memory()) return kNaN;
                  return order < p.process.coefficients().size() ? p.process.coefficients()[order] : 0;
                }),
        {order});
  }

  const Recipe& recipe_;
  const ForgedVariable& variable_;
  NcFile file_;
  Space space_;
  int order_ = -1, coefficients_ = -1;
};

}  // namespace

void write_truth(const Recipe& recipe, std::size_t variable, const std::vector<std::size_t>& missing,
                 const std::string& path) {
  TruthFile(recipe, variable, path).write(missing);
}

}  // namespace lagscape
