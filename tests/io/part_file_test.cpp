#include "lagscape/io/part_file.h"

#include <fstream>

#include "io/nc_sample.h"

namespace lagscape {
namespace {

using namespace test;
namespace fs = std::filesystem;

const std::string kRemedy = "name another file";

void fill(const std::string& path, const std::string& text) { std::ofstream(path) << text; }

std::string content(const std::string& path) {
  std::ifstream file(path);
  std::string text;
  std::getline(file, text);
  return text;
}

std::size_t files_in(const std::string& folder) {
  return static_cast<std::size_t>(std::distance(fs::directory_iterator(folder), {}));
}

TEST(PartFiles, GetTheirNamesTogetherWhenCommitted) {
  const Folder folder;
  PartFiles files(folder / "new", {"a.nc", "b.csv"}, false, kRemedy);
  fill(files.part("a.nc"), "one");
  fill(files.part("b.csv"), "two");
  EXPECT_FALSE(fs::exists(folder / "new/a.nc"));
  EXPECT_EQ(files.commit(), (std::vector<std::string>{folder / "new/a.nc", folder / "new/b.csv"}));
  EXPECT_EQ(content(folder / "new/a.nc") + content(folder / "new/b.csv"), "onetwo");
  EXPECT_EQ(files_in(folder / "new"), 2U);
}

TEST(PartFiles, LeaveNothingBehindUnlessCommitted) {
  const Folder folder;
  {
    const PartFiles files(folder / "new/deep", {"a.nc", "b.nc"}, false, kRemedy);
    fill(files.part("a.nc"), "half");
  }
  EXPECT_EQ(files_in(folder / ""), 0U);
}

TEST(PartFiles, AFileThatWasNeverWrittenIsAnErrorAndNamesNone) {
  const Folder folder;
  PartFiles files(folder / "", {"a.nc", "b.nc"}, false, kRemedy);
  fill(files.part("b.nc"), "whole");
  EXPECT_TRUE(has(message_of([&] { files.commit(); }, ErrorKind::output), "a.nc"));
  EXPECT_FALSE(fs::exists(folder / "b.nc"));
}

TEST(PartFiles, TakenNamesAreAllToldUnlessTheyMayBeReplaced) {
  const Folder folder;
  fill(folder / "a.nc", "old");
  const auto refused = [&](std::vector<std::string> names, bool replace) {
    return message_of([&] { PartFiles(folder / "", std::move(names), replace, kRemedy); }, ErrorKind::output);
  };
  const std::string one = refused({"a.nc", "b.nc"}, false);
  EXPECT_TRUE(has(one, "exists already") && has(one, folder / "a.nc") && has(one, "--replace") && has(one, kRemedy))
      << one;
  fill(folder / "b.nc", "old");
  EXPECT_TRUE(has(refused({"a.nc", "b.nc"}, false), "a.nc, b.nc"));
  PartFiles files(folder / "", {"a.nc"}, true, kRemedy);
  fill(files.part("a.nc"), "new");
  files.commit();
  EXPECT_EQ(content(folder / "a.nc"), "new");
  fs::create_directory(folder / "c.nc");
  EXPECT_TRUE(has(refused({"c.nc"}, true), "name is that of a folder"));
}

TEST(PartFiles, ANameTakenMeanwhileIsNotOverwritten) {
  const Folder folder;
  PartFiles files(folder / "", {"a.nc"}, false, kRemedy);
  fill(files.part("a.nc"), "new");
  fill(folder / "a.nc", "theirs");
  EXPECT_TRUE(has(message_of([&] { files.commit(); }, ErrorKind::output), "exists already"));
  EXPECT_EQ(content(folder / "a.nc"), "theirs");
}

TEST(CloseText, TellsThatADiskTookLessThanWasWritten) {
  std::ofstream full("/dev/full");
  full << "wetness\n";
  const std::string message = message_of([&] { close_text(full, "table.csv"); }, ErrorKind::output);
  EXPECT_TRUE(has(message, "table.csv") && has(message, "No space left")) << message;
}

TEST(PartFiles, AFolderThatCannotBeMadeIsTold) {
  const Folder folder;
  fill(folder / "file", "");
  const std::string message =
      message_of([&] { PartFiles(folder / "file/deep", {"a.nc"}, false, kRemedy); }, ErrorKind::output);
  EXPECT_TRUE(has(message, "folder: " + (folder / "file/deep")) && has(message, kRemedy)) << message;
}

}  // namespace
}  // namespace lagscape
