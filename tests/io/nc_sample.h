#pragma once
#include <gtest/gtest.h>
#include <netcdf.h>
#include <unistd.h>

#include <cmath>
#include <filesystem>
#include <initializer_list>
#include <limits>
#include <string>
#include <vector>

#include "lagscape/base/error.h"
#include "lagscape/io/archive.h"

namespace lagscape::test {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN(), kInfinity = std::numeric_limits<double>::infinity();

/// A folder for the files of one test, removed with them.
class Folder {
 public:
  Folder() {
    static int number = 0;
    path_ = std::filesystem::temp_directory_path() /
            ("lagscape_io_" + std::to_string(::getpid()) + "_" + std::to_string(++number));
    std::filesystem::create_directories(path_);
  }
  ~Folder() { std::filesystem::remove_all(path_); }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;
  [[nodiscard]] std::string operator/(const std::string& name) const { return (path_ / name).string(); }

 private:
  std::filesystem::path path_;
};

inline void ok(int status) { ASSERT_EQ(status, NC_NOERR) << nc_strerror(status); }

/// A netCDF file written by the plain C interface, value by value as the test states them.
class NcSample {
 public:
  explicit NcSample(std::string path, int mode = NC_NETCDF4) : path_(std::move(path)) {
    ok(nc_create(path_.c_str(), mode | NC_CLOBBER, &id_));
  }
  ~NcSample() { close(); }
  NcSample(const NcSample&) = delete;
  NcSample& operator=(const NcSample&) = delete;
  const std::string& close() {
    if (id_ >= 0) ok(nc_close(id_));
    id_ = -1;
    return path_;
  }

  [[nodiscard]] int id() const { return id_; }
  int dim(const char* name, std::size_t length) {
    int dim = -1;
    ok(nc_def_dim(id_, name, length, &dim));
    return dim;
  }
  int var(const char* name, nc_type type, const std::vector<int>& dims) {
    int var = -1;
    ok(nc_def_var(id_, name, type, static_cast<int>(dims.size()), dims.data(), &var));
    return var;
  }
  void text(int var, const char* name, const std::string& value) {
    ok(nc_put_att_text(id_, var, name, value.size(), value.data()));
  }
  void numbers(int var, const char* name, nc_type type, const std::vector<double>& values) {
    ok(nc_put_att_double(id_, var, name, type, values.size(), values.data()));
  }
  void put(int var, const std::vector<double>& values) {
    nc_enddef(id_);  // an error in netCDF-4, where it is not needed
    ok(nc_put_var_double(id_, var, values.data()));
    nc_redef(id_);
  }
  void put_text(int var, const std::string& values) {
    nc_enddef(id_);
    ok(nc_put_var_text(id_, var, values.data()));
    nc_redef(id_);
  }
  int coordinate(const char* name, const std::vector<int>& dims, const std::vector<double>& values,
                 const std::string& units, const std::string& standard_name = "", nc_type type = NC_DOUBLE) {
    const int v = var(name, type, dims);
    if (!units.empty()) text(v, "units", units);
    if (!standard_name.empty()) text(v, "standard_name", standard_name);
    put(v, values);
    return v;
  }

 private:
  std::string path_;
  int id_ = -1;
};

inline std::vector<double> range(double first, double step, std::size_t count) {
  std::vector<double> values(count);
  for (std::size_t i = 0; i < count; ++i) values[i] = first + step * static_cast<double>(i);
  return values;
}

/// Values of the whole source as steps x cells, read in bands of so many rows (0: all) and gathered in blocks of 5
/// cells.
inline std::vector<double> all_values(TileSource& source, std::size_t band_rows = 0, ValueCounts* counts = nullptr) {
  const Panel& panel = source.panel();
  const std::size_t steps = panel.axis.size(), cells = panel.geometry.cells(), cols = panel.geometry.cols;
  const std::size_t unit = panel.geometry.rows == 1 ? 1 : cols;
  const std::size_t band_cells = band_rows == 0 ? cells : band_rows * unit;
  constexpr std::size_t kLanes = 8, kBlock = 13;
  const std::size_t pitch = steps + 2;
  std::vector<double> out(steps * cells, -999), tile(2 * kLanes * pitch);
  ValueCounts found;
  std::unique_ptr<Band> band;
  for (std::size_t first = 0; first < cells; first += band_cells) {
    band = source.read({first, std::min(band_cells, cells - first)}, std::move(band));
    for (std::size_t at = 0; at < band->cells().count; at += kBlock) {
      const std::size_t some = std::min(kBlock, band->cells().count - at);
      band->gather(at, some, kLanes, pitch, tile.data(), found);
      for (std::size_t t = 0; t < steps; ++t)
        for (std::size_t c = 0; c < some; ++c)
          out[t * cells + first + at + c] = tile[(c / kLanes * pitch + t) * kLanes + c % kLanes];
    }
  }
  if (counts != nullptr) *counts = found;
  return out;
}

inline void expect_same(const std::vector<double>& got, const std::vector<double>& wanted) {
  ASSERT_EQ(got.size(), wanted.size());
  for (std::size_t i = 0; i < got.size(); ++i)
    if (std::isnan(wanted[i]))
      EXPECT_TRUE(std::isnan(got[i])) << "at " << i << ": " << got[i];
    else
      EXPECT_EQ(got[i], wanted[i]) << "at " << i;
}

/// The error that the call throws, as text; the test fails if it throws none or gives no remedy.
template <typename Call>
std::string message_of(Call call, ErrorKind kind = ErrorKind::input) {
  try {
    call();
  } catch (const Error& error) {
    EXPECT_FALSE(error.fix().empty()) << error.what();
    EXPECT_EQ(error.kind(), kind) << error.what();
    return error.what();
  }
  ADD_FAILURE() << "no error was thrown";
  return {};
}

inline bool has(const std::string& text, const std::string& part) { return text.find(part) != std::string::npos; }
inline bool noted(const Panel& panel, const std::string& part) {
  for (const std::string& note : panel.notes)
    if (has(note, part)) return true;
  return false;
}

inline InputRequest request(std::vector<std::string> files, std::string variable) {
  InputRequest out;
  out.files = std::move(files);
  out.variable = std::move(variable);
  return out;
}

}  // namespace lagscape::test
