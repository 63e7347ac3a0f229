#include "lagscape/io/nc_handle.h"

#include <fmt/format.h>
#include <hdf5.h>
#include <netcdf_filter.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <limits>
#include <utility>

#include "io/classic_check.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

constexpr int kFilterError = NC_EFILTER;

// HDF5 1.10 tidies up when the program ends, and then crashes over a file whose last bytes a full disk refused: the
// exit code would be the crash's. We close every file ourselves. It must be told before its first use, hence here.
[[maybe_unused]] const herr_t no_tidying = H5dont_atexit();

[[noreturn]] void refuse_open(int status, const std::string& path) {
  const std::string where = "file: " + path;
  std::error_code ignored;
  if (!std::filesystem::exists(path, ignored))
    throw Error(ErrorKind::input, "the file does not exist", where,
                "correct its name; names in a job are relative to the job file");
  if (std::filesystem::is_directory(path, ignored))
    throw Error(ErrorKind::input, "this is a folder, not a file", where,
                "name the files in it, for example with a glob: FOLDER/*.nc");
  if (std::filesystem::file_size(path, ignored) == 0 && !ignored)
    throw Error(ErrorKind::input, "the file is empty (0 bytes)", where, "fetch it again, or leave it out");
  if (status == NC_ENOTNC)
    throw Error(
        ErrorKind::input, "the file is not netCDF or HDF5", where,
        "name netCDF files (.nc), or a wide CSV panel whose name ends in .csv; unpack .zip and .gz files first");
  if (status == NC_EHDFERR)
    throw Error(
        ErrorKind::input,
        "the HDF5 library cannot open the file: it is damaged or cut short, or locked by a program that is writing it",
        where,
        "fetch it again and compare sizes; if it is whole, wait for the writer, or, on a file system without locks, "
        "set "
        "HDF5_USE_FILE_LOCKING=FALSE in the environment");
  throw Error(ErrorKind::input, fmt::format("the file cannot be opened: {}", nc_strerror(status)), where,
              "check that it can be read and is whole");
}

std::string filter_words(unsigned int id) {
  switch (id) {
    case 307:
      return "307 (BZip2)";
    case 32001:
      return "32001 (Blosc)";
    case 32004:
      return "32004 (LZ4)";
    case 32015:
      return "32015 (Zstandard)";
    default:
      return std::to_string(id);
  }
}

// Names the filters that HDF5 does not have built in (those have ids below 256).
std::string foreign_filters(const NcVariable& variable) {
  std::size_t count = 0;
  if (nc_inq_var_filter_ids(variable.group, variable.id, &count, nullptr) != NC_NOERR) return {};
  std::vector<unsigned int> ids(count);
  if (count == 0 || nc_inq_var_filter_ids(variable.group, variable.id, &count, ids.data()) != NC_NOERR) return {};
  std::vector<std::string> words;
  for (const unsigned int id : ids)
    if (id >= 256) words.push_back(filter_words(id));
  return join(words, ", ");
}

std::string name_of_group(int group) {
  std::size_t length = 0;
  if (nc_inq_grpname_full(group, &length, nullptr) != NC_NOERR) return "/";
  std::string name(length, '\0');
  nc_inq_grpname_full(group, nullptr, name.data());
  return name;
}

std::string read_string_attribute(const NcFile& file, int group, int variable, const char* name, std::size_t length) {
  std::vector<char*> texts(length, nullptr);
  file.check(nc_get_att_string(group, variable, name, texts.data()), "reading attributes");
  std::vector<std::string> parts;
  for (const char* text : texts) parts.emplace_back(text == nullptr ? "" : text);
  nc_free_string(length, texts.data());
  return join(parts, " ");
}

std::string without_tail(std::string text) {
  while (!text.empty() && (text.back() == '\0' || text.back() == '\n' || text.back() == '\r')) text.pop_back();
  return text;
}

