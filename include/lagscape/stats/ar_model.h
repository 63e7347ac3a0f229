#pragma once
#include <array>
#include <cstddef>
#include <span>

#include "lagscape/stats/design.h"
#include "lagscape/stats/kernels.h"

namespace lagscape {

/// How the order of an autoregression is chosen.
enum class OrderCriterion { bic, aicc, aic, fixed };

/// What order choice needs to know of one cell: partials and usable counts of orders 1 .. size (segment Burg).
struct OrderChoice {
  OrderCriterion criterion = OrderCriterion::bic;
  int fixed_order = 1;
  double values = 0;      ///< m
  double parameters = 1;  ///< q, columns of the design taken out (AICc)
};

/// Largest order that is offered: at most `limit`, m/10, and (m - 10)/3; each order needs max(20, m/4) usable terms. At
/// least 1 whenever the first order is usable, else 0.
[[nodiscard]] int largest_order(std::span<const double> usable, double values, int limit) noexcept;

/// Order with the smallest criterion, 1 .. largest (an order of 0 is never chosen: choosing it only where memory looks
/// small inflates the size of later tests). n ln s2_p + 2(p+1) | 2(p+q+1) n/(n-p-q-2) | p ln n, s2_p = prod (1 -
/// k_j^2), n = m. Returns 0 if largest is 0. [Akaike 1974; Hurvich & Tsai 1989; Schwarz 1978]
[[nodiscard]] int choose_order(std::span<const double> partials, int largest, const OrderChoice& choice) noexcept;

/// An autoregression x_t = sum_j f_j x_{t-j} + e_t. Entries beyond `order` are 0.
struct ArModel {
  int order = 0;
  std::array<double, kMaxOrder> coefficient{};  ///< f_1 .. f_p
  std::array<double, kMaxOrder> partial{};      ///< kappa_1 .. kappa_p
  bool near_unit_root = false;  ///< the bias correction was cut short, or the raw fit is at the bound already

  /// Variance of the innovations / variance of the series: prod (1 - kappa_j^2).
  [[nodiscard]] double innovation_share() const noexcept;
  /// Decorrelation time in steps: innovation_share / (1 - sum f)^2, the variance of a long mean times n / variance of
  /// the series. AR(1): (1 + f)/(1 - f). [spectral density at zero; Thiebaux & Zwiers 1984 discuss the use]
  [[nodiscard]] double decorrelation_time() const noexcept;
};

[[nodiscard]] ArModel model_from_partials(std::span<const double> partials) noexcept;
/// Partials by the backward recursion. A model that is not stationary has a partial of magnitude >= 1 (or NaN).
[[nodiscard]] ArModel model_from_coefficients(std::span<const double> coefficients) noexcept;

/// Continues the model's autocorrelations: call with k = 1, 2, ... in order. Exact from the first lag on.
class ModelCorrelation {
 public:
  explicit ModelCorrelation(const ArModel& model) noexcept;
  [[nodiscard]] double next() noexcept;

 private:
  const ArModel& model_;
  std::array<double, kMaxOrder> start_{}, recent_{};
  std::size_t lag_ = 0;
};

/// n * bias of the coefficients of an AR(p), p <= 3, whose series had its mean and further columns taken out by least
/// squares:
/// -(c + B f) [Shaman & Stine 1988; integers checked by simulation] + sum over columns of D(omega), see DESIGN columns.
/// out: p values. Requires 1 <= p <= 3.
void coefficient_bias(std::span<const double> coefficients, std::span<const DesignFrequency> design,
                      double* out) noexcept;

/// The model with the small-sample bias taken off: f_c = f - bias(f_c)/m by `passes` fixed-point steps; kept stationary
/// (p = 1: |f| <= .99; else partials below .995 and sum f <= .985, by shrinking the correction). Orders above 3 are
/// returned as they are.
[[nodiscard]] ArModel bias_corrected(const ArModel& raw, double values, std::span<const DesignFrequency> design,
                                     int passes = 3) noexcept;

/// Standard error of ln(decorrelation time) by the delta method: g' V g, V = (s2_e/gamma_0) R_p^-1 / usable, g by
/// central differences (step 1e-5). NaN if the model is too near the unit root for it.
[[nodiscard]] double log_time_error(const ArModel& model, double usable) noexcept;

}  // namespace lagscape
