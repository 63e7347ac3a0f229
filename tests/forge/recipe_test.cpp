#include "forge/recipe.h"

#include <gtest/gtest.h>

#include <fstream>
#include <iterator>

#include "forge/recipes.h"
#include "lagscape/base/error.h"

namespace lagscape {
namespace {

std::string problems_of(const RecipeText& text) {
  try {
    (void)parse_recipe(text.text(), "recipe.toml", ".", {});
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::job);
    return error.what();
  }
  return "";
}

bool has(const std::string& text, const std::string& part) { return text.find(part) != std::string::npos; }

TEST(Recipe, ASmallOneIsRead) {
  const Recipe recipe = parse_recipe(RecipeText().text(), "recipe.toml", "some/folder", {});
  EXPECT_EQ(recipe.axis.size(), 120U);
  EXPECT_EQ(recipe.geometry.cells(), 60U);
  EXPECT_EQ(recipe.geometry.y.values, (std::vector<double>{50, 49, 48, 47, 46, 45}));
  EXPECT_EQ(recipe.output.folder, "some/folder/out");
  EXPECT_EQ(recipe.variables.at(0).patch_of_cell, std::vector<int>(60, 0));
}

TEST(Recipe, AFolderGivenBySetIsRelativeToTheShell) {
  const Recipe recipe = parse_recipe(RecipeText().text(), "recipe.toml", "some/folder", {"output.folder=there"});
  EXPECT_EQ(recipe.output.folder, "there");
}

TEST(Recipe, AnEndDateCountsTheStepsUpToIt) {
  RecipeText text;
  text.time = "start = \"1981-01-15\"\nend = \"2020-12-31\"\nstep = \"P1M\"\n";
  EXPECT_EQ(parse_recipe(text.text(), "r", ".", {}).axis.size(), 480U);
  text.time = "start = \"2001-01-01\"\nend = \"2020-12-31\"\nstep = \"P1D\"\n";
  EXPECT_EQ(parse_recipe(text.text(), "r", ".", {}).axis.size(), 7305U);
  text.time = "start = \"2001-01-01\"\nend = \"2002-12-31\"\nstep = \"PT6H\"\ncalendar = \"noleap\"\n";
  EXPECT_EQ(parse_recipe(text.text(), "r", ".", {}).axis.size(), 4U * 730);
  text.time = "start = \"1900-07-01\"\nend = \"1999\"\nstep = \"P1Y\"\n";
  EXPECT_EQ(parse_recipe(text.text(), "r", ".", {}).axis.size(), 100U);
}

TEST(Recipe, EveryProblemIsToldAtOnceAndAtItsPlace) {
  RecipeText text;
  text.top = "seed = -1\nsede = 2\n";
  text.time = "start = \"1981-02-30\"\nsteps = 120\nstep = \"monthly\"\n";
  text.patches = "[[patch]]\nname = \"two words\"\nar = [0.8, 0.3]\nrows = [0, 6]\n";
  text.output = "folder = \"out\"\nname = \"made\"\nlayout = \"maps\"\n";
  const std::string told = problems_of(text);
  EXPECT_TRUE(has(told, "8 problems")) << told;
  EXPECT_TRUE(has(told, "recipe.toml:1:")) << told;
  EXPECT_TRUE(has(told, "unknown key 'sede', did you mean 'seed'?")) << told;
  EXPECT_TRUE(has(told, "\"1981-02-30\"")) << told;
  EXPECT_TRUE(has(told, "\"monthly\"")) << told;
  EXPECT_TRUE(has(told, "[0.8, 0.3], which is not stationary")) << told;
  EXPECT_TRUE(has(told, "one word")) << told;
  EXPECT_TRUE(has(told, "within 0 to 5")) << told;
  EXPECT_TRUE(has(told, "did you mean 'map'?")) << told;
}

TEST(Recipe, WhatDoesNotFitTogetherIsRefused) {
  const auto refused = [](auto change, const std::string& words) {
    RecipeText text;
    change(text);
    const std::string told = problems_of(text);
    EXPECT_TRUE(has(told, words)) << words << "\n" << told;
  };
  refused([](RecipeText& r) { r.time += "end = \"1999-01-01\"\n"; }, "either steps = 480 or end");
  refused([](RecipeText& r) { r.space += "[[site]]\nname = \"A\"\nlat = 1\nlon = 1\n"; }, "not both");
  refused([](RecipeText& r) { r.patches = ""; }, "at least one [[patch]]");
  refused([](RecipeText& r) { r.patches += "rows = [0, 4]\n"; }, "no patch of 'wetness' covers row 5, column 0");
  refused([](RecipeText& r) { r.patches += "d = 0.3\n"; }, "either ar or d");
  refused([](RecipeText& r) { r.patches += "variable = \"dryness\"\n"; }, "the name of a [[variable]]");
  refused([](RecipeText& r) { r.patches = "[[patch]]\nname = \"p\"\nd = 0.5\n"; }, "above -0.5 and below 0.5");
  refused([](RecipeText& r) { r.patches += "gaps = { months = [13] }\n"; }, "months from 1 to 12");
  refused([](RecipeText& r) { r.patches += "gaps = { period = [\"2050\", \"2060\"] }\n"; }, "at least one step");
  refused([](RecipeText& r) { r.patches += "sites = [\"A\"]\n"; }, "a grid has none");
  refused([](RecipeText& r) { r.patches += "[[lake]]\n"; }, "a lake needs a place");
  refused([](RecipeText& r) { r.variable += "scale = 0.1\n"; }, "only values of type short or int are packed");
  refused([](RecipeText& r) { r.variable = "[[variable]]\nname = \"w\"\ntype = \"short\"\n"; }, "scale is missing");
  refused([](RecipeText& r) { r.variable = "[[variable]]\nname = \"time\"\n"; }, "used for no other variable or axis");
  refused([](RecipeText& r) { r.output += "format = \"csv\"\n"; }, "csv is for sites");
  refused([](RecipeText& r) { r.output += "format = [\"classic\", \"cdf5\"]\n"; },
          "one NetCDF format, csv, or one of each");
  refused([](RecipeText& r) { r.output += "format = \"classic\"\nchunks = [1, 1, 1]\n"; },
          "only netcdf4 files have chunks");
  refused([](RecipeText& r) { r.output += "format = \"classic\"\nlayout = \"series\"\n"; },
          "always stored map after map");
  refused([](RecipeText& r) { r.output = "name = \"a/b\"\n"; }, "output.folder is missing");
}

TEST(Recipe, EveryKeyIsDescribedInTheReadmeOfTheJobs) {
  std::ifstream file(LAGSCAPE_SOURCE_DIR "/jobs/README.md");
  const std::string readme{std::istreambuf_iterator<char>(file), std::istreambuf_iterator<char>()};
  for (const std::string& key : recipe_keys()) EXPECT_TRUE(has(readme, "| `" + key + "` |")) << key;
}

}  // namespace
}  // namespace lagscape
