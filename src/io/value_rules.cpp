#include "io/value_rules.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <bit>
#include <cmath>
#include <cstdint>
#include <cstring>
#include <optional>

#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr double kInfinity = std::numeric_limits<double>::infinity();

// Calls `use` with a value of the type that is stored.
template <typename Use>
auto with_type(RawType type, Use use) {
  switch (type) {
    case RawType::i8:
      return use(std::int8_t{});
    case RawType::u8:
      return use(std::uint8_t{});
    case RawType::i16:
      return use(std::int16_t{});
    case RawType::u16:
      return use(std::uint16_t{});
    case RawType::i32:
      return use(std::int32_t{});
    case RawType::u32:
      return use(std::uint32_t{});
    case RawType::i64:
      return use(std::int64_t{});
    case RawType::u64:
      return use(std::uint64_t{});
    case RawType::f32:
      return use(float{});
    default:
      return use(double{});
  }
}

// Two values at a time, in the vector types of GCC and Clang: compilers do not turn these tests into vector code by
// themselves, and every machine has registers for two doubles. A mask is all ones where true, which as a double is NaN.
constexpr std::size_t kWide = 2;
using Doubles [[gnu::vector_size(kWide * sizeof(double))]] = double;
using Masks [[gnu::vector_size(kWide * sizeof(std::int64_t))]] = std::int64_t;

Doubles load(const double* from) {
  Doubles values;
  std::memcpy(&values, from, sizeof(values));
  return values;
}

void store_or_nan(const Doubles& values, const Masks& nan, double* to) {
  const Masks bits = std::bit_cast<Masks>(values) | nan;
  std::memcpy(to, &bits, sizeof(bits));
}

std::size_t counted(const Masks& lanes) { return static_cast<std::size_t>(-(lanes[0] + lanes[1])); }

// Makes NaN of every value that equals `missing`; returns how many there were.
std::size_t blank(double missing, std::size_t count, double* values) {
  const Doubles wanted = {missing, missing};
  Masks found{};
  for (std::size_t i = 0; i < count; i += kWide) {
    const Doubles value = load(values + i);
    const Masks same = value == wanted;
    found += same;
    store_or_nan(value, same, values + i);
  }
  return counted(found);
}

// Stored values as doubles in, what they mean out. `count` is even.
void unpack(const ValueRules& rules, std::size_t count, double* values, ValueCounts& counts) {
  for (const double missing : rules.missing) blank(missing, count, values);
  std::size_t listed = 0;
  for (const double missing : rules.job_missing) listed += blank(missing, count, values);
  const Doubles low = {rules.low, rules.low}, high = {rules.high, rules.high};
  const Doubles unpacked_low = {rules.unpacked_low, rules.unpacked_low},
                unpacked_high = {rules.unpacked_high, rules.unpacked_high};
  const Doubles scale = {rules.scale, rules.scale}, offset = {rules.offset, rules.offset},
                infinity = {kInfinity, kInfinity};
  Masks fill{}, infinite{}, outside{};
  for (std::size_t i = 0; i < count; i += kWide) {
    const Doubles stored = load(values + i), value = stored * scale + offset;
    const Masks endless = (stored == infinity) | (stored == -infinity);
    const Masks beyond =
        ((stored < low) | (stored > high) | (value < unpacked_low) | (value > unpacked_high)) & ~endless;
    fill += stored != stored;  // true of NaN only  NOLINT(misc-redundant-expression)
    infinite += endless;
    outside += beyond;
    store_or_nan(value, endless | beyond, values + i);
  }
  counts.fill += counted(fill) - listed;  // the listed ones are NaN by now
  counts.job_missing += listed;
  counts.infinite += counted(infinite);
  counts.out_of_range += counted(outside);
}

template <typename T>
void widen(const std::byte* stored, std::size_t count, double* out) {
  const T* const from = reinterpret_cast<const T*>(stored);
  for (std::size_t i = 0; i < count; ++i) out[i] = static_cast<double>(from[i]);
}

// A number as the type stores it, or nothing if it cannot hold it: a fill of 1e20 says nothing about shorts.
std::optional<double> as_stored(double value, RawType type) {
  return with_type(type, [value](auto sample) -> std::optional<double> {
    using T = decltype(sample);
    if constexpr (std::is_floating_point_v<T>) {
      return static_cast<double>(static_cast<T>(value));
    } else {
      double whole = value;
      // Attributes are often written signed where `_Unsigned` makes the values unsigned.
      if (std::is_unsigned_v<T> && whole < 0) whole += std::ldexp(1.0, std::numeric_limits<T>::digits);
      if (whole != std::floor(whole) || whole < static_cast<double>(std::numeric_limits<T>::min()) ||
          whole > static_cast<double>(std::numeric_limits<T>::max()))
        return std::nullopt;
      return whole;
    }
  });
}

