#include "lagscape/io/nc_handle.h"

#include <fcntl.h>
#include <sys/file.h>

#include "io/nc_sample.h"

namespace lagscape {
namespace {

using namespace test;

TEST(NcFile, AttributesComeBackAsTheyWereWritten) {
  const Folder folder;
  const std::string path = folder / "a.nc";
  const Attributes written = {{"title", std::string("Harrow Basin")},
                              {"count", std::vector<std::int64_t>{1, -2}},
                              {"share", std::vector<double>{0.25}}};
  {
    NcFile file = NcFile::create(path);
    const int dim = file.define_dimension("x", 2);
    const int var = file.define_variable("wetness", NC_FLOAT, std::vector<int>{dim});
    file.put_attributes(var, written);
    file.end_define();
    file.close();
  }
  const NcFile file = NcFile::open(path);
  EXPECT_EQ(file.kind(), "netCDF-4 (classic model)");
  const Attributes read = file.attributes(file.find("wetness").value());
  ASSERT_EQ(read.size(), written.size());
  for (std::size_t i = 0; i < read.size(); ++i) {
    EXPECT_EQ(read[i].name, written[i].name);
    EXPECT_EQ(read[i].value, written[i].value);
  }
  EXPECT_EQ(text_attribute(read, "title"), "Harrow Basin");
  EXPECT_EQ(number_attribute(read, "count"), (std::vector<double>{1, -2}));
}

TEST(NcFile, TextLosesPaddingAndNumbersInTextAreFound) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  s.text(NC_GLOBAL, "history", std::string("made by hand\n\0\0", 15));
  s.text(NC_GLOBAL, "range", "0, 24");
  s.text(NC_GLOBAL, "words", "about ten");
  const NcFile file = NcFile::open(s.close());
  const Attributes global = file.attributes(file.id(), NC_GLOBAL);
  EXPECT_EQ(text_attribute(global, "history"), "made by hand");
  EXPECT_EQ(number_attribute(global, "range"), (std::vector<double>{0, 24}));
  EXPECT_TRUE(number_attribute(global, "words").empty());
  EXPECT_TRUE(number_attribute(global, "absent").empty());
}

TEST(NcFile, ErrorsNameFileAndVariableAndAreOutputErrorsWhenWriting) {
  const Folder folder;
  const std::string path = folder / "a.nc";
  NcFile file = NcFile::create(path);
  const int dim = file.define_dimension("x", 2);
  file.define_variable("wetness", NC_FLOAT, std::vector<int>{dim});
  const std::string twice =
      message_of([&] { file.define_variable("wetness", NC_FLOAT, std::vector<int>{dim}); }, ErrorKind::output);
  EXPECT_TRUE(has(twice, "file: " + path + ", variable: wetness")) << twice;
  const std::string exists = message_of([&] { static_cast<void>(NcFile::create(path)); }, ErrorKind::output);
  EXPECT_TRUE(has(exists, "cannot be created")) << exists;
}

TEST(NcFile, AMissingCompressionFilterIsExplained) {
  const Folder folder;
  NcSample s(folder / "a.nc");
  s.put(s.var("wetness", NC_FLOAT, {s.dim("x", 2)}), {1, 2});
  const NcFile file = NcFile::open(s.close());
  const std::string message = message_of([&] { file.check(NC_EFILTER, "reading", file.find("wetness").value()); });
  EXPECT_TRUE(has(message, "variable: wetness") && has(message, "hdf5-filter-plugin") &&
              has(message, "HDF5_PLUGIN_PATH"))
      << message;
}

TEST(NcFile, AFileThatAnotherProgramHasLockedIsExplained) {
  const Folder folder;
  NcSample sample(folder / "a.nc");
  sample.dim("x", 2);
  const std::string path = sample.close();
  const int lock = ::open(path.c_str(), O_RDONLY);
  ASSERT_EQ(::flock(lock, LOCK_EX), 0);  // as HDF5 does while it writes
  const std::string message = message_of([&] { static_cast<void>(NcFile::open(path)); });
  ::close(lock);
  EXPECT_TRUE(has(message, "a.nc") && has(message, "HDF5_USE_FILE_LOCKING")) << message;
  EXPECT_NO_THROW(static_cast<void>(NcFile::open(path)));
}

}  // namespace
}  // namespace lagscape
