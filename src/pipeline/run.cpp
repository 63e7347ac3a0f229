#include "lagscape/pipeline/run.h"

#include <omp.h>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <cmath>
#include <exception>
#include <limits>
#include <memory>
#include <span>

#include "lagscape/base/error.h"
#include "lagscape/io/result_writer.h"
#include "pipeline/describe.h"
#include "pipeline/field.h"
#include "pipeline/prepared_job.h"
#include "pipeline/resources.h"

namespace lagscape {
namespace {

using Clock = std::chrono::steady_clock;

double seconds_since(Clock::time_point start) { return std::chrono::duration<double>(Clock::now() - start).count(); }

/// 5 %, median and 95 % of the values that are there (linear interpolation between order statistics).
Spread spread_of(std::vector<float> values) {
  std::erase_if(values, [](float value) { return std::isnan(value); });
  Spread spread;
  spread.count = values.size();
  if (values.empty()) return spread;
  const auto quantile = [&](double share) {
    const double place = share * static_cast<double>(values.size() - 1);
    const auto below = static_cast<std::size_t>(place);
    std::ranges::nth_element(values, values.begin() + static_cast<std::ptrdiff_t>(below));
    const auto low = static_cast<double>(values[below]);
    if (below + 1 == values.size()) return low;
    const auto high = static_cast<double>(
        *std::ranges::min_element(values.begin() + static_cast<std::ptrdiff_t>(below) + 1, values.end()));
    return low + (high - low) * (place - static_cast<double>(below));
  };
  spread.low = quantile(0.05);
  spread.median = quantile(0.5);
  spread.high = quantile(0.95);
  return spread;
}

/// What is kept of the whole map until the end.
struct WholeMap {
  explicit WholeMap(std::size_t cells)
      : status(cells, 0),
        time(cells),
        size(cells),
        lag1(cells),
        field{std::vector<double>(cells), std::vector<double>(cells), std::vector<float>(cells),
              std::vector<std::uint8_t>(cells)} {}
  std::vector<std::int16_t> status;  ///< -1: masked
  std::vector<float> time, size, lag1;
  FieldInput field;
  std::atomic<std::size_t> short_season_values{0}, order_uncorrected{0};
};

bool from_field_step(const Measure& measure) {
  return measure.name == "trend_p_field" || measure.name == "trend_class";
}

/// The maps of one band: floats layer-major, times in double.
class BandMaps {
 public:
  BandMaps(const std::vector<const Measure*>& measures, const MapSet& set, std::size_t cells)
      : measures_(measures), cells_(cells) {
    for (std::size_t i = 0; i < measures.size(); ++i) {
      const bool precise = measures[i]->type == MapType::f64;
      layers_.push_back(set.layers(set.maps[i]));
      const std::size_t values = from_field_step(*measures[i]) ? 0 : layers_[i] * cells;
      floats_.emplace_back(precise ? 0 : values);
      doubles_.emplace_back(precise ? values : 0);
    }
  }

  /// Picks every map's value of a cell; layers: scratch of the longest cube.
  void store(std::size_t at, const CellResult& cell, std::vector<float>& layers) noexcept {
    for (std::size_t i = 0; i < measures_.size(); ++i) {
      const Measure& measure = *measures_[i];
      if (!doubles_[i].empty()) {
        doubles_[i][at] = measure.value(cell);
      } else if (floats_[i].empty()) {
        continue;
      } else if (measure.layers == nullptr) {
        floats_[i][at] = static_cast<float>(measure.value(cell));
      } else {
        measure.layers(cell, {layers.data(), layers_[i]});
        for (std::size_t layer = 0; layer < layers_[i]; ++layer) floats_[i][layer * cells_ + at] = layers[layer];
      }
    }
  }

  void mask(std::size_t at) noexcept {
    for (std::size_t i = 0; i < measures_.size(); ++i) {
      if (!doubles_[i].empty()) doubles_[i][at] = kMissing;
      for (std::size_t layer = 0; !floats_[i].empty() && layer < layers_[i]; ++layer) {
        floats_[i][layer * cells_ + at] = std::numeric_limits<float>::quiet_NaN();
      }
    }
  }

  void write(MapSink& sink, CellRange cells) const {
    for (std::size_t i = 0; i < measures_.size(); ++i) {
      if (!doubles_[i].empty()) sink.write(i, cells, std::span<const double>(doubles_[i]));
      if (!floats_[i].empty()) sink.write(i, cells, std::span<const float>(floats_[i]));
    }
  }

