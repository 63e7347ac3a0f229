#pragma once
#include <vector>

namespace lagscape {

/// Two-sided p of Student's t with real degrees of freedom; NaN if degrees <= 0. [Boost.Math]
[[nodiscard]] double t_two_sided_p(double t, double degrees) noexcept;
/// Upper tail of chi-squared; NaN for NaN. [Boost.Math]
[[nodiscard]] double chi_squared_tail(double value, double degrees) noexcept;
/// z with P(Z <= z) = share.
[[nodiscard]] double normal_quantile(double share);

/// Quantile of Student's t at one fixed probability for any real number of degrees of freedom: a table in 1/degrees,
/// made once with Boost.Math and read by four-point interpolation (relative error below 1e-10 for degrees >= 1; below
/// that Boost itself).
class StudentQuantile {
 public:
  /// share: P(T <= t), e.g. 0.975 for two-sided limits at 95 %.
  explicit StudentQuantile(double share);
  [[nodiscard]] double operator()(double degrees) const noexcept;

 private:
  double share_;
  std::vector<double> log_ratio_;  ///< ln(t / z) at 1/degrees = (i - 1)/kNodes
  double normal_;
};

}  // namespace lagscape