RawType raw_type(nc_type type, const std::string& is_unsigned) {
  const bool yes = is_unsigned == "true", no = is_unsigned == "false";
  switch (type) {
    case NC_BYTE:
      return yes ? RawType::u8 : RawType::i8;
    case NC_UBYTE:
      return no ? RawType::i8 : RawType::u8;
    case NC_SHORT:
      return yes ? RawType::u16 : RawType::i16;
    case NC_USHORT:
      return no ? RawType::i16 : RawType::u16;
    case NC_INT:
      return yes ? RawType::u32 : RawType::i32;
    case NC_UINT:
      return no ? RawType::i32 : RawType::u32;
    case NC_INT64:
      return yes ? RawType::u64 : RawType::i64;
    case NC_UINT64:
      return no ? RawType::i64 : RawType::u64;
    case NC_FLOAT:
      return RawType::f32;
    default:
      return RawType::f64;
  }
}

// The fill that never-written data reads as; bytes have none, and neither has a variable that was written without
// filling.
std::optional<double> default_fill(const NcFile& file, const NcVariable& variable) {
  if (variable.type == NC_BYTE || variable.type == NC_UBYTE) return std::nullopt;
  int without = 0;
  std::array<std::byte, 8> fill{};
  file.check(nc_inq_var_fill(variable.group, variable.id, &without, fill.data()), "reading the fill value",
             variable.path);
  if (without != 0) return std::nullopt;
  return with_type(raw_type(variable.type, ""), [&fill](auto sample) {
    std::memcpy(&sample, fill.data(), sizeof(sample));
    return std::optional<double>(static_cast<double>(sample));
  });
}

std::optional<double> first_number(const Attributes& attributes, const char* name) {
  const std::vector<double> values = number_attribute(attributes, name);
  return values.empty() ? std::nullopt : std::optional<double>(values.front());
}

// A valid range in real numbers on packed integers is meant for the unpacked values (NetCDF Users Guide, appendix A,
// "valid_range": "if valid_range is the same type as scale_factor ... then it is intended to apply to unpacked data").
bool range_is_unpacked(const Attributes& attributes, const char* name, RawType type) {
  const Attribute* found = find_attribute(attributes, name);
  return type != RawType::f32 && type != RawType::f64 && found != nullptr &&
         std::holds_alternative<std::vector<double>>(found->value) &&
         find_attribute(attributes, "scale_factor") != nullptr;
}

// An integer type cannot hold every bound; what it cannot hold limits nothing or is rounded harmlessly.
double bound(double value, RawType type) { return as_stored(value, type).value_or(value); }

void read_range(const Attributes& attributes, ValueRules& rules, std::vector<std::string>& notes) {
  const auto apply = [&](const char* name, std::optional<double> low, std::optional<double> high) {
    if (range_is_unpacked(attributes, name, rules.type)) {
      rules.unpacked_low = low.value_or(rules.unpacked_low);
      rules.unpacked_high = high.value_or(rules.unpacked_high);
      notes.push_back(fmt::format("{} is given in real numbers and taken as unpacked values", name));
      return;
    }
    if (low) rules.low = bound(*low, rules.type);
    if (high) rules.high = bound(*high, rules.type);
  };
  if (const auto low = first_number(attributes, "valid_min")) apply("valid_min", low, std::nullopt);
  if (const auto high = first_number(attributes, "valid_max")) apply("valid_max", std::nullopt, high);
  const std::vector<double> range = number_attribute(attributes, "valid_range");
  if (range.size() == 2) apply("valid_range", range[0], range[1]);
  if (rules.low > rules.high) {
    notes.push_back(fmt::format("the valid range of the file is empty ({} to {}) and is not used",
                                number_text(rules.low), number_text(rules.high)));
    rules.low = -kInfinity;
    rules.high = kInfinity;
  }
}

void read_missing(const NcFile& file, const NcVariable& variable, const Attributes& attributes, ValueRules& rules) {
  std::vector<double> declared = number_attribute(attributes, "missing_value");
  const std::vector<double> fill = number_attribute(attributes, "_FillValue");
  declared.insert(declared.end(), fill.begin(), fill.end());
  if (fill.empty())
    if (const auto value = default_fill(file, variable)) declared.push_back(*value);
  for (const double value : declared) {
    const auto stored = as_stored(value, rules.type);
    if (!stored || std::isnan(*stored)) continue;  // NaN is always missing
    if (std::find(rules.missing.begin(), rules.missing.end(), *stored) == rules.missing.end())
      rules.missing.push_back(*stored);
  }
}

// ---- what the job says, in unpacked values --------------------------------------------------------------------------

bool is_packed(const ValueRules& rules) { return rules.scale != 1 || rules.offset != 0; }
bool is_real(RawType type) { return type == RawType::f32 || type == RawType::f64; }

