#pragma once
#include <numeric>

#include "lagscape/measures/analysis.h"
#include "lagscape/measures/measure.h"
#include "measures/status.h"
#include "support/series.h"

namespace lagscape::test {

/// Settings as a job would make them for monthly data; every share of values is enough. The trend is fitted apart
/// unless the preparation takes out a straight line itself.
inline AnalysisSettings settings_for(const DesignColumns& prepare) {
  DesignColumns trend = prepare;
  if (prepare.trend_degree != 1) {
    trend.trend_degree = 1;
    std::erase_if(trend.frequencies, [](const DesignFrequency& of) { return of.omega == 0; });
    trend.frequencies.push_back({0.0, 1});
  }
  AnalysisSettings settings(prepare, trend, 0.95, 0.05);
  settings.separate_trend_fit = prepare.trend_degree != 1;
  settings.min_share = 0;
  settings.tests = {find_trend_test("ols-neff")};
  settings.step_times.resize(prepare.steps);
  std::iota(settings.step_times.begin(), settings.step_times.end(), 0.0);
  settings.cube_lags = std::min<std::size_t>(prepare.steps, 25);
  settings.want_partial = true;
  return settings;
}

/// One series, analysed in lane 3; the lag columns live as long as this.
class Analysed {
 public:
  Analysed(const AnalysisSettings& settings, const Series& x) : analysis_(settings) {
    std::vector<Series> lanes(kLanes, Series(x.size(), kNaN));
    lanes[3] = x;
    tile_ = tile_of(lanes);
    cell_ = analysis_.analyse(tile_.data(), kLanes)[3];
  }
  const CellResult* operator->() const { return &cell_; }
  const CellResult& operator*() const { return cell_; }

 private:
  Analysis analysis_;
  AlignedVector<double> tile_;
  CellResult cell_;
};

}  // namespace lagscape::test
