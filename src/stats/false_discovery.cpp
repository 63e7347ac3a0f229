#include "lagscape/stats/false_discovery.h"

#include <algorithm>
#include <cmath>
#include <limits>

namespace lagscape {

std::vector<double> adjusted_p(std::span<const double> p, bool any_dependence) {
  std::vector<double> adjusted(p.size(), std::numeric_limits<double>::quiet_NaN());
  std::vector<std::size_t> order;
  for (std::size_t c = 0; c < p.size(); ++c) {
    if (!std::isnan(p[c])) order.push_back(c);
  }
  std::sort(order.begin(), order.end(),
            [&](std::size_t a, std::size_t b) { return p[a] < p[b] || (p[a] == p[b] && a < b); });
  const auto tests = static_cast<double>(order.size());
  double factor = tests;
  if (any_dependence) {
    double harmonic = 0;
    for (std::size_t rank = order.size(); rank > 0; --rank) harmonic += 1 / static_cast<double>(rank);
    factor *= harmonic;
  }
  double smallest = 1;
  for (std::size_t rank = order.size(); rank > 0; --rank) {
    smallest = std::min(smallest, p[order[rank - 1]] * factor / static_cast<double>(rank));
    adjusted[order[rank - 1]] = smallest;
  }
  return adjusted;
}

}  // namespace lagscape
