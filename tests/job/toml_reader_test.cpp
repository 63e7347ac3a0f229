#include "lagscape/job/toml_reader.h"

#include <gtest/gtest.h>
#include <unistd.h>

#include <filesystem>
#include <fstream>

#include "lagscape/base/error.h"

namespace lagscape {
namespace {

TomlReader reader(const std::string& text, const std::vector<std::string>& overrides = {}) {
  return TomlReader::from_text(text, "a.toml", overrides);
}

std::string problems(const TomlReader& toml) {
  try {
    toml.finish();
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::job);
    return error.problem();
  }
  return "";
}

TEST(TomlReader, GettersReturnValuesAndNothingForAbsentKeys) {
  auto toml = reader("a = 1\n[t]\nb = 2.5\nc = 'x'\nd = ['x', 'y']\ne = [1, 2.5]\nf = true\n");
  EXPECT_EQ(toml.integer("a"), 1);
  EXPECT_EQ(toml.number("a"), 1.0);
  EXPECT_EQ(toml.number("t.b"), 2.5);
  EXPECT_EQ(toml.text("t.c"), "x");
  EXPECT_EQ(toml.texts("t.c"), (std::vector<std::string>{"x"}));
  EXPECT_EQ(toml.texts("t.d"), (std::vector<std::string>{"x", "y"}));
  EXPECT_EQ(toml.numbers("t.e"), (std::vector<double>{1, 2.5}));
  EXPECT_EQ(toml.boolean("t.f"), true);
  EXPECT_FALSE(toml.number("t.z"));
  EXPECT_TRUE(toml.has("t.f"));
  EXPECT_FALSE(toml.has("u.f"));
  EXPECT_EQ(toml.keys("t").size(), 5U);
  EXPECT_EQ(problems(toml), "");
}

TEST(TomlReader, EveryProblemIsToldAtOnceInOrderOfPlace) {
  auto toml = reader("[t]\nb = 'much'\nn = 2.5\nc = 3\nlist = [1, 'x']\nword = 'rde'\n");
  EXPECT_FALSE(toml.choice("t.word", {"red", "blue"}));
  EXPECT_FALSE(toml.number("t.b"));
  EXPECT_FALSE(toml.integer("t.n"));
  EXPECT_FALSE(toml.text("t.c"));
  EXPECT_FALSE(toml.numbers("t.list"));
  EXPECT_EQ(problems(toml),
            "5 problems in a.toml\n"
            "  a.toml:2:5: b: found the text \"much\", expected a number\n"
            "  a.toml:3:5: n: found the number 2.5, expected a whole number\n"
            "  a.toml:4:5: c: found the whole number 3, expected a text\n"
            "  a.toml:5:12: list: found the text \"x\", expected only numbers in this list\n"
            "  a.toml:6:8: word: found \"rde\", expected red | blue, did you mean 'red'?");
}

TEST(TomlReader, UnknownKeysAreToldWithTheNearestNameOrTheirTrueTable) {
  auto toml = reader("[prepare]\nmin_shar = 0.5\nalpha = 1\nqqqqqqqqqq = 1\n[memroy]\nx = 1\n");
  toml.refuse_unknown({"prepare.min_share", "trend.alpha", "memory.x"});
  EXPECT_EQ(problems(toml),
            "4 problems in a.toml\n"
            "  a.toml:2:1: unknown key 'min_shar' in [prepare], did you mean 'min_share'?\n"
            "  a.toml:3:1: unknown key 'alpha' in [prepare]; there is a 'trend.alpha', which belongs in [trend]\n"
            "  a.toml:4:1: unknown key 'qqqqqqqqqq' in [prepare]; known here: min_share\n"
            "  a.toml:5:2: unknown key 'memroy', did you mean 'memory'?");
}

TEST(TomlReader, FreeTablesAreNotSearchedForUnknownKeys) {
  auto toml = reader("[input]\nselect = { level = 850, 'odd.name' = 2 }\n");
  toml.refuse_unknown({"input.select"});
  EXPECT_EQ(toml.keys("input.select"), (std::vector<std::string>{"level", "odd.name"}));
  EXPECT_EQ(toml.number("input.select.odd.name"), 2.0);
  EXPECT_EQ(problems(toml), "");
}

TEST(TomlReader, AValueInPlaceOfATableIsToldAsSuch) {
  auto toml = reader("input = 3\npatch = 4\n");
  toml.refuse_unknown({"input.files", "patch[].ar"});
  EXPECT_EQ(problems(toml),
            "2 problems in a.toml\n"
            "  a.toml:1:9: input: found the whole number 3, expected a table [input]\n"
            "  a.toml:2:9: patch: found the whole number 4, expected tables that begin with [[patch]]");
}

TEST(TomlReader, ArraysOfTablesAreReachedByIndex) {
  auto toml = reader("[[patch]]\nar = [0.5]\n[[patch]]\nar = [0.6]\nra = 1\n");
  toml.refuse_unknown({"patch[].ar"});
  EXPECT_EQ(toml.array_size("patch"), 2U);
  EXPECT_EQ(toml.numbers("patch[1].ar"), (std::vector<double>{0.6}));
  EXPECT_FALSE(toml.has("patch[2].ar"));
  EXPECT_EQ(problems(toml), "1 problem in a.toml\n  a.toml:5:1: unknown key 'ra' in [patch[1]], did you mean 'ar'?");
}

TEST(TomlReader, OverridesReplaceKeysAsTomlOrElseAsText) {
  auto toml = reader("[t]\na = 1\n[[patch]]\nar = [0.5]\n",
                     {"t.a=2", "t.b=sst", "u.c=[1, 2]", "u.d=", "t.e=\"3\"", "patch[0].ar=[0.9]", "t.f=1\nt.g=2"});
  EXPECT_EQ(toml.number("t.a"), 2.0);
  EXPECT_EQ(toml.text("t.b"), "sst");
  EXPECT_EQ(toml.numbers("u.c"), (std::vector<double>{1, 2}));
  EXPECT_EQ(toml.text("u.d"), "");
  EXPECT_EQ(toml.text("t.e"), "3");
  EXPECT_EQ(toml.numbers("patch[0].ar"), (std::vector<double>{0.9}));
  EXPECT_EQ(toml.text("t.f"), "1\nt.g=2");
  EXPECT_TRUE(toml.overridden("t.a"));
  EXPECT_TRUE(toml.overridden("patch[0].ar"));
  EXPECT_FALSE(toml.overridden("t"));
  EXPECT_EQ(problems(toml), "");
}

TEST(TomlReader, ProblemsOfOverridesNameTheOption) {
  auto toml = reader("[t]\na = 1\n", {"t.a=many", "t.bb=1", "t.a.c=1", "nothing"});
  EXPECT_FALSE(toml.number("t.a"));
  toml.refuse_unknown({"t.a", "t.b"});
  EXPECT_EQ(problems(toml),
            "4 problems in a.toml\n"
            "  --set t.a: a: found the text \"many\", expected a number\n"
            "  --set t.bb: unknown key 'bb' in [t], did you mean 'b'?\n"
            "  --set t.a.c: there is no table 't.a' to put it into\n"
            "  --set nothing: expected KEY=VALUE, such as field.rate=0.05");
}

TEST(TomlReader, AnOverrideThatLeadsThroughAListIsToldHowElementsAreWritten) {
  auto toml = reader("[[patch]]\nar = [0.5]\n[[patch]]\nar = [0.6]\n[[lake]]\nrows = [1, 2]\n",
                     {"patch.0.ar=[0.9]", "patch[2].ar=[0.9]", "patch.ar=[0.9]", "lake.rows=[1, 1]"});
  const std::string elements = "'patch' is a list, whose elements are patch[0] to patch[1]: write patch[0].ar\n";
  EXPECT_EQ(problems(toml),
            "4 problems in a.toml\n  --set patch.0.ar: " + elements + "  --set patch[2].ar: " + elements +
                "  --set patch.ar: " + elements +
                "  --set lake.rows: 'lake' is a list, whose only element is lake[0]: write lake[0].rows");
}

TEST(TomlReader, KeysOfALaterVersionAreToldAsSuchAndNeverOffered) {
  auto toml = reader("later = 1\nlatex = 2\n[t]\nnew = { a = 1 }\nzzz = 2\n");
  toml.refuse_unknown({"title", "t.file"}, {"later", "t.new"});
  EXPECT_EQ(problems(toml),
            "4 problems in a.toml\n"
            "  a.toml:1:1: later: a later version will read this key; take it out for now\n"
            "  a.toml:2:1: unknown key 'latex'; known here: t, title\n"
            "  a.toml:4:1: new: a later version will read this key; take it out for now\n"
            "  a.toml:5:1: unknown key 'zzz' in [t]; known here: file");
}

TEST(TomlReader, AProblemOfAnAbsentKeyIsPlacedAtItsTable) {
  auto toml = reader("x = 1\n\n[input]\nvariable = 'v'\n");
  toml.problem("input.files", "input.files is missing");
  toml.problem("output.file", "output.file is missing");
  EXPECT_EQ(problems(toml),
            "2 problems in a.toml\n  a.toml:1:1: output.file is missing\n  a.toml:3:1: input.files is missing");
}

TEST(TomlReader, TomlDatesStandForTheirIsoText) {
  auto toml = reader("period = [1981-01-01, 2020-12-31]\n");
  EXPECT_EQ(toml.texts("period"), (std::vector<std::string>{"1981-01-01", "2020-12-31"}));
}

TEST(TomlReader, NanIsNotANumberAndInfinityOnlyInLists) {
  auto toml = reader("a = nan\nb = inf\nc = [0, inf]\nd = [nan]\n");
  EXPECT_FALSE(toml.number("a"));
  EXPECT_FALSE(toml.number("b"));
  EXPECT_TRUE(toml.numbers("c"));
  EXPECT_FALSE(toml.numbers("d"));
}

TEST(TomlReader, SyntaxErrorsNameThePlace) {
  try {
    (void)reader("[t]\na = \n");
    FAIL() << "accepted";
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::job);
    EXPECT_EQ(error.where().substr(0, 9), "a.toml:2:");
    EXPECT_EQ(error.problem().substr(0, 15), "not valid TOML:");
  }
}

