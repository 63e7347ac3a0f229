#include "io/classic_check.h"

#include <gtest/gtest.h>
#include <netcdf.h>

#include <filesystem>
#include <fstream>
#include <sstream>

#include "lagscape/base/error.h"

namespace lagscape {
namespace {

class ClassicFile {
 public:
  // Two record variables (one of bytes, to need padding) and a fixed one, in the given kind.
  ClassicFile(int mode, bool two_records, std::size_t records) {
    path_ =
        (std::filesystem::temp_directory_path() / ("lagscape_classic_" + std::to_string(::getpid()) + ".nc")).string();
    int id = 0, time = 0, x = 0, flag = 0, value = 0, fixed = 0;
    EXPECT_EQ(nc_create(path_.c_str(), mode | NC_CLOBBER, &id), NC_NOERR);
    nc_def_dim(id, "time", NC_UNLIMITED, &time);
    nc_def_dim(id, "x", 3, &x);
    const int both[] = {time, x};
    nc_def_var(id, "fixed", NC_DOUBLE, 1, &x, &fixed);
    nc_def_var(id, "flag", NC_BYTE, 2, both, &flag);
    if (two_records) nc_def_var(id, "value", NC_INT, 2, both, &value);
    nc_put_att_text(id, NC_GLOBAL, "title", 5, "wells");
    nc_enddef(id);
    const double ones[] = {1, 1, 1};
    nc_put_var_double(id, fixed, ones);
    for (std::size_t t = 0; t < records; ++t) {
      const std::size_t start[] = {t, 0}, count[] = {1, 3};
      nc_put_vara_double(id, flag, start, count, ones);
      if (two_records) nc_put_vara_double(id, value, start, count, ones);
    }
    EXPECT_EQ(nc_close(id), NC_NOERR);
  }
  ~ClassicFile() { std::filesystem::remove(path_); }
  ClassicFile(const ClassicFile&) = delete;
  ClassicFile& operator=(const ClassicFile&) = delete;
  [[nodiscard]] const std::string& path() const { return path_; }
  [[nodiscard]] std::uint64_t size() const { return std::filesystem::file_size(path_); }
  void cut(std::uint64_t size) const { std::filesystem::resize_file(path_, size); }

 private:
  std::string path_;
};

constexpr int kKinds[] = {0, NC_64BIT_OFFSET, NC_64BIT_DATA};

TEST(ClassicCheck, NeededSizeIsTheFileSizeOfAnIntactFile) {
  for (const int kind : kKinds)
    for (const bool two : {false, true})
      for (const std::size_t records : {0U, 1U, 5U}) {
        const ClassicFile file(kind, two, records);
        std::ifstream in(file.path(), std::ios::binary);
        const auto needed = classic_bytes_needed(in, file.size());
        ASSERT_TRUE(needed.has_value());
        // The library may pad the end of the file to a multiple of four bytes.
        EXPECT_LE(*needed, file.size());
        EXPECT_GT(*needed + 4, file.size()) << "kind " << kind << " records " << records;
        EXPECT_NO_THROW(refuse_truncated_classic(file.path()));
      }
}

TEST(ClassicCheck, EveryCutIsRefused) {
  for (const int kind : kKinds) {
    const ClassicFile file(kind, true, 4);
    const std::uint64_t whole = file.size();
    std::ifstream in(file.path(), std::ios::binary);
    const std::uint64_t needed = classic_bytes_needed(in, whole).value_or(0);
    for (std::uint64_t size = needed - 1; size >= 4; --size) {
      file.cut(size);
      EXPECT_THROW(refuse_truncated_classic(file.path()), Error) << size << " of " << whole;
    }
  }
}

TEST(ClassicCheck, OtherFilesAreLeftToTheLibrary) {
  std::istringstream text("date,gauge\n2001-01-01,3\n"), nothing(""), hdf("\x89HDF\r\n\x1a\n");
  EXPECT_FALSE(classic_bytes_needed(text, 24).has_value());
  EXPECT_FALSE(classic_bytes_needed(nothing, 0).has_value());
  EXPECT_FALSE(classic_bytes_needed(hdf, 8).has_value());
  EXPECT_NO_THROW(refuse_truncated_classic("no_such_file.nc"));
}

TEST(ClassicCheck, DamagedHeaderIsSaidSo) {
  std::string bytes = {'C', 'D', 'F', 1, 0, 0, 0, 0, 0, 0, 0, 99, 0, 0, 0, 1};
  std::istringstream in(bytes);
  EXPECT_THROW(static_cast<void>(classic_bytes_needed(in, bytes.size())), std::invalid_argument);
}

}  // namespace
}  // namespace lagscape