// The variables of a group and of those below it.
void collect(const NcFile& file, int group, std::vector<int>& groups) {
  groups.push_back(group);
  int count = 0;
  if (nc_inq_grps(group, &count, nullptr) != NC_NOERR || count == 0) return;
  std::vector<int> below(static_cast<std::size_t>(count));
  file.check(nc_inq_grps(group, &count, below.data()), "reading groups");
  for (const int one : below) collect(file, one, groups);
}

NcVariable describe(const NcFile& file, int group, int id) {
  NcVariable variable;
  variable.group = group;
  variable.id = id;
  char name[NC_MAX_NAME + 1] = {};
  int rank = 0;
  file.check(nc_inq_var(group, id, name, &variable.type, &rank, nullptr, nullptr), "reading variables");
  const std::string folder = name_of_group(group);
  variable.path = folder == "/" ? name : folder + "/" + name;
  std::vector<int> dims(static_cast<std::size_t>(rank));
  file.check(nc_inq_vardimid(group, id, dims.data()), "reading dimensions", variable.path);
  for (const int dim : dims) {
    NcDim& one = variable.dims.emplace_back();
    one.id = dim;
    char dim_name[NC_MAX_NAME + 1] = {};
    file.check(nc_inq_dim(group, dim, dim_name, &one.length), "reading dimensions", variable.path);
    one.name = dim_name;
  }
  return variable;
}

}  // namespace

std::size_t NcVariable::size() const {
  std::size_t size = 1;
  for (const NcDim& dim : dims) size *= dim.length;
  return size;
}

std::optional<std::size_t> NcVariable::position(int dim) const {
  for (std::size_t i = 0; i < dims.size(); ++i)
    if (dims[i].id == dim) return i;
  return std::nullopt;
}

NcFile NcFile::open(const std::string& path) {
  refuse_truncated_classic(path);
  int id = -1;
  const int status = nc_open(path.c_str(), NC_NOWRITE, &id);
  if (status != NC_NOERR) refuse_open(status, path);
  return {id, path, ErrorKind::input};
}

NcFile NcFile::create(const std::string& path, int mode) {
  int id = -1;
  const int status = nc_create(path.c_str(), mode | NC_NOCLOBBER, &id);
  if (status != NC_NOERR)
    throw Error(ErrorKind::output, fmt::format("the file cannot be created: {}", nc_strerror(status)), "file: " + path,
                "check that its folder exists, can be written to and has room");
  return {id, path, ErrorKind::output};
}

NcFile NcFile::reopen(const std::string& path) {
  int id = -1;
  const int status = nc_open(path.c_str(), NC_WRITE, &id);
  NcFile file(id, path, ErrorKind::output);
  file.check(status, "opening the file again");
  return file;
}

NcFile::NcFile(NcFile&& other) noexcept
    : id_(std::exchange(other.id_, -1)), path_(std::move(other.path_)), kind_(other.kind_) {}

NcFile& NcFile::operator=(NcFile&& other) noexcept {
  std::swap(id_, other.id_);
  std::swap(path_, other.path_);
  std::swap(kind_, other.kind_);
  return *this;
}

NcFile::~NcFile() {
  if (id_ >= 0) nc_close(id_);
}

void NcFile::close() {
  if (id_ < 0) return;
  check(nc_close(std::exchange(id_, -1)), "closing");
}

void NcFile::check(int status, std::string_view doing, std::string_view variable) const {
  if (status == NC_NOERR) return;
  const std::string where =
      variable.empty() ? "file: " + path_ : fmt::format("file: {}, variable: {}", path_, variable);
  const char* const fix =
      kind_ == ErrorKind::input ? "check that the file is whole (ncdump reads all of it); fetch it again if not"
      : status == NC_EVARSIZE || status == NC_EDIMSIZE ? "choose a format that holds so large a variable: netCDF-4 does"
                                                       : "check that the disk has room and can be written to";
  const bool system = status > 0;  // an errno
  throw Error(kind_, fmt::format("{} failed: {}", doing, system ? std::strerror(status) : nc_strerror(status)), where,
              fix);
}

