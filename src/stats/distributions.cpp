#include "lagscape/stats/distributions.h"

#include <boost/math/distributions/chi_squared.hpp>
#include <boost/math/distributions/normal.hpp>
#include <boost/math/distributions/students_t.hpp>
#include <cmath>
#include <limits>

namespace lagscape {
namespace {

namespace bm = boost::math;
// Kernels of statistics do not throw: a value out of reach is infinite or NaN.
using Policy = bm::policies::policy<
    bm::policies::domain_error<bm::policies::ignore_error>, bm::policies::overflow_error<bm::policies::ignore_error>,
    bm::policies::evaluation_error<bm::policies::ignore_error>, bm::policies::promote_double<false>>;
using Student = bm::students_t_distribution<double, Policy>;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr int kNodes = 2048;

double exact_quantile(double share, double degrees) { return bm::quantile(Student(degrees), share); }

}  // namespace

double t_two_sided_p(double t, double degrees) noexcept {
  if (!(degrees > 0) || std::isnan(t)) return kNaN;
  if (std::isinf(t)) return 0;
  return 2 * bm::cdf(bm::complement(Student(degrees), std::abs(t)));
}

double chi_squared_tail(double value, double degrees) noexcept {
  if (!(value >= 0)) return kNaN;
  return bm::cdf(bm::complement(bm::chi_squared_distribution<double, Policy>(degrees), value));
}

double normal_quantile(double share) { return bm::quantile(bm::normal_distribution<double, Policy>(), share); }

StudentQuantile::StudentQuantile(double share) : share_(share), normal_(normal_quantile(share)) {
  for (int i = -1; i <= kNodes + 1; ++i) {
    // One node beyond either end feeds the interpolation; ln(t/z) is odd enough in 1/degrees to be mirrored at zero's
    // side.
    const double inverse = static_cast<double>(i) / kNodes;
    double value = 0;
    if (inverse > 0) value = std::log(exact_quantile(share, 1 / inverse) / normal_);
    log_ratio_.push_back(value);
  }
  // Cubic through the first four nodes continued to the node before zero.
  log_ratio_[0] = 4 * log_ratio_[1] - 6 * log_ratio_[2] + 4 * log_ratio_[3] - log_ratio_[4];
}

double StudentQuantile::operator()(double degrees) const noexcept {
  if (!(degrees > 0)) return kNaN;
  if (degrees < 1) return exact_quantile(share_, degrees);
  const double place = kNodes / degrees;
  const int left = std::min(static_cast<int>(place), kNodes - 1);
  const double u = place - left;
  const double* y = log_ratio_.data() + left;  // nodes left-1, left, left+1, left+2
  const double value = y[0] * (-u * (u - 1) * (u - 2) / 6) + y[1] * ((u + 1) * (u - 1) * (u - 2) / 2) +
                       y[2] * (-(u + 1) * u * (u - 2) / 2) + y[3] * ((u + 1) * u * (u - 1) / 6);
  return normal_ * std::exp(value);
}

}  // namespace lagscape