std::string refusal(const std::string& path) {
  try {
    (void)TomlReader::from_file(path);
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::job);
    EXPECT_EQ(error.where().substr(0, path.size()), path);
    EXPECT_NE(error.fix(), "");
    return error.problem();
  }
  return "accepted";
}

TEST(TomlReader, FilesThatCannotBeReadAreRefused) {
  EXPECT_EQ(refusal("no_such_folder/no_such.toml"), "this file does not exist");
  EXPECT_EQ(refusal("."), "this is a folder, not a TOML file");
}

// First bytes: NetCDF User's Guide, appendix "File Format Specifications"; HDF5 File Format Specification 3.0, II.A.
TEST(TomlReader, DataGivenInPlaceOfAJobAreToldAsSuch) {
  const std::string path =
      (std::filesystem::path(testing::TempDir()) / ("lagscape_toml_data_" + std::to_string(getpid()))).string();
  for (const char* head : {"CDF\1", "CDF\2", "CDF\5", "\211HDF\r\n\032\n"}) {
    std::ofstream(path, std::ios::binary) << head << "some more";
    EXPECT_EQ(refusal(path), "this looks like a NetCDF file, expected a TOML file");
  }
  std::ofstream(path, std::ios::binary) << "CDF = 1\n";
  EXPECT_EQ(refusal(path), "accepted");
  std::ofstream(path, std::ios::binary) << "a";
  EXPECT_EQ(refusal(path).substr(0, 15), "not valid TOML:");
  std::filesystem::remove(path);
}

TEST(TomlReader, FolderIsThatOfTheFile) {
  const auto folder = std::filesystem::path(testing::TempDir()) / ("lagscape_toml_" + std::to_string(getpid()));
  std::filesystem::create_directories(folder);
  std::ofstream(folder / "j.toml") << "a = 1\n";
  const auto toml = TomlReader::from_file((folder / "j.toml").string());
  EXPECT_EQ(toml.folder(), folder.string());
  EXPECT_EQ(toml.source_text(), "a = 1\n");
  std::filesystem::remove_all(folder);
}

}  // namespace
}  // namespace lagscape