void NcFile::check(int status, std::string_view doing, const NcVariable& variable) const {
  if (status != kFilterError) return check(status, doing, variable.path);
  const std::string filters = foreign_filters(variable);
  throw Error(kind_,
              fmt::format("the variable is compressed with filter {}, which is not installed",
                          filters.empty() ? "unknown" : filters),
              fmt::format("file: {}, variable: {}", path_, variable.path),
              "install the plugin (on Debian: apt install hdf5-filter-plugin, or hdf5-filter-plugin-blosc-serial for "
              "Blosc) or name its "
              "folder in HDF5_PLUGIN_PATH; or rewrite the file: nccopy -F none -d 1 IN.nc OUT.nc where the filter is "
              "installed");
}

void NcFile::check_variable(int status, std::string_view doing, int variable) const {
  if (status == NC_NOERR) return;
  char name[NC_MAX_NAME + 1] = {};
  if (variable != NC_GLOBAL) nc_inq_varname(id_, variable, name);
  check(status, doing, name);
}

std::vector<NcVariable> NcFile::variables() const {
  std::vector<int> groups;
  collect(*this, id_, groups);
  std::vector<NcVariable> all;
  for (const int group : groups) {
    int count = 0;
    check(nc_inq_varids(group, &count, nullptr), "reading variables");
    std::vector<int> ids(static_cast<std::size_t>(count));
    check(nc_inq_varids(group, &count, ids.data()), "reading variables");
    for (const int id : ids) all.push_back(describe(*this, group, id));
  }
  return all;
}

std::optional<NcVariable> NcFile::find(std::string_view name, int from) const {
  if (name.find('/') != std::string_view::npos && !name.starts_with('/')) return find("/" + std::string(name), from);
  const std::string wanted(name);
  int id = -1;
  if (name.starts_with('/')) {
    const std::size_t slash = name.rfind('/');
    int group = id_;
    if (slash > 0 && nc_inq_grp_full_ncid(id_, wanted.substr(0, slash).c_str(), &group) != NC_NOERR)
      return std::nullopt;
    if (nc_inq_varid(group, wanted.substr(slash + 1).c_str(), &id) != NC_NOERR) return std::nullopt;
    return describe(*this, group, id);
  }
  for (int group = from < 0 ? id_ : from;;) {
    if (nc_inq_varid(group, wanted.c_str(), &id) == NC_NOERR) return describe(*this, group, id);
    if (nc_inq_grp_parent(group, &group) != NC_NOERR) break;
  }
  std::optional<NcVariable> found;
  for (NcVariable& variable : variables()) {
    if (variable.name() != name) continue;
    if (found) return std::nullopt;  // several: the full path is needed
    found = std::move(variable);
  }
  return found;
}

Attributes NcFile::attributes(int group, int variable) const {
  int count = 0;
  check(variable == NC_GLOBAL ? nc_inq_natts(group, &count) : nc_inq_varnatts(group, variable, &count),
        "reading attributes");
  Attributes all;
  for (int i = 0; i < count; ++i) {
    char name[NC_MAX_NAME + 1] = {};
    nc_type type = NC_NAT;
    std::size_t length = 0;
    check(nc_inq_attname(group, variable, i, name), "reading attributes");
    check(nc_inq_att(group, variable, name, &type, &length), "reading attributes");
    if (type == NC_CHAR) {
      std::string text(length, '\0');
      if (length > 0) check(nc_get_att_text(group, variable, name, text.data()), "reading attributes");
      all.push_back({name, without_tail(std::move(text))});
    } else if (type == NC_STRING) {
      all.push_back({name, without_tail(read_string_attribute(*this, group, variable, name, length))});
    } else if (type == NC_FLOAT || type == NC_DOUBLE || type == NC_UINT64) {
      std::vector<double> values(length);
      if (length > 0) check(nc_get_att_double(group, variable, name, values.data()), "reading attributes");
      all.push_back({name, std::move(values)});
    } else if (type > NC_NAT && type <= NC_MAX_ATOMIC_TYPE) {
      std::vector<long long> values(length);
      if (length > 0) check(nc_get_att_longlong(group, variable, name, values.data()), "reading attributes");
      all.push_back({name, std::vector<std::int64_t>(values.begin(), values.end())});
    }
  }
  return all;
}

