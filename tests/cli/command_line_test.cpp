#include "cli/command_line.h"

#include <gtest/gtest.h>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"

namespace lagscape {
namespace {

CommandLine parsed(std::vector<const char*> arguments) {
  arguments.insert(arguments.begin(), "lagscape");
  return parse_command_line(static_cast<int>(arguments.size()), arguments.data());
}

/// What is said about a command line that is wrong.
std::string refusal(const std::vector<const char*>& arguments) {
  try {
    (void)parsed(arguments);
  } catch (const Error& error) {
    EXPECT_EQ(error.kind(), ErrorKind::usage);
    EXPECT_NE(error.fix(), "");
    return error.problem();
  }
  return "accepted";
}

TEST(CommandLine, ReadsOptionsInAnyPlaceAndRepeatedSettings) {
  const CommandLine line = parsed({"run", "--set", "field.rate=0.05", "a.toml", "--threads", "3", "b.toml",
                                   "--memory=2GiB", "--set", "title=x=y", "--replace", "--quiet", "--json"});
  EXPECT_EQ(line.command, "run");
  EXPECT_EQ(line.arguments, (std::vector<std::string>{"a.toml", "b.toml"}));
  EXPECT_EQ(line.overrides, (std::vector<std::string>{"field.rate=0.05", "title=x=y"}));
  EXPECT_EQ(line.threads, 3);
  EXPECT_EQ(line.memory_bytes, std::size_t{2} << 30);
  EXPECT_TRUE(line.replace && line.quiet && line.json);
  EXPECT_FALSE(line.output);
}

TEST(CommandLine, LeavesWhatIsNotGivenToBeChosen) {
  const CommandLine line = parsed({"survey", "x.nc"});
  EXPECT_EQ(line.threads, 0);
  EXPECT_EQ(line.memory_bytes, 0U);
  EXPECT_FALSE(line.replace || line.quiet || line.json);
  EXPECT_TRUE(parsed({"explain"}).arguments.empty());
}

TEST(CommandLine, NamesOfCommandsAreArgumentsAfterTheCommand) {
  for (const std::string& name : command_names()) {
    const CommandLine line = parsed({"explain", name.c_str(), "alpha"});
    EXPECT_EQ(line.command, "explain");
    EXPECT_EQ(line.arguments, (std::vector<std::string>{name, "alpha"}));
    EXPECT_EQ(command_help(name), parsed({name.c_str(), "--help"}).output);
  }
  EXPECT_EQ(parsed({"survey", "run"}).arguments, (std::vector<std::string>{"run"}));
  EXPECT_FALSE(command_help("alpha"));
}

TEST(CommandLine, WrongOnesAreRefusedInPlainWords) {
  EXPECT_EQ(refusal({}), "a command is missing, expected one of: survey, plan, run, explain, forge");
  EXPECT_EQ(refusal({"pln", "a.toml"}), "unknown command 'pln', did you mean 'plan'?");
  EXPECT_EQ(refusal({"run", "a.toml", "--treads", "2"}), "unknown option '--treads', did you mean '--threads'?");
  EXPECT_EQ(refusal({"run"}), "run: JOB.toml is missing");
  EXPECT_EQ(refusal({"survey", "--json"}), "survey: FILE is missing");
  EXPECT_EQ(refusal({"forge", "a", "b"}), "forge: 'b' is one argument too many");
  EXPECT_EQ(refusal({"run", "a.toml", "--threads"}), "run: --threads needs a value");
  EXPECT_EQ(refusal({"run", "a.toml", "--threads", "2", "--threads", "3"}), "run: --threads is given more than once");
  EXPECT_EQ(refusal({"run", "a.toml", "--set"}), "run: --set needs a value");
  EXPECT_EQ(refusal({"run", "a.toml", "--set", "=3"}), "--set: found '=3', expected KEY=VALUE");
  EXPECT_EQ(refusal({"explain", "x", "--json"}), "unknown option '--json'");
  for (const char* threads : {"0", "-1", "1.5", "two", "1025", "99999999999"}) {
    EXPECT_EQ(refusal({"run", "a.toml", "--threads", threads}),
              std::string("--threads: found '") + threads + "', expected a whole number from 1 to 1024");
  }
  for (const char* memory : {"0", "much", "4 elephants", "1e99GB"}) {
    EXPECT_EQ(refusal({"run", "a.toml", "--memory", memory}),
              std::string("--memory: found '") + memory + "', expected a size such as 500MB or 4GiB");
  }
}

TEST(CommandLine, HelpFitsEightyColumnsAndEndsWithExamples) {
  std::vector<std::string> names = command_names();
  EXPECT_EQ(names, (std::vector<std::string>{"survey", "plan", "run", "explain", "forge"}));
  for (const std::string& name : names) {
    const std::string help = *parsed({name.c_str(), "--help"}).output;
    for (const std::string& line : split(help, '\n')) EXPECT_LE(line.size(), 80U) << name << ": " << line;
    EXPECT_NE(help.find("\nExamples:\n  lagscape " + name), std::string::npos) << help;
    for (const char* word : {"pixel", "metric", "field "})
      EXPECT_EQ(help.find(word), std::string::npos) << name << ": " << word;
  }
  const std::string help = *parsed({"--help"}).output;
  for (const std::string& line : split(help, '\n')) EXPECT_LE(line.size(), 80U) << line;
  for (const std::string& name : names) EXPECT_NE(help.find("\n  " + name), std::string::npos) << name;
  EXPECT_EQ(*parsed({"run", "-h"}).output, *parsed({"run", "--help"}).output);
}

TEST(CommandLine, VersionNamesWhatAReportOfABugNeeds) {
  const std::string text = *parsed({"--version"}).output;
  for (const char* word : {"lagscape ", "compiler", "netCDF", "threads"})
    EXPECT_NE(text.find(word), std::string::npos) << text;
}

}  // namespace
}  // namespace lagscape
