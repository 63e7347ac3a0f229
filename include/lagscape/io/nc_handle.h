#pragma once
#include <netcdf.h>

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "lagscape/base/attribute.h"
#include "lagscape/base/error.h"

namespace lagscape {

/// A dimension as a variable sees it.
struct NcDim {
  int id = -1;
  std::string name;
  std::size_t length = 0;
};

/// A variable found in a file. `group` is the id to use with nc_* calls; path is "NAME" or "/GROUP/NAME".
struct NcVariable {
  int group = -1, id = -1;
  std::string path;
  nc_type type = NC_NAT;
  std::vector<NcDim> dims;

  [[nodiscard]] std::string name() const { return path.substr(path.rfind('/') + 1); }
  [[nodiscard]] std::size_t size() const;
  /// Position of a dimension, or nothing.
  [[nodiscard]] std::optional<std::size_t> position(int dim) const;
};

/// An open netCDF file: owns the id, checks every call, retells errors with file and variable as Error{input} (opened
/// for reading) or Error{output} (created). netCDF-C is not thread-safe: use from the main thread only, which also
/// keeps the HDF5 library beneath it silent.
class NcFile {
 public:
  using Extents = const std::vector<std::size_t>&;  ///< a number for each dimension
  /// Opens for reading. Classic files that are shorter than their header promises are refused.
  [[nodiscard]] static NcFile open(const std::string& path);
  /// Creates a new file that must not exist; mode: netCDF-4 classic model unless told otherwise.
  [[nodiscard]] static NcFile create(const std::string& path, int mode = NC_NETCDF4 | NC_CLASSIC_MODEL);
  /// Opens a file made by create() to write more values.
  [[nodiscard]] static NcFile reopen(const std::string& path);
  NcFile(NcFile&& other) noexcept;
  NcFile& operator=(NcFile&& other) noexcept;
  NcFile(const NcFile&) = delete;
  NcFile& operator=(const NcFile&) = delete;
  ~NcFile();

  [[nodiscard]] int id() const { return id_; }
  [[nodiscard]] const std::string& path() const { return path_; }
  /// Closes; what the disk refuses to take shows here at the latest.
  void close();
  /// Throws unless the status is NC_NOERR. `doing`: "reading", "defining" ...; variable may be empty.
  void check(int status, std::string_view doing, std::string_view variable = {}) const;
  /// The same, for a variable whose compression filter may be missing.
  void check(int status, std::string_view doing, const NcVariable& variable) const;

  // ---- reading ----
  /// Every variable of the file, groups included, in file order.
  [[nodiscard]] std::vector<NcVariable> variables() const;
  /// The variable of this name, "NAME" (in the root, else the only one of this name in a group) or "/GROUP/NAME".
  /// `from`: look first in this group and its parents. Nothing if there is none.
  [[nodiscard]] std::optional<NcVariable> find(std::string_view name, int from = -1) const;
  /// Attributes of a variable, or of the file with variable NC_GLOBAL. Text loses NULs and newlines at its end; texts
  /// of an array of strings are joined by blanks; attributes of user-defined types are left out.
  [[nodiscard]] Attributes attributes(int group, int variable) const;
  [[nodiscard]] Attributes attributes(const NcVariable& variable) const {
    return attributes(variable.group, variable.id);
  }
  /// All values as doubles; a scalar gives one. Only for coordinates and the like: packing and fills are left alone.
  [[nodiscard]] std::vector<double> doubles(const NcVariable& variable) const;
  /// All values as text: char arrays along their last dimension, strings, or numbers spelt out.
  [[nodiscard]] std::vector<std::string> texts(const NcVariable& variable) const;
  /// "netCDF-4", "netCDF-4 (classic model)", "CDF-1", "CDF-2", "CDF-5".
  [[nodiscard]] std::string kind() const;

  // ---- writing; variables by the id that define_variable gave, dimensions too ----
  /// Length NC_UNLIMITED: grows with what is put.
  int define_dimension(const std::string& name, std::size_t length);
  int define_variable(const std::string& name, nc_type type, std::span<const int> dims);
  /// Chunk lengths, shuffled and deflated at this level (0: neither); no chunks: one contiguous block. NetCDF-4 only.
  void define_storage(int variable, std::span<const std::size_t> chunks, int deflate);
  /// The missing value, converted to the variable's type.
  void define_fill(int variable, double value);
  /// Attributes as attribute.h says, without empty texts; integers beyond NC_INT become doubles. Variable NC_GLOBAL: of
  /// the file.
  void put_attributes(int variable, const Attributes& attributes);
  /// A text attribute; nothing if the text is empty.
  void put_text(int variable, const std::string& name, const std::string& value);
  void end_define();
  /// A slab of values, converted to the variable's type if theirs is another.
  void put(int variable, Extents start, Extents count, const double* values);
  void put(int variable, Extents start, Extents count, const float* values);
  void put(int variable, Extents start, Extents count, const std::int32_t* values);
  void put(int variable, Extents start, Extents count, const std::int16_t* values);
  /// A slab of values that have the variable's type.
  void put(int variable, Extents start, Extents count, const std::byte* values);
  /// All values of a variable without unlimited dimension.
  void put(int variable, const std::vector<double>& values);
  /// Texts as rows of characters; the last dimension has the length text_width(texts).
  void put_texts(int variable, const std::vector<std::string>& texts);

 private:
  NcFile(int id, std::string path, ErrorKind kind) : id_(id), path_(std::move(path)), kind_(kind) {}
  void check_variable(int status, std::string_view doing, int variable) const;

  int id_ = -1;
  std::string path_;
  ErrorKind kind_ = ErrorKind::input;
};

/// Bytes of the longest text, at least 1.
[[nodiscard]] std::size_t text_width(const std::vector<std::string>& texts);
/// The attribute of this name, or nothing.
[[nodiscard]] const Attribute* find_attribute(const Attributes& attributes, std::string_view name);
/// Text of an attribute, trimmed; "" if there is none or it is a number.
[[nodiscard]] std::string text_attribute(const Attributes& attributes, std::string_view name);
/// Numbers of an attribute; text such as "0, 24" is read leniently; empty if there are none.
[[nodiscard]] std::vector<double> number_attribute(const Attributes& attributes, std::string_view name);

}  // namespace lagscape