  [[nodiscard]] std::size_t longest() const { return *std::ranges::max_element(layers_); }

 private:
  const std::vector<const Measure*>& measures_;
  std::size_t cells_;
  std::vector<std::size_t> layers_;
  std::vector<std::vector<float>> floats_;
  std::vector<std::vector<double>> doubles_;
};

/// One run of one variable: bands are read one after the other; inside a band, blocks of cells go to the threads as
/// they come. Every cell is computed alone, so nothing depends on bands, blocks or threads.
class VariableRun {
 public:
  VariableRun(PreparedJob job, const Progress& progress)
      : job_(std::move(job)),
        progress_(progress),
        settings_(analysis_settings(job_.plan.job, job_.resolved, job_.plan.panel.axis, job_.plan.cubes)),
        excluded_(job_.source->excluded()),
        whole_(job_.plan.cells) {}

  RunReport run(const RunOptions& options) {
    const auto started = Clock::now();
    const double cpu = cpu_seconds();
    report_.plan = job_.plan;
    const auto sink = create_result(job_.plan.output, job_.maps, options.replace);
    std::unique_ptr<Band> band;
    for (const CellRange cells : job_.plan.bands) {
      auto clock = Clock::now();
      band = job_.source->read(cells, std::move(band));
      report_.read_seconds += seconds_since(clock);
      BandMaps maps(job_.measures, job_.maps, cells.count);
      clock = Clock::now();
      compute(*band, maps, started);
      report_.compute_seconds += seconds_since(clock);
      clock = Clock::now();
      maps.write(*sink, cells);
      report_.write_seconds += seconds_since(clock);
    }
    band.reset();
    for (const auto& worker : workers_) report_.values += worker->counts;
    finish(*sink);
    report_.wall_seconds = seconds_since(started);
    report_.cpu_seconds = cpu_seconds() - cpu;
    report_.peak_rss_bytes = peak_resident_bytes();
    return std::move(report_);
  }

 private:
  /// What a thread works with, made before any thread starts: running out of memory then is an ordinary exception.
  struct Worker {
    Worker(const AnalysisSettings& settings, std::size_t values, std::size_t layers_of_cube)
        : analysis(settings), tiles(values), layers(layers_of_cube) {}
    Analysis analysis;
    AlignedVector<double> tiles;
    std::vector<float> layers;
    ValueCounts counts;
  };

  void compute(const Band& band, BandMaps& maps, Clock::time_point started) {
    const CellRange cells = band.cells();
    const std::size_t steps = job_.plan.panel.axis.size(), block = job_.block_cells;
    while (workers_.size() < static_cast<std::size_t>(job_.plan.threads)) {
      workers_.push_back(std::make_unique<Worker>(*settings_, block * steps, maps.longest()));
    }
    const auto blocks = static_cast<std::ptrdiff_t>((cells.count + block - 1) / block);
    std::atomic<std::size_t> done{cells.first};
    std::atomic<bool> stop{false};
    std::exception_ptr problem;
#pragma omp parallel for num_threads(job_.plan.threads) schedule(dynamic)
    for (std::ptrdiff_t b = 0; b < blocks; ++b) {
      if (stop) continue;
      try {  // exceptions must not leave the loop: the first one is kept, ends the work, and is thrown after it
        Worker& worker = *workers_[static_cast<std::size_t>(omp_get_thread_num())];
        const std::size_t offset = static_cast<std::size_t>(b) * block, count = std::min(block, cells.count - offset);
        band.gather(offset, count, kLanes, steps, worker.tiles.data(), worker.counts);
        for (std::size_t first = 0; first < count; first += kLanes) {
          const std::size_t lanes = std::min(kLanes, count - first);
          const auto results = worker.analysis.analyse(worker.tiles.data() + first * steps, lanes);
          for (std::size_t lane = 0; lane < lanes; ++lane) {
            keep(cells.first, offset + first + lane, results[lane], maps, worker.layers);
          }
        }
        done += count;
        if (progress_ && omp_get_thread_num() == 0) progress_(done, job_.plan.cells, seconds_since(started));
      } catch (...) {
#pragma omp critical
        if (!problem) problem = std::current_exception();
        stop = true;
      }
    }
    if (problem) std::rethrow_exception(problem);
  }

