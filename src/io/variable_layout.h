#pragma once
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "lagscape/grid/geometry.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {

/// What a dimension of the variable runs over. `column` runs over sites too; `fixed` is held at one index.
enum class DimRole { time, row, column, fixed };

/// How one file lays a variable out: which dimension is which, and the variables that hold its coordinates.
struct VariableLayout {
  NcVariable variable;
  GeometryKind kind = GeometryKind::index;
  std::vector<DimRole> roles;                 ///< per dimension
  std::vector<std::size_t> fixed;             ///< per dimension: the index held, where the role is `fixed`
  std::optional<NcVariable> time;             ///< time coordinate
  std::optional<NcVariable> y, x;             ///< 1-D coordinates of latlon and projected grids
  std::optional<NcVariable> lat, lon;         ///< per cell: 2-D, or per site
  std::optional<NcVariable> altitude, names;  ///< per site
  std::optional<NcVariable> mapping;          ///< grid_mapping
  std::vector<std::string> notes;

  [[nodiscard]] std::optional<std::size_t> position(DimRole role) const;
  [[nodiscard]] std::size_t length(DimRole role) const;  ///< 1 if there is no such dimension
  [[nodiscard]] bool has_time() const { return time.has_value() || position(DimRole::time).has_value(); }
};

using Selection = std::vector<std::pair<std::string, double>>;

/// A longer dimension for which the job has to choose one coordinate value.
struct OpenDimension {
  std::string name, units;
  std::vector<double> values;
};

/// Thrown where a `select` is needed; the survey reads the choices from it.
class NeedsSelection : public Error {
 public:
  NeedsSelection(std::vector<OpenDimension> dimensions, const std::string& where);
  [[nodiscard]] const std::vector<OpenDimension>& dimensions() const { return dimensions_; }

 private:
  std::vector<OpenDimension> dimensions_;
};

/// Finds the layout by role, not by position: attributes first, then names; what has no coordinates is an index grid.
/// Throws Error{input} if there is no such variable, it is no number, or cells cannot be told from other dimensions.
[[nodiscard]] VariableLayout find_layout(const NcFile& file, const std::string& variable, const Selection& select);

/// "time 120, lat 90, lon 180".
[[nodiscard]] std::string describe_dims(const NcVariable& variable);

}  // namespace lagscape
