#include "io/customary_fills.h"

#include <algorithm>
#include <array>
#include <cmath>

namespace lagscape {
namespace {

constexpr std::array kCustomary = {-99.0,
                                   -99.9,
                                   -99.99,
                                   -999.0,
                                   -999.9,
                                   -999.99,
                                   -9999.0,
                                   -9999.9,
                                   -99999.0,
                                   -999999.0,
                                   -32767.0,
                                   -32768.0,
                                   9999.0,
                                   99999.0,
                                   999999.0,
                                   32767.0,
                                   65535.0,
                                   -2147483648.0,
                                   2147483647.0,
                                   -1e20,
                                   1e20,
                                   -1e30,
                                   1e30,
                                   -1e34,
                                   1e34,
                                   1e35,
                                   1e36,
                                   9.969209968386869e36,
                                   -1e38,
                                   1e38,
                                   -3.4028234663852886e38,
                                   3.4028234663852886e38,
                                   9.96921e36,
                                   -3.402823e38,
                                   3.402823e38};
constexpr double kBeyondMeasure = 1e19;

}  // namespace

CustomaryFills::CustomaryFills(double scale, double offset, bool floats) {
  const bool packed = scale != 1 || offset != 0;
  for (const double value : kCustomary) {
    candidates_.push_back({floats && !packed ? static_cast<double>(static_cast<float>(value)) : value, value, 0});
    if (packed) candidates_.push_back({value * scale + offset, value * scale + offset, 0});
  }
  const auto before = [](const Candidate& a, const Candidate& b) { return a.held < b.held; };
  const auto same = [](const Candidate& a, const Candidate& b) { return a.held == b.held; };
  std::stable_sort(candidates_.begin(), candidates_.end(), before);
  candidates_.erase(std::unique(candidates_.begin(), candidates_.end(), same), candidates_.end());
}

void CustomaryFills::add(double value) {
  if (std::isnan(value)) return;
  const auto at = std::lower_bound(candidates_.begin(), candidates_.end(), value,
                                   [](const Candidate& a, double wanted) { return a.held < wanted; });
  if (at != candidates_.end() && at->held == value) {
    ++at->count;
    return;
  }
  low_ = std::min(low_, value);
  high_ = std::max(high_, value);
}

std::vector<CustomaryFills::Suspect> CustomaryFills::suspects() const {
  std::vector<Suspect> found;
  for (const Candidate& one : candidates_) {
    if (one.count == 0) continue;
    const double away = std::max(low_ - one.held, one.held - high_);
    const bool far = std::fabs(one.held) > kBeyondMeasure || away > high_ - low_ || (one.held < 0 && low_ >= 0);
    if (away > 0 && far) found.push_back({one.shown, one.count});
  }
  return found;
}

}  // namespace lagscape