std::vector<double> NcFile::doubles(const NcVariable& variable) const {
  std::vector<double> values(variable.size());
  if (!values.empty()) check(nc_get_var_double(variable.group, variable.id, values.data()), "reading", variable);
  return values;
}

std::vector<std::string> NcFile::texts(const NcVariable& variable) const {
  std::vector<std::string> out;
  if (variable.type == NC_CHAR) {
    std::string all(variable.size(), '\0');
    if (!all.empty()) check(nc_get_var_text(variable.group, variable.id, all.data()), "reading", variable);
    const std::size_t width = variable.dims.empty() ? 1 : variable.dims.back().length;
    for (std::size_t at = 0; width > 0 && at < all.size(); at += width) {
      const std::string one = all.substr(at, width);
      out.emplace_back(trim(one.substr(0, one.find('\0'))));
    }
  } else if (variable.type == NC_STRING) {
    std::vector<char*> all(variable.size(), nullptr);
    check(nc_get_var_string(variable.group, variable.id, all.data()), "reading", variable);
    for (const char* text : all) out.emplace_back(trim(text == nullptr ? "" : text));
    nc_free_string(all.size(), all.data());
  } else {
    for (const double value : doubles(variable)) out.push_back(number_text(value));
  }
  return out;
}

std::string NcFile::kind() const {
  int format = 0;
  check(nc_inq_format(id_, &format), "reading");
  switch (format) {
    case NC_FORMAT_CLASSIC:
      return "CDF-1";
    case NC_FORMAT_64BIT_OFFSET:
      return "CDF-2";
    case NC_FORMAT_CDF5:
      return "CDF-5";
    case NC_FORMAT_NETCDF4_CLASSIC:
      return "netCDF-4 (classic model)";
    default:
      return "netCDF-4";
  }
}

int NcFile::define_dimension(const std::string& name, std::size_t length) {
  int id = -1;
  check(nc_def_dim(id_, name.c_str(), length, &id), "defining dimension " + name);
  return id;
}

int NcFile::define_variable(const std::string& name, nc_type type, std::span<const int> dims) {
  int id = -1;
  check(nc_def_var(id_, name.c_str(), type, static_cast<int>(dims.size()), dims.data(), &id), "defining", name);
  return id;
}

void NcFile::define_storage(int variable, std::span<const std::size_t> chunks, int deflate) {
  const int layout = chunks.empty() ? NC_CONTIGUOUS : NC_CHUNKED;
  check_variable(nc_def_var_chunking(id_, variable, layout, chunks.data()), "defining chunks", variable);
  if (deflate > 0) check_variable(nc_def_var_deflate(id_, variable, 1, 1, deflate), "defining deflate", variable);
}

void NcFile::define_fill(int variable, double value) {
  nc_type type = NC_NAT;
  check_variable(nc_inq_vartype(id_, variable, &type), "defining the fill value", variable);
  check_variable(nc_put_att_double(id_, variable, "_FillValue", type, 1, &value), "defining the fill value", variable);
}

void NcFile::put_text(int variable, const std::string& name, const std::string& value) {
  if (value.empty()) return;
  check_variable(nc_put_att_text(id_, variable, name.c_str(), value.size(), value.data()), "writing attribute " + name,
                 variable);
}

