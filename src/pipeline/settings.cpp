#include "pipeline/settings.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "lagscape/base/error.h"
#include "lagscape/base/text.h"
#include "lagscape/job/options.h"

namespace lagscape {
namespace {

constexpr double kTurn = 2 * std::numbers::pi;

Error impossible(const JobSpec& job, std::string_view key, const std::string& problem, const std::string& fix) {
  return {ErrorKind::job, fmt::format("{}: {}", key, problem), job.path, fix};
}

/// A duration or a number of steps in whole steps of the axis.
std::size_t in_steps(const JobSpec& job, std::string_view key, const StepsOrDuration& value, const TimeAxis& axis) {
  if (const auto* steps = std::get_if<std::int64_t>(&value)) return static_cast<std::size_t>(*steps);
  const std::string& text = std::get<std::string>(value);
  const std::optional<TimeStep> duration = parse_duration(text);
  if (!duration) {
    throw impossible(job, key, fmt::format("'{}' is not a duration", text),
                     "write an ISO 8601 duration such as \"P5Y\", or steps");
  }
  const auto months = [](TimeStep step) { return step.count * (step.kind == StepKind::years ? 12 : 1); };
  const bool calendar_step = axis.step().kind != StepKind::seconds,
             calendar_duration = duration->kind != StepKind::seconds;
  double steps = 0;
  if (calendar_step == calendar_duration) {
    steps = calendar_step ? static_cast<double>(months(*duration)) / static_cast<double>(months(axis.step()))
                          : static_cast<double>(duration->count) / static_cast<double>(axis.step().count);
  } else if (calendar_duration) {
    steps = std::round(static_cast<double>(months(*duration)) / 12 * axis.steps_per_year());
  }
  if (!(steps >= 1) || steps != std::floor(steps)) {
    throw impossible(job, key,
                     fmt::format("{} is no whole number of steps; this record is {}", text, step_words(axis.step())),
                     "give a multiple of the time step, or a number of steps");
  }
  return static_cast<std::size_t>(steps);
}

/// What "auto" makes of the season, and why.
SeasonRule automatic_season(const TimeAxis& axis, std::string& reason) {
  constexpr double kTwoYears = 1.99;  // 730 days are two years, too
  const bool months = axis.step().kind == StepKind::months;
  if (axis.step().kind == StepKind::years || axis.steps_per_year() < 4 || (months && axis.seasons() == 1)) {
    reason = "auto: the steps are too long to show a season";
    return SeasonRule::none;
  }
  if (axis.years() < kTwoYears) {
    reason = "auto: a record of less than two years does not show its season";
    return SeasonRule::none;
  }
  reason = months ? "auto: calendar months" : "auto: steps shorter than a month";
  return months ? SeasonRule::calendar : SeasonRule::harmonics;
}

/// Harmonics of the year, and of the day for steps shorter than a day.
void resolve_harmonics(const JobSpec& job, const TimeAxis& axis, ResolvedSettings& out) {
  const bool automatic = job.prepare.season == SeasonRule::automatic;
  if (out.season == SeasonRule::harmonics || out.trend_season == SeasonRule::harmonics) {
    const int most = static_cast<int>(std::floor(axis.steps_per_year() / 2));
    out.harmonics = job.prepare.harmonics;
    if (out.harmonics > most && automatic && most >= 1) out.harmonics = most;
    if (out.harmonics > most) {
      throw impossible(job, "prepare.harmonics",
                       fmt::format("{} harmonics a year cannot be told apart with {} steps a year", out.harmonics,
                                   human_number(axis.steps_per_year())),
                       fmt::format("use at most {}", std::max(1, most)));
    }
    out.told.push_back({"prepare.harmonics", fmt::format("{}", out.harmonics), ""});
  }
  const bool parts_of_days = axis.step().kind == StepKind::seconds && 2 * axis.step().count <= kDay;
  if (parts_of_days && (automatic || out.season == SeasonRule::harmonics)) {
    constexpr int kDaily = 2;
    out.daily_harmonics = std::min(kDaily, static_cast<int>(kDay / axis.step().count / 2));
    out.notes.push_back(
        fmt::format("steps are shorter than a day: {} harmonics of the day are taken out, too", out.daily_harmonics));
  }
}

void resolve_season(const JobSpec& job, const TimeAxis& axis, ResolvedSettings& out) {
  std::string reason;
  const bool automatic = job.prepare.season == SeasonRule::automatic;
  out.season = automatic ? automatic_season(axis, reason) : job.prepare.season;
  out.trend_season = out.season;
  if (automatic && out.season != SeasonRule::none && job.prepare.remove == RemoveRule::season_difference) {
    out.season = SeasonRule::none;
    reason = "auto: the season difference takes it out";
  }
  if (out.season == SeasonRule::calendar && axis.seasons() == 1) {
    throw impossible(job, "prepare.season",
                     fmt::format("'calendar' needs seasons, but the record is {}", step_words(axis.step())),
                     "use season = \"none\"");
  }
  out.told.push_back({"prepare.season", choice_word("prepare.season", out.season), reason});
  if (automatic && axis.step().kind != StepKind::years && out.trend_season == SeasonRule::none) {
    out.notes.push_back(fmt::format("no season of the year is taken out ({})", reason));
  }
  resolve_harmonics(job, axis, out);
}

void resolve_filter(const JobSpec& job, const TimeAxis& axis, ResolvedSettings& out) {
  out.told.push_back({"prepare.remove", choice_word("prepare.remove", job.prepare.remove), ""});
  if (job.prepare.remove == RemoveRule::season_difference) {
    out.filter_length = static_cast<std::size_t>(std::llround(axis.steps_per_year()));
    if (out.filter_length < 2) {
      throw impossible(job, "prepare.remove", "a season difference needs steps shorter than a year",
                       "use remove = \"difference\"");
    }
  }
  if (job.prepare.remove == RemoveRule::running_mean) {
    out.filter_length = in_steps(job, "prepare.window", *job.prepare.window, axis);
    if (out.filter_length % 2 == 0) {
      ++out.filter_length;
      out.notes.push_back(
          fmt::format("the running mean is centred, so its window is odd: {} steps", out.filter_length));
    }
    out.told.push_back({"prepare.window", fmt::format("{} steps", out.filter_length), ""});
  }
  if (out.filter_length * 2 >= axis.size()) {
    throw impossible(job, job.prepare.remove == RemoveRule::running_mean ? "prepare.window" : "prepare.remove",
                     fmt::format("{} steps are too long for a record of {} steps", out.filter_length, axis.size()),
                     "use a shorter window or another way of preparation");
  }
}

void resolve_max_lag(const JobSpec& job, const TimeAxis& axis, ResolvedSettings& out) {
  const std::size_t quarter = axis.size() / 4;
  std::string reason;
  if (job.memory.max_lag) {
    out.max_lag = in_steps(job, "memory.max_lag", *job.memory.max_lag, axis);
    if (out.max_lag > quarter) {
      throw impossible(
          job, "memory.max_lag",
          fmt::format("{} steps are more than a quarter of the record ({} steps)", out.max_lag, axis.size()),
          fmt::format("use at most {} steps", quarter));
    }
  } else {
    const auto n = static_cast<double>(axis.size());
    auto wanted = static_cast<std::size_t>(std::ceil(10 * std::log10(n)));
    if (axis.step().kind == StepKind::months) wanted = std::max<std::size_t>(wanted, 24);
    if (axis.step() == TimeStep{StepKind::seconds, kDay}) {
      wanted = std::max(wanted, static_cast<std::size_t>(std::ceil(axis.steps_per_year())));
    }
    out.max_lag = std::min(quarter, wanted);
    reason = wanted > quarter ? "auto: a quarter of the record" : "auto";
  }
  out.told.push_back({"memory.max_lag", fmt::format("{} steps", out.max_lag), reason});
}

/// Group of each step, seasonal columns and their frequencies: shared by the preparation's and the trend's design.
DesignColumns season_columns(SeasonRule season, const ResolvedSettings& resolved, const TimeAxis& axis) {
  DesignColumns columns;
  columns.steps = axis.size();
  columns.group.assign(axis.size(), 0);
  if (season == SeasonRule::calendar) {
    columns.groups = static_cast<std::size_t>(axis.seasons());
    for (std::size_t t = 0; t < axis.size(); ++t) columns.group[t] = static_cast<std::uint16_t>(axis.season_of(t));
    const double period =
        axis.step().kind == StepKind::months ? static_cast<double>(axis.seasons()) : axis.steps_per_year();
    for (std::size_t h = 1; 2 * h <= columns.groups; ++h) {
      columns.frequencies.push_back({kTurn * static_cast<double>(h) / period, 2 * h == columns.groups ? 1 : 2});
    }
  }
  const auto add_harmonics = [&](int count, double period, auto&& phase) {
    for (int h = 1; h <= count; ++h) {
      std::vector<double> cosine(axis.size()), sine(axis.size());
      for (std::size_t t = 0; t < axis.size(); ++t) {
        const double angle = kTurn * h * phase(t);
        cosine[t] = std::cos(angle);
        sine[t] = std::sin(angle);
      }
      columns.season.push_back(std::move(cosine));
      columns.season.push_back(std::move(sine));
      columns.frequencies.push_back({kTurn * h / period, 2 * h == period ? 1 : 2});
    }
  };
  add_harmonics(season == SeasonRule::harmonics ? resolved.harmonics : 0, axis.steps_per_year(),
                [&](std::size_t t) { return axis.year_phase(t); });
  if (resolved.daily_harmonics > 0) {
    add_harmonics(resolved.daily_harmonics, static_cast<double>(kDay) / static_cast<double>(axis.step().count),
                  [&](std::size_t t) { return axis.day_phase(t); });
  }
  return columns;
}

void add_trend(DesignColumns& columns, int degree) {
  columns.trend_degree = degree;
  if (degree > 0) columns.frequencies.push_back({0.0, degree});
}

}  // namespace

ResolvedSettings resolve_settings(const JobSpec& job, const TimeAxis& axis) {
  ResolvedSettings out;
  resolve_season(job, axis, out);
  resolve_filter(job, axis, out);
  const auto tell = [&](std::string_view key, std::string value, std::string reason = {}) {
    out.told.push_back({std::string(key), std::move(value), std::move(reason)});
  };
  tell("prepare.min_share", number_text(job.prepare.min_share),
       job.prepare.share_of_period ? "of the whole period" : "between a cell's first and last value");
  tell("prepare.min_count", fmt::format("{}", job.prepare.min_count));
  resolve_max_lag(job, axis, out);
  tell("memory.confidence", number_text(job.memory.confidence));
  tell("memory.limits", choice_word("memory.limits", job.memory.limits));
  tell("memory.order", job.memory.order == OrderRule::fixed ? fmt::format("{}", job.memory.fixed_order)
                                                            : choice_word("memory.order", job.memory.order));
  tell("memory.max_order", fmt::format("{}", job.memory.max_order));
  tell("trend.tests", join(job.trend.tests, ", "));
  tell("trend.alpha", number_text(job.trend.alpha));
  tell("trend.per", choice_word("trend.per", job.trend.per));
  if (job.trend.target) tell("trend.target", number_text(*job.trend.target));
  tell("field.control", choice_word("field.control", job.field.control));
  if (job.field.control != FieldControl::none) tell("field.rate", number_text(job.field.rate));
  return out;
}

std::unique_ptr<AnalysisSettings> analysis_settings(const JobSpec& job, const ResolvedSettings& resolved,
                                                    const TimeAxis& axis, const std::vector<std::string>& cubes) {
  const RemoveRule remove = job.prepare.remove;
  DesignColumns prepare = season_columns(resolved.season, resolved, axis);
  DesignColumns trend = season_columns(resolved.trend_season, resolved, axis);
  add_trend(prepare, remove == RemoveRule::linear ? 1 : remove == RemoveRule::quadratic ? 2 : 0);
  add_trend(trend, 1);
  auto settings = std::make_unique<AnalysisSettings>(prepare, trend, job.memory.confidence, job.trend.alpha);
  settings->separate_trend_fit = remove != RemoveRule::linear;
  if (remove == RemoveRule::difference || remove == RemoveRule::season_difference)
    settings->filter = Filter::difference;
  if (remove == RemoveRule::running_mean) settings->filter = Filter::running_mean;
  settings->filter_length = resolved.filter_length;
  settings->min_share = job.prepare.min_share;
  settings->share_of_period = job.prepare.share_of_period;
  settings->min_count = static_cast<double>(job.prepare.min_count);
  settings->bartlett_limits = job.memory.limits == LimitRule::bartlett;
  constexpr OrderCriterion kCriteria[] = {OrderCriterion::bic, OrderCriterion::aicc, OrderCriterion::aic,
                                          OrderCriterion::fixed};
  settings->criterion = kCriteria[static_cast<std::size_t>(job.memory.order)];
  settings->fixed_order = job.memory.fixed_order;
  settings->max_order = job.memory.max_order;
  const bool over_lags =
      std::ranges::any_of(cubes, [](const std::string& name) { return find_measure(name)->axis == LayerAxis::lag; });
  settings->cube_lags = over_lags ? resolved.max_lag + 1 : 0;
  settings->want_partial = std::ranges::find(cubes, "partial_autocorrelation") != cubes.end();
  for (const std::string& name : job.trend.tests) settings->tests.push_back(find_trend_test(name));
  settings->target = job.trend.target;
  settings->steps_per_year = axis.steps_per_year();
  settings->steps_per_rate = axis.steps_per_year() * (job.trend.per == RatePer::decade ? 10 : 1);
  settings->lag_units_per_step = axis.lag_unit_per_step();
  settings->step_times.reserve(axis.size());
  for (std::size_t t = 0; t < axis.size(); ++t) settings->step_times.push_back(axis.cf_value(axis.time(t)));
  return settings;
}

}  // namespace lagscape
