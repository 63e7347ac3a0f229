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

TEST(NcFile, ValuesOfEveryTypeAndTextsComeBackAsTheyWerePut) {
  const Folder folder;
  const std::vector<std::string> names{"Alder Weir", "Cold Spring", ""};
  EXPECT_EQ(text_width(names), 11U);
  EXPECT_EQ(text_width({}), 1U);
  for (const int mode : {NC_NETCDF4 | NC_CLASSIC_MODEL, 0, NC_64BIT_OFFSET, NC_64BIT_DATA}) {
    const std::string path = folder / std::to_string(mode) + ".nc";
    NcFile file = NcFile::create(path, mode);
    const int step = file.define_dimension("step", NC_UNLIMITED), x = file.define_dimension("x", 3);
    const int letters = file.define_dimension("letters", text_width(names));
    const std::vector<int> dims{step, x};
    const int real = file.define_variable("real", NC_DOUBLE, dims),
              single = file.define_variable("single", NC_FLOAT, dims);
    const int whole = file.define_variable("whole", NC_INT, dims),
              small = file.define_variable("small", NC_SHORT, dims);
    const int centre = file.define_variable("centre", NC_DOUBLE, std::vector{x});
    const int name = file.define_variable("name", NC_CHAR, std::vector{x, letters});
    file.define_fill(small, -9);
    file.put_text(real, "units", "");
    file.end_define();
    file.put(real, {0, 0}, {1, 3}, std::vector<double>{0.1, 0.2, 0.3}.data());
    file.put(single, {0, 0}, {1, 3}, std::vector<float>{0.5F, 1, 2}.data());
    file.put(whole, {0, 0}, {1, 3}, std::vector<std::int32_t>{1, -2, 70000}.data());
    file.put(small, {0, 1}, {1, 2}, std::vector<std::int16_t>{7, 8}.data());
    file.put(centre, {10, 20, 30});
    file.put_texts(name, names);
    file.close();
    NcFile again = NcFile::reopen(path);
    const std::vector<float> more{3, 4, 5};
    again.put(again.find("single").value().id, {1, 0}, {1, 3}, reinterpret_cast<const std::byte*>(more.data()));
    again.close();
    const NcFile read = NcFile::open(path);
    const auto values = [&](const char* of) { return read.doubles(read.find(of).value()); };
    EXPECT_EQ(values("single"), (std::vector<double>{0.5, 1, 2, 3, 4, 5}));
    EXPECT_EQ(values("small"), (std::vector<double>{-9, 7, 8, -9, -9, -9}));
    EXPECT_EQ(values("whole")[2], 70000);
    EXPECT_EQ(values("real")[1], 0.2);
    EXPECT_EQ(values("centre"), (std::vector<double>{10, 20, 30}));
    EXPECT_EQ(read.texts(read.find("name").value()), names);
    EXPECT_TRUE(read.attributes(read.find("real").value()).empty());
  }
}

TEST(NcFile, StorageIsChunkedAndDeflatedOrContiguousAsAsked) {
  const Folder folder;
  NcFile file = NcFile::create(folder / "a.nc");
  const std::vector<int> dims{file.define_dimension("x", 100)};
  const int chunked = file.define_variable("chunked", NC_FLOAT, dims),
            plain = file.define_variable("plain", NC_FLOAT, dims);
  file.define_storage(chunked, std::vector<std::size_t>{25}, 3);
  file.define_storage(plain, {}, 0);
  int storage = -1, shuffle = -1, deflate = -1, level = -1;
  std::size_t chunk = 0;
  nc_inq_var_chunking(file.id(), chunked, &storage, &chunk);
  nc_inq_var_deflate(file.id(), chunked, &shuffle, &deflate, &level);
  EXPECT_EQ(storage, NC_CHUNKED);
  EXPECT_EQ(chunk, 25U);
  EXPECT_EQ((std::vector{shuffle, deflate, level}), (std::vector{1, 1, 3}));
  nc_inq_var_chunking(file.id(), plain, &storage, nullptr);
  EXPECT_EQ(storage, NC_CONTIGUOUS);
}

TEST(NcFile, ValuesBeyondTheEndAndVariablesTooLargeForTheFormatAreToldWithARemedy) {
  const Folder folder;
  NcFile file = NcFile::create(folder / "a.nc", 0);
  const int x = file.define_dimension("x", 2), y = file.define_dimension("y", 2000000000);
  const int wetness = file.define_variable("wetness", NC_DOUBLE, std::vector{x});
  file.end_define();
  const std::string beyond = message_of(
      [&] {
        file.put(wetness, {1}, {2}, std::vector<double>{1, 2}.data());
      },
      ErrorKind::output);
  EXPECT_TRUE(has(beyond, "variable: wetness")) << beyond;
  ASSERT_EQ(nc_redef(file.id()), NC_NOERR);
  file.define_variable("map", NC_DOUBLE, std::vector{y});
  file.define_variable("last", NC_DOUBLE, std::vector{x});
  const std::string large = message_of([&] { file.end_define(); }, ErrorKind::output);
  EXPECT_TRUE(has(large, "netCDF-4")) << large;
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