  void keep(std::size_t band_first, std::size_t at, const CellResult& result, BandMaps& maps,
            std::vector<float>& layers) noexcept {
    const std::size_t cell = band_first + at;
    const bool masked = !excluded_.empty() && excluded_[cell] != 0;
    whole_.status[cell] = masked ? std::int16_t{-1} : result.status;
    const auto unless_masked = [masked](double value) { return masked ? kMissing : value; };
    whole_.time[cell] = static_cast<float>(unless_masked(result.time));
    whole_.size[cell] = static_cast<float>(unless_masked(result.effective_size));
    whole_.lag1[cell] = static_cast<float>(unless_masked(result.lag1));
    whole_.field.p[cell] = unless_masked(result.p);
    whole_.field.p_independent[cell] = unless_masked(result.p_independent);
    whole_.field.order[cell] = static_cast<std::uint8_t>(result.order);
    whole_.field.slope[cell] = static_cast<float>(result.slope);
    if (masked) {
      maps.mask(at);
      return;
    }
    whole_.short_season_values += static_cast<std::size_t>(result.dropped_values);
    whole_.order_uncorrected += static_cast<std::size_t>(result.order_uncorrected);
    maps.store(at, result, layers);
  }

  /// The field step, the counts, the last maps, and the result under its final name.
  void finish(MapSink& sink) {
    const auto clock = Clock::now();
    const FieldResult field = field_step(whole_.field, job_.plan.job);
    for (std::size_t i = 0; i < job_.measures.size(); ++i) {
      const CellRange all{0, job_.plan.cells};
      if (job_.measures[i]->name == "trend_p_field") sink.write(i, all, std::span<const double>(field.adjusted));
      if (job_.measures[i]->name == "trend_class") sink.write(i, all, std::span<const float>(field.trend_class));
    }
    report_.trend = field.counts;
    count_status();
    report_.decorrelation_time = spread_of(std::move(whole_.time));
    report_.effective_sample_size = spread_of(std::move(whole_.size));
    report_.lag1 = spread_of(std::move(whole_.lag1));
    const TimeAxis& axis = job_.plan.panel.axis;
    report_.lag_unit = axis.lag_unit();
    report_.decorrelation_years_median =
        report_.decorrelation_time.median / axis.lag_unit_per_step() / axis.steps_per_year();
    report_.values_in_short_seasons = whole_.short_season_values;
    report_.order_uncorrected = whole_.order_uncorrected;
    sink.add_global(closing_attributes(report_));
    sink.commit();
    report_.files = job_.plan.output_files;
    report_.write_seconds += seconds_since(clock);
  }

  void count_status() {
    std::size_t fine = 0;
    std::vector<std::size_t> counts(status_bits().size(), 0);
    int fatal = 0;
    for (const StatusBit& bit : status_bits()) fatal |= bit.fatal ? bit.mask : 0;
    for (const std::int16_t status : whole_.status) {
      if (status < 0) {
        ++report_.cells_masked;
        continue;
      }
      fine += static_cast<std::size_t>(status == 0);
      report_.cells_analysed += static_cast<std::size_t>((status & fatal) == 0);
      for (std::size_t i = 0; i < counts.size(); ++i)
        counts[i] += static_cast<std::size_t>((status & status_bits()[i].mask) != 0);
    }
    report_.status_counts.emplace_back("fine", fine);
    for (std::size_t i = 0; i < counts.size(); ++i) {
      if (counts[i] > 0) report_.status_counts.emplace_back(status_bits()[i].words, counts[i]);
    }
  }

  PreparedJob job_;
  const Progress& progress_;
  std::unique_ptr<AnalysisSettings> settings_;
  std::span<const unsigned char> excluded_;
  std::vector<std::unique_ptr<Worker>> workers_;
  WholeMap whole_;
  RunReport report_;
};

}  // namespace

std::vector<RunReport> run_job(const JobSpec& job, const RunOptions& options, const Log& log,
                               const Progress& progress) {
  std::vector<RunReport> reports;
  for (const std::string& variable : job.input.variables) {
    PreparedJob prepared = prepare_job(job, variable, options, log);
    for (const std::string& note : prepared.plan.notes) log.note(note);
    reports.push_back(VariableRun(std::move(prepared), progress).run(options));
  }
  return reports;
}

}  // namespace lagscape