void NcFile::put_attributes(int variable, const Attributes& attributes) {
  for (const Attribute& one : attributes) {
    const char* const name = one.name.c_str();
    if (const auto* text = std::get_if<std::string>(&one.value)) {
      put_text(variable, one.name, *text);
    } else if (const auto* reals = std::get_if<std::vector<double>>(&one.value)) {
      check_variable(nc_put_att_double(id_, variable, name, NC_DOUBLE, reals->size(), reals->data()),
                     "writing attribute " + one.name, variable);
    } else {
      const auto& whole = std::get<std::vector<std::int64_t>>(one.value);
      const std::vector<long long> values(whole.begin(), whole.end());
      bool fits = true;
      for (const long long v : values) fits = fits && v == static_cast<int>(v);
      check_variable(nc_put_att_longlong(id_, variable, name, fits ? NC_INT : NC_DOUBLE, values.size(), values.data()),
                     "writing attribute " + one.name, variable);
    }
  }
}

void NcFile::end_define() { check(nc_enddef(id_), "writing the header"); }

void NcFile::put(int variable, Extents start, Extents count, const double* values) {
  check_variable(nc_put_vara_double(id_, variable, start.data(), count.data(), values), "writing", variable);
}

void NcFile::put(int variable, Extents start, Extents count, const float* values) {
  check_variable(nc_put_vara_float(id_, variable, start.data(), count.data(), values), "writing", variable);
}

void NcFile::put(int variable, Extents start, Extents count, const std::int32_t* values) {
  check_variable(nc_put_vara_int(id_, variable, start.data(), count.data(), values), "writing", variable);
}

void NcFile::put(int variable, Extents start, Extents count, const std::int16_t* values) {
  check_variable(nc_put_vara_short(id_, variable, start.data(), count.data(), values), "writing", variable);
}

void NcFile::put(int variable, Extents start, Extents count, const std::byte* values) {
  check_variable(nc_put_vara(id_, variable, start.data(), count.data(), values), "writing", variable);
}

void NcFile::put(int variable, const std::vector<double>& values) {
  check_variable(nc_put_var_double(id_, variable, values.data()), "writing", variable);
}

void NcFile::put_texts(int variable, const std::vector<std::string>& texts) {
  const std::size_t width = text_width(texts);
  std::string letters;
  for (const std::string& text : texts) letters.append(text).append(width - text.size(), '\0');
  check_variable(nc_put_var_text(id_, variable, letters.data()), "writing", variable);
}

std::size_t text_width(const std::vector<std::string>& texts) {
  std::size_t width = 1;
  for (const std::string& text : texts) width = std::max(width, text.size());
  return width;
}

const Attribute* find_attribute(const Attributes& attributes, std::string_view name) {
  for (const Attribute& one : attributes)
    if (one.name == name) return &one;
  return nullptr;
}

std::string text_attribute(const Attributes& attributes, std::string_view name) {
  const Attribute* found = find_attribute(attributes, name);
  const auto* text = found == nullptr ? nullptr : std::get_if<std::string>(&found->value);
  return text == nullptr ? "" : std::string(trim(*text));
}

std::vector<double> number_attribute(const Attributes& attributes, std::string_view name) {
  const Attribute* found = find_attribute(attributes, name);
  if (found == nullptr) return {};
  if (const auto* reals = std::get_if<std::vector<double>>(&found->value)) return *reals;
  if (const auto* whole = std::get_if<std::vector<std::int64_t>>(&found->value)) return {whole->begin(), whole->end()};
  std::string text = std::get<std::string>(found->value);
  for (char& c : text)
    if (c == ',' || c == ';') c = ' ';
  std::vector<double> values;
  for (const std::string& word : split(text, ' ')) {
    if (trim(word).empty()) continue;
    const auto value = to_number(word);
    if (!value) return {};
    values.push_back(*value);
  }
  return values;
}

}  // namespace lagscape