// How far the decimals of a job may be from the product that undoes the packing: rounding noise, also that of a
// scale_factor kept as float32 (0.1F is 0.100000001), but never as far as the next stored integer.
double packing_slack(const ValueRules& rules, double value) {
  constexpr double kNoise = 1e-6, kFloatNoise = 6e-8, kMost = 0.25;  // shares of: a step, the value, a step
  const double step = std::fabs(rules.scale);
  return std::min(kNoise * step + kFloatNoise * (std::fabs(value - rules.offset) + std::fabs(rules.offset)),
                  kMost * step);
}

// An end of the job's valid range; `outward` is -1 for the lower one. A job's 0.1 means what a file of floats holds for
// it, and 3 of a packed 0.1 is not beyond 0.3.
double range_end(const ValueRules& rules, double value, int outward) {
  if (!std::isfinite(value)) return value;
  if (is_packed(rules)) return value + outward * packing_slack(rules, value);
  return rules.type == RawType::f32 ? static_cast<double>(static_cast<float>(value)) : value;
}

// "16-bit integers with scale_factor 0.1".
std::string storage_words(const ValueRules& rules) {
  std::string words =
      fmt::format("{}-bit {}", 8 * rules.bytes(), is_real(rules.type) ? "floating-point numbers" : "integers");
  if (rules.scale != 1) words += " with scale_factor " + number_text(rules.scale);
  if (rules.offset != 0)
    words += fmt::format(" {} add_offset {}", rules.scale != 1 ? "and" : "with", number_text(rules.offset));
  return words;
}

// The stored values that mean this unpacked one.
std::vector<double> stored_forms(const ValueRules& rules, double value) {
  const double quotient = (value - rules.offset) / rules.scale, whole = std::round(quotient);
  std::vector<double> forms;
  const auto holds = [&](double stored) {
    // as_stored() reads negative numbers of attributes as unsigned ones; a job means what it says.
    const auto held = as_stored(stored, rules.type);
    return held && std::isfinite(*held) && (is_real(rules.type) || *held == stored);
  };
  const bool near =
      std::fabs(whole * rules.scale + rules.offset - value) <= (is_packed(rules) ? packing_slack(rules, value) : 0.0);
  if (near && holds(whole)) forms.push_back(whole);
  if (is_real(rules.type) && holds(quotient)) forms.push_back(*as_stored(quotient, rules.type));
  return forms;
}

void list_missing(ValueRules& rules, double value, std::vector<std::string>& notes) {
  if (!std::isfinite(value)) return;  // missing anyway
  const std::vector<double> forms = stored_forms(rules, value);
  for (const double stored : forms)
    if (std::find(rules.job_missing.begin(), rules.job_missing.end(), stored) == rules.job_missing.end())
      rules.job_missing.push_back(stored);
  if (forms.empty())
    notes.push_back(fmt::format("missing_values: {} marks nothing, since {} never are that value", number_text(value),
                                storage_words(rules)));
}

}  // namespace

std::size_t ValueRules::bytes() const {
  return with_type(type, [](auto sample) { return sizeof(sample); });
}

void ValueRules::decode(const std::byte* stored, std::size_t count, double* out, ValueCounts& counts) const {
  with_type(type, [&](auto sample) { widen<decltype(sample)>(stored, count, out); });
  const std::size_t even = count / kWide * kWide;
  unpack(*this, even, out, counts);
  if (even == count) return;
  double last[kWide] = {out[even], kNaN};  // the second one is missing, and not counted
  unpack(*this, kWide, last, counts);
  --counts.fill;
  out[even] = last[0];
}

bool is_number_type(nc_type type) {
  return type != NC_CHAR && type != NC_STRING && type > NC_NAT && type <= NC_MAX_ATOMIC_TYPE;
}

ValueRules read_value_rules(const NcFile& file, const NcVariable& variable, const InputRequest& request,
                            std::vector<std::string>& notes) {
  const Attributes attributes = file.attributes(variable);
  ValueRules rules;
  rules.type = raw_type(variable.type, lower(text_attribute(attributes, "_Unsigned")));
  read_missing(file, variable, attributes, rules);
  read_range(attributes, rules, notes);
  rules.scale = first_number(attributes, "scale_factor").value_or(1);
  rules.offset = first_number(attributes, "add_offset").value_or(0);
  if (rules.scale == 0 || !std::isfinite(rules.scale) || !std::isfinite(rules.offset))
    throw Error(ErrorKind::input,
                fmt::format("the packing cannot be undone: scale_factor {}, add_offset {}", rules.scale, rules.offset),
                fmt::format("file: {}, variable: {}", file.path(), variable.path),
                "correct the attributes of the file");
  if (request.valid_range) {
    rules.unpacked_low = std::max(rules.unpacked_low, range_end(rules, (*request.valid_range)[0], -1));
    rules.unpacked_high = std::min(rules.unpacked_high, range_end(rules, (*request.valid_range)[1], 1));
  }
  for (const double value : request.missing_values) list_missing(rules, value, notes);
  return rules;
}

}  // namespace lagscape
