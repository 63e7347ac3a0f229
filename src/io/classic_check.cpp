#include "io/classic_check.h"

#include <fmt/format.h>

#include <algorithm>
#include <array>
#include <filesystem>
#include <fstream>
#include <limits>
#include <stdexcept>
#include <vector>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr std::uint64_t kTooMuch = std::numeric_limits<std::uint64_t>::max();

// Damaged headers may promise anything: sums and products stick at the largest number instead of wrapping.
std::uint64_t times(std::uint64_t a, std::uint64_t b) {
  std::uint64_t out = 0;
  return __builtin_mul_overflow(a, b, &out) ? kTooMuch : out;
}
std::uint64_t plus(std::uint64_t a, std::uint64_t b) { return a > kTooMuch - b ? kTooMuch : a + b; }
std::uint64_t padded(std::uint64_t size) { return size > kTooMuch - 3 ? kTooMuch : (size + 3) / 4 * 4; }

std::uint64_t type_size(std::uint64_t type) {
  constexpr std::array<std::uint64_t, 12> kSizes = {0, 1, 1, 2, 4, 4, 8, 1, 2, 4, 8, 8};
  if (type == 0 || type >= kSizes.size()) throw std::invalid_argument("unknown type");
  return kSizes[type];
}

class HeaderReader {
 public:
  HeaderReader(std::istream& in, std::uint64_t file_size, int version) : in_(in), left_(file_size), version_(version) {}

  std::uint64_t u32() { return number(4); }
  /// A count or a length: NON_NEG of the specification.
  std::uint64_t count() { return number(version_ == 5 ? 8 : 4); }
  std::uint64_t offset() { return number(version_ == 1 ? 4 : 8); }

  void skip(std::uint64_t bytes) {
    take(bytes);
    in_.seekg(static_cast<std::streamoff>(bytes), std::ios::cur);
  }
  void skip_name() { skip(padded(count())); }

  /// Number of elements of a list, 0 for an absent one.
  std::uint64_t list(std::uint64_t wanted_tag) {
    const std::uint64_t tag = u32(), elements = count();
    if (tag != wanted_tag && (tag != 0 || elements != 0)) throw std::invalid_argument("unknown tag");
    return elements;
  }

  void skip_attributes() {
    for (std::uint64_t n = list(12); n > 0; --n) {
      skip_name();
      const std::uint64_t size = type_size(u32());
      skip(padded(times(size, count())));
    }
  }

 private:
  void take(std::uint64_t bytes) {
    if (bytes > left_) throw std::length_error("the header ends early");
    left_ -= bytes;
  }
  std::uint64_t number(unsigned bytes) {
    take(bytes);
    std::array<unsigned char, 8> raw{};
    in_.read(reinterpret_cast<char*>(raw.data()), bytes);
    if (!in_) throw std::length_error("the header ends early");
    std::uint64_t value = 0;
    for (unsigned i = 0; i < bytes; ++i) value = value << 8U | raw[i];
    return value;
  }

  std::istream& in_;
  std::uint64_t left_;
  int version_;
};

struct Shape {
  std::uint64_t bytes = 0, begin = 0;  ///< of one record for record variables
  bool record = false;
};

Shape read_variable(HeaderReader& header, const std::vector<std::uint64_t>& dims) {
  Shape shape;
  header.skip_name();
  std::uint64_t elements = 1;
  const std::uint64_t rank = header.count();
  for (std::uint64_t i = 0; i < rank; ++i) {
    const std::uint64_t dim = header.count();
    if (dim >= dims.size()) throw std::invalid_argument("unknown dimension");
    if (i == 0 && dims[dim] == 0)
      shape.record = true;
    else
      elements = times(elements, dims[dim]);
  }
  header.skip_attributes();
  shape.bytes = times(elements, type_size(header.u32()));
  header.count();  // vsize: wrong by design for variables beyond 4 GiB, so computed instead
  shape.begin = header.offset();
  return shape;
}

// A single record variable is stored without padding between its records.
std::uint64_t bytes_needed(const std::vector<Shape>& variables, std::uint64_t records) {
  const auto record_count = std::count_if(variables.begin(), variables.end(), [](const Shape& v) { return v.record; });
  std::uint64_t per_record = 0, needed = 0;
  for (const Shape& v : variables)
    if (v.record) per_record = plus(per_record, record_count == 1 ? v.bytes : padded(v.bytes));
  for (const Shape& v : variables) {
    if (!v.record)
      needed = std::max(needed, v.bytes == 0 ? 0 : plus(v.begin, v.bytes));
    else if (records > 0)
      needed = std::max(needed, plus(v.begin, plus(times(records - 1, per_record), v.bytes)));
  }
  return needed;
}

}  // namespace

std::optional<std::uint64_t> classic_bytes_needed(std::istream& in, std::uint64_t file_size) {
  std::array<char, 4> magic{};
  in.read(magic.data(), magic.size());
  if (!in || magic[0] != 'C' || magic[1] != 'D' || magic[2] != 'F') return std::nullopt;
  const int version = static_cast<unsigned char>(magic[3]);
  if (version != 1 && version != 2 && version != 5) return std::nullopt;
  HeaderReader header(in, file_size - magic.size(), version);
  std::uint64_t records = header.count();
  const std::uint64_t streaming = version == 5 ? kTooMuch : 0xFFFFFFFFU;
  if (records == streaming) records = 0;  // written to a pipe: the number is not known
  std::vector<std::uint64_t> dims;
  for (std::uint64_t n = header.list(10); n > 0; --n) {
    header.skip_name();
    dims.push_back(header.count());
  }
  header.skip_attributes();
  std::vector<Shape> variables;
  for (std::uint64_t n = header.list(11); n > 0; --n) variables.push_back(read_variable(header, dims));
  return bytes_needed(variables, records);
}

void refuse_truncated_classic(const std::string& path) {
  std::ifstream in(path, std::ios::binary);
  std::error_code failed;
  const std::uint64_t size = std::filesystem::file_size(path, failed);
  if (!in || failed) return;  // the opening itself says what is wrong
  const std::string where = "file: " + path;
  const char* const fix = "fetch the file again and compare its size with the source's";
  try {
    const auto needed = classic_bytes_needed(in, size);
    if (needed && *needed > size)
      throw Error(ErrorKind::input,
                  fmt::format("the file is cut short: it has {} bytes, its header promises at least {}", grouped(size),
                              grouped(*needed)),
                  where, fix);
  } catch (const std::length_error&) {
    throw Error(ErrorKind::input,
                fmt::format("the file is cut short: it ends within its header, after {} bytes", grouped(size)), where,
                fix);
  } catch (const std::invalid_argument& problem) {
    throw Error(ErrorKind::input, fmt::format("the header of the file is damaged ({})", problem.what()), where, fix);
  }
}

}  // namespace lagscape
