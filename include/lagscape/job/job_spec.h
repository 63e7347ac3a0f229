#pragma once
#include <array>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <utility>
#include <variant>
#include <vector>

namespace lagscape {

/// A duration as a job states it: whole steps, or ISO 8601 text resolved against the time axis later.
using StepsOrDuration = std::variant<std::int64_t, std::string>;

enum class SeasonRule { automatic, none, calendar, harmonics };
enum class RemoveRule { none, mean, linear, quadratic, difference, season_difference, running_mean };
enum class LimitRule { bartlett, independent };
enum class OrderRule { bic, aicc, aic, fixed };
enum class FieldControl { none, bh, by };
enum class RatePer { year, decade };

/// What the user asked for, as data. Meaning, unit, default and range of each key: the option table in job/options.cpp.
struct JobSpec {
  std::string title;
  struct Input {
    std::vector<std::string> files;  ///< resolved paths, globs expanded, sorted
    std::vector<std::string> variables;
    std::vector<std::pair<std::string, double>> select;
    std::optional<std::pair<std::string, std::string>> period;
    std::optional<std::array<double, 4>> box;
    struct Mask {
      std::string file, variable;
      std::optional<double> min, max;
      std::vector<double> values;
    };
    std::optional<Mask> mask;
    std::vector<double> missing_values;
    std::optional<std::array<double, 2>> valid_range;
    std::optional<std::string> sites;
    std::string duplicates = "refuse", longitude = "auto";
    struct Time {
      std::optional<std::string> unit, calendar, step;
    };
    std::optional<Time> time;
  } input;
  struct Prepare {
    SeasonRule season = SeasonRule::automatic;
    int harmonics = 4;
    RemoveRule remove = RemoveRule::linear;
    std::optional<StepsOrDuration> window;
    double min_share = 0.8;
    bool share_of_period = false;  ///< false: of the span between a cell's first and last value
    std::size_t min_count = 30;
  } prepare;
  struct Memory {
    std::optional<StepsOrDuration> max_lag;  ///< nothing: auto
    double confidence = 0.95;
    LimitRule limits = LimitRule::bartlett;
    OrderRule order = OrderRule::bic;
    int fixed_order = 1;
    int max_order = 10;
  } memory;
  struct Trend {
    std::vector<std::string> tests = {"ols-neff"};
    double alpha = 0.05;
    RatePer per = RatePer::year;
    std::optional<double> target;
  } trend;
  struct Field {
    FieldControl control = FieldControl::bh;
    double rate = 0.10;
  } field;
  struct Output {
    std::string file;  ///< resolved path; may contain {variable}
    std::vector<std::string> maps = {"standard"};
    std::vector<std::string> cubes;
    int deflate = 1;
  } output;

  std::string text;  ///< the job as read (file text and --set lines)
  std::string path;  ///< job file, for messages
};

}  // namespace lagscape
