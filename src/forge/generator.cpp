#include "forge/generator.h"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

std::size_t share_of_steps(double share, std::size_t steps) {
  return static_cast<std::size_t>(std::llround(share * static_cast<double>(steps)));
}

double wave(double amplitude, double peak, double phase) {
  return amplitude == 0 ? 0 : amplitude * std::cos(2 * std::numbers::pi * (phase - peak));
}

}  // namespace

Generator::Generator(const Recipe& recipe, std::size_t variable, std::size_t first, std::size_t count)
    : recipe_(recipe), random_(recipe.seed, static_cast<std::uint32_t>(variable)), first_(first), missing_(count, 0) {
  const ForgedVariable& made = recipe.variables[variable];
  for (const Patch& patch : made.patches)
    shares_.push_back({&patch, Predictor(patch.process), 0, {}, {}, {}, {}, {}, {}, 0});
  for (std::size_t i = 0; i < count; ++i) {
    const int patch = made.patch_of_cell[first + i];
    if (patch != kLake) shares_[static_cast<std::size_t>(patch)].cells.push_back(i);
  }
  std::erase_if(shares_, [](const Share& share) { return share.cells.empty(); });
  for (Share& share : shares_) {
    const Process& process = share.patch->process;
    share.depth = process.is_long_memory() ? recipe.axis.size() : process.coefficients().size();
    share.past.resize(share.depth * share.cells.size());
    share.now.resize(share.cells.size());
    share.spare.resize(share.cells.size());
    start_gaps(share);
  }
}

void Generator::start_gaps(Share& share) {
  const Gaps& gaps = share.patch->gaps;
  const std::size_t steps = recipe_.axis.size();
  if (gaps.random > 0) share.gaps_to_come.assign(share.cells.size(), share_of_steps(gaps.random, steps));
  share.block_steps = share_of_steps(gaps.block, steps);
  for (std::size_t i = 0; share.block_steps > 0 && i < share.cells.size(); ++i) {
    const double place = random_.uniform(Draw::block_place, first_ + share.cells[i], 0)[0];
    share.block_first.push_back(static_cast<std::size_t>(place * static_cast<double>(steps - share.block_steps + 1)));
  }
}

void Generator::next(std::span<double> out) {
  std::fill(out.begin(), out.end(), kNaN);
  month_ = moment_of(recipe_.axis.calendar(), recipe_.axis.time(step_)).date.month;
  for (Share& share : shares_) {
    draw_noise(share);
    write_values(share, out);
  }
  for (std::size_t i = 0; i < out.size(); ++i) missing_[i] += std::size_t{std::isnan(out[i])};
  ++step_;
}

// x_t = its best prediction from the past + innovation, for every cell of the share.
void Generator::draw_noise(Share& share) {
  const std::size_t cells = share.cells.size();
  if (step_ % 2 == 1) share.now.swap(share.spare);
  for (std::size_t i = 0; step_ % 2 == 0 && i < cells; ++i) {
    const auto pair = random_.normal(first_ + share.cells[i], static_cast<std::uint32_t>(step_ / 2));
    share.now[i] = pair[0];
    share.spare[i] = pair[1];
  }
  const double sd = share.predictor.error_sd();
  for (double& value : share.now) value *= sd;
  const std::vector<double>& weights = share.predictor.weights();
  for (std::size_t k = 0; k < weights.size(); ++k) {
    const double* old = share.past.data() + (step_ - 1 - k) % share.depth * cells;
    for (std::size_t i = 0; i < cells; ++i) share.now[i] += weights[k] * old[i];
  }
  if (share.depth > 0)
    std::copy(share.now.begin(), share.now.end(),
              share.past.begin() + static_cast<std::ptrdiff_t>(step_ % share.depth * cells));
  share.predictor.advance();
}

void Generator::write_values(Share& share, std::span<double> out) {
  const double base = signal(*share.patch);
  for (std::size_t i = 0; i < share.cells.size(); ++i) {
    if (!is_gap(share, i)) out[share.cells[i]] = base + share.patch->sd * share.now[i];
  }
}

bool Generator::is_gap(Share& share, std::size_t index) {
  const Gaps& gaps = share.patch->gaps;
  bool gap = std::find(gaps.months.begin(), gaps.months.end(), month_) != gaps.months.end();
  gap = gap || (gaps.period && step_ >= gaps.period->first && step_ <= gaps.period->second);
  if (share.block_steps > 0)
    gap = gap || step_ - share.block_first[index] < share.block_steps;  // wraps below the first step
  if (!share.gaps_to_come.empty() && share.gaps_to_come[index] > 0) {
    // Selection sampling (D. E. Knuth, The Art of Computer Programming 2, algorithm 3.4.2 S): exactly the number asked
    // for.
    const double u = random_.uniform(Draw::random_gap, first_ + share.cells[index],
                                     static_cast<std::uint32_t>(step_ / 2))[step_ % 2];
    if (u * static_cast<double>(recipe_.axis.size() - step_) < static_cast<double>(share.gaps_to_come[index])) {
      --share.gaps_to_come[index];
      gap = true;
    }
  }
  return gap;
}

// Everything but noise. Steps of calendar months count the year in twelfths, so that the season is the same every year.
double Generator::signal(const Patch& patch) const {
  const TimeAxis& axis = recipe_.axis;
  const double middle = 0.5 * static_cast<double>(axis.size() - 1);
  const double years = (static_cast<double>(step_) - middle) / axis.steps_per_year();
  const double year_phase = axis.step().kind == StepKind::seconds ? axis.year_phase(step_) : (month_ - 0.5) / 12;
  double value = patch.mean + patch.trend * years + wave(patch.season, patch.peak, year_phase);
  value += wave(patch.day_season, patch.day_peak, axis.day_phase(step_));
  if (patch.month_values) value += (*patch.month_values)[static_cast<std::size_t>(month_ - 1)];
  return value;
}

}  // namespace lagscape
