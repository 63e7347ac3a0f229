#include "forge/nc_file.h"

#include <fmt/format.h>
#include <netcdf.h>

#include <array>
#include <utility>

#include "lagscape/base/error.h"

namespace lagscape {
namespace {

int creation_mode(FileFormat format) {
  switch (format) {
    case FileFormat::classic:
      return NC_CLOBBER;
    case FileFormat::offset64:
      return NC_CLOBBER | NC_64BIT_OFFSET;
    case FileFormat::cdf5:
      return NC_CLOBBER | NC_64BIT_DATA;
    default:
      return NC_CLOBBER | NC_NETCDF4 | NC_CLASSIC_MODEL;
  }
}

}  // namespace

NcWriter NcWriter::create(const std::string& path, FileFormat format) {
  int id = -1;
  const int status = nc_create(path.c_str(), creation_mode(format), &id);
  NcWriter file(path, id);
  file.check(status);
  return file;
}

NcWriter NcWriter::reopen(const std::string& path) {
  int id = -1;
  const int status = nc_open(path.c_str(), NC_WRITE, &id);
  NcWriter file(path, id);
  file.check(status);
  return file;
}

NcWriter::~NcWriter() {
  if (id_ >= 0) nc_close(id_);  // only left open when an error is on its way
}

NcWriter::NcWriter(NcWriter&& other) noexcept : path_(std::move(other.path_)), id_(std::exchange(other.id_, -1)) {}

void NcWriter::check(int status, int variable) const {
  if (status == NC_NOERR) return;
  std::array<char, NC_MAX_NAME + 1> name{};
  const bool named = variable >= 0 && nc_inq_varname(id_, variable, name.data()) == NC_NOERR;
  throw Error(ErrorKind::output, fmt::format("the file could not be written: {}", nc_strerror(status)),
              fmt::format("file: {}{}{}", path_, named ? ", variable: " : "", name.data()),
              "check that its folder exists and may be written to, that the disk has room, and that the format holds "
              "so large a file");
}

int NcWriter::dimension(const std::string& name, std::size_t length) {
  int dimension = -1;
  check(nc_def_dim(id_, name.c_str(), length == 0 ? NC_UNLIMITED : length, &dimension));
  return dimension;
}

int NcWriter::variable(const std::string& name, int nc_type, const std::vector<int>& dimensions) {
  int variable = -1;
  check(nc_def_var(id_, name.c_str(), nc_type, static_cast<int>(dimensions.size()), dimensions.data(), &variable));
  return variable;
}

void NcWriter::storage(int variable, const std::vector<std::size_t>& chunks, int deflate) {
  if (chunks.empty()) return check(nc_def_var_chunking(id_, variable, NC_CONTIGUOUS, nullptr), variable);
  check(nc_def_var_chunking(id_, variable, NC_CHUNKED, chunks.data()), variable);
  if (deflate > 0) check(nc_def_var_deflate(id_, variable, 1, 1, deflate), variable);
}

void NcWriter::fill(int variable, double value) {
  nc_type type = NC_NAT;
  check(nc_inq_vartype(id_, variable, &type), variable);
  check(nc_put_att_double(id_, variable, "_FillValue", type, 1, &value), variable);
}

void NcWriter::attributes(int variable, const Attributes& attributes) {
  const int where = variable < 0 ? NC_GLOBAL : variable;
  for (const auto& [name, value] : attributes) {
    if (const auto* text = std::get_if<std::string>(&value)) {
      if (!text->empty()) check(nc_put_att_text(id_, where, name.c_str(), text->size(), text->data()), variable);
    } else if (const auto* whole = std::get_if<std::vector<std::int64_t>>(&value)) {
      const std::vector<long long> wide(whole->begin(), whole->end());
      check(nc_put_att_longlong(id_, where, name.c_str(), NC_INT, wide.size(), wide.data()), variable);
    } else {
      const auto& numbers = std::get<std::vector<double>>(value);
      check(nc_put_att_double(id_, where, name.c_str(), NC_DOUBLE, numbers.size(), numbers.data()), variable);
    }
  }
}

void NcWriter::end_definition() { check(nc_enddef(id_)); }

int NcWriter::find(const std::string& variable) {
  int found = -1;
  check(nc_inq_varid(id_, variable.c_str(), &found));
  return found;
}

void NcWriter::put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
                 const double* values) {
  check(nc_put_vara_double(id_, variable, start.data(), count.data(), values), variable);
}
void NcWriter::put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
                 const float* values) {
  check(nc_put_vara_float(id_, variable, start.data(), count.data(), values), variable);
}
void NcWriter::put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
                 const short* values) {
  check(nc_put_vara_short(id_, variable, start.data(), count.data(), values), variable);
}
void NcWriter::put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
                 const int* values) {
  check(nc_put_vara_int(id_, variable, start.data(), count.data(), values), variable);
}

void NcWriter::put_texts(int variable, const std::vector<std::string>& texts, std::size_t width) {
  std::string padded;
  for (const std::string& text : texts) padded += text + std::string(width - text.size(), '\0');
  check(nc_put_var_text(id_, variable, padded.data()), variable);
}

void NcWriter::close() { check(nc_close(std::exchange(id_, -1))); }

}  // namespace lagscape
