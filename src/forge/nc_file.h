#pragma once
#include <cstddef>
#include <span>
#include <string>
#include <vector>

#include "forge/recipe.h"
#include "lagscape/base/attribute.h"

namespace lagscape {

/// A NetCDF file being written; closed by close(), or silently when destroyed. Every failure is an Error{output} that
/// names the file and the variable.
class NcWriter {
 public:
  [[nodiscard]] static NcWriter create(const std::string& path, FileFormat format);
  /// Opens a file made by create() to write more values.
  [[nodiscard]] static NcWriter reopen(const std::string& path);
  ~NcWriter();
  NcWriter(NcWriter&& other) noexcept;
  NcWriter& operator=(NcWriter&&) = delete;

  /// length 0: unlimited.
  int dimension(const std::string& name, std::size_t length);
  /// nc_type: NC_DOUBLE ... of netcdf.h.
  int variable(const std::string& name, int nc_type, const std::vector<int>& dimensions);
  void storage(int variable, const std::vector<std::size_t>& chunks, int deflate);  ///< no chunks: contiguous
  void fill(int variable, double value);                        ///< _FillValue in the variable's type
  void attributes(int variable, const Attributes& attributes);  ///< variable -1: of the file
  void end_definition();
  [[nodiscard]] int find(const std::string& variable);
  void put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
           const double* values);
  void put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
           const float* values);
  void put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
           const short* values);
  void put(int variable, const std::vector<std::size_t>& start, const std::vector<std::size_t>& count,
           const int* values);
  void put_texts(int variable, const std::vector<std::string>& texts, std::size_t width);
  void close();

 private:
  NcWriter(std::string path, int id) : path_(std::move(path)), id_(id) {}
  void check(int status, int variable = -1) const;

  std::string path_;
  int id_;
};

}  // namespace lagscape
