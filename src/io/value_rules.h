#pragma once
#include <cstddef>
#include <limits>
#include <string>
#include <vector>

#include "lagscape/io/archive.h"
#include "lagscape/io/nc_handle.h"

namespace lagscape {

/// Types a value can be stored in, after `_Unsigned` has been taken into account.
enum class RawType { i8, u8, i16, u16, i32, u32, i64, u64, f32, f64 };

/// How the stored values of one variable in one file become doubles. Tests come in this order: stored values against
/// fill and missing values and those that the job lists, NaN, infinity, stored values against the valid range; then
/// scale and offset; then the valid range of the job.
struct ValueRules {
  RawType type = RawType::f32;
  std::vector<double> missing;  ///< stored values that mean "missing"
  double low = -std::numeric_limits<double>::infinity(), high = std::numeric_limits<double>::infinity();  ///< stored
  double scale = 1, offset = 0;
  double unpacked_low = low, unpacked_high = high;
  std::vector<double> job_missing;  ///< stored values that the job lists, unpacked, as missing

  [[nodiscard]] std::size_t bytes() const;
  /// Decodes `count` neighbouring stored values; missing = NaN. What was set aside is added to `counts`.
  void decode(const std::byte* stored, std::size_t count, double* out, ValueCounts& counts) const;
};

/// True if values of this netCDF type can be analysed (numbers, not text).
[[nodiscard]] bool is_number_type(nc_type type);

/// Reads the rules from the variable's attributes (`_Unsigned`, _FillValue or the default fill, missing_value,
/// valid_min, valid_max, valid_range, scale_factor, add_offset) and the job. `notes` receives what is out of the
/// ordinary.
[[nodiscard]] ValueRules read_value_rules(const NcFile& file, const NcVariable& variable, const InputRequest& request,
                                          std::vector<std::string>& notes);

}  // namespace lagscape
