#include "lagscape/stats/ar_model.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <numeric>

namespace lagscape {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr double kPartialBound = 0.995, kSumBound = 0.985, kFirstOrderBound = 0.99;
constexpr int kCorrectedOrders = 3;

using SmallMatrix = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, 0, kMaxOrder, kMaxOrder>;
using SmallVector = Eigen::Matrix<double, Eigen::Dynamic, 1, 0, kMaxOrder, 1>;

double sum_of(const ArModel& model) noexcept {
  return std::accumulate(model.coefficient.begin(), model.coefficient.begin() + model.order, 0.0);
}

bool inside_bounds(const ArModel& model) noexcept {
  if (model.order == 1) return std::abs(model.coefficient[0]) <= kFirstOrderBound;
  for (int j = 0; j < model.order; ++j) {
    if (!(std::abs(model.partial[static_cast<std::size_t>(j)]) < kPartialBound)) return false;
  }
  return sum_of(model) <= kSumBound;
}

/// Autocorrelations rho_1 .. rho_p that satisfy the Yule-Walker equations of these coefficients (p <= 3), stationary or
/// not.
std::array<double, kCorrectedOrders> short_correlations(std::span<const double> f) noexcept {
  std::array<double, kCorrectedOrders> rho{};
  if (f.size() == 1) {
    rho[0] = f[0];
  } else if (f.size() == 2) {
    rho[0] = f[0] / (1 - f[1]);
    rho[1] = f[0] * rho[0] + f[1];
  } else {
    // rho_1 (1 - f_2) - f_3 rho_2 = f_1;  rho_2 - (f_1 + f_3) rho_1 = f_2
    rho[0] = (f[0] + f[1] * f[2]) / (1 - f[1] - f[2] * (f[0] + f[2]));
    rho[1] = (f[0] + f[2]) * rho[0] + f[1];
    rho[2] = f[0] * rho[1] + f[1] * rho[0] + f[2];
  }
  return rho;
}

}  // namespace

int largest_order(std::span<const double> usable, double values, int limit) noexcept {
  const double by_values = std::min(values / 10, (values - 10) / 3);
  const int most =
      std::min({limit, static_cast<int>(usable.size()), std::max(0, static_cast<int>(std::floor(by_values)))});
  const double enough = std::max(20.0, values / 4);
  int order = 0;
  while (order < most && usable[static_cast<std::size_t>(order)] >= enough) ++order;
  return order;
}

int choose_order(std::span<const double> partials, int largest, const OrderChoice& choice) noexcept {
  if (choice.criterion == OrderCriterion::fixed) return std::min(choice.fixed_order, largest);
  const double n = choice.values;
  double log_variance = 0, best = std::numeric_limits<double>::infinity();
  int order = std::min(1, largest);
  for (int p = 1; p <= largest; ++p) {
    const double k = partials[static_cast<std::size_t>(p - 1)];
    log_variance += std::log1p(-k * k);
    double penalty = p * std::log(n);
    if (choice.criterion == OrderCriterion::aic) penalty = 2.0 * (p + 1);
    if (choice.criterion == OrderCriterion::aicc) {
      const double left = n - p - choice.parameters - 2;
      if (!(left > 0)) break;
      penalty = 2 * (p + choice.parameters + 1) * n / left;
    }
    if (n * log_variance + penalty < best) {
      best = n * log_variance + penalty;
      order = p;
    }
  }
  return order;
}

double ArModel::innovation_share() const noexcept {
  double share = 1;
  for (int j = 0; j < order; ++j) {
    const double kappa = partial[static_cast<std::size_t>(j)];
    share *= (1 - kappa) * (1 + kappa);
  }
  return share;
}

double ArModel::decorrelation_time() const noexcept {
  const double gain = 1 - sum_of(*this);
  return innovation_share() / (gain * gain);
}

ArModel model_from_partials(std::span<const double> partials) noexcept {
  ArModel model;
  model.order = static_cast<int>(partials.size());
  std::array<double, kMaxOrder> before{};
  for (std::size_t p = 0; p < partials.size(); ++p) {
    model.partial[p] = model.coefficient[p] = partials[p];
    for (std::size_t j = 0; j < p; ++j) model.coefficient[j] = before[j] - partials[p] * before[p - 1 - j];
    std::copy_n(model.coefficient.begin(), p + 1, before.begin());
  }
  return model;
}

ArModel model_from_coefficients(std::span<const double> coefficients) noexcept {
  ArModel model;
  model.order = static_cast<int>(coefficients.size());
  std::copy(coefficients.begin(), coefficients.end(), model.coefficient.begin());
  std::array<double, kMaxOrder> now = model.coefficient;
  for (std::size_t p = coefficients.size(); p-- > 0;) {
    const double kappa = now[p];
    model.partial[p] = kappa;
    const std::array<double, kMaxOrder> higher = now;
    for (std::size_t j = 0; j < p; ++j) now[j] = (higher[j] + kappa * higher[p - 1 - j]) / ((1 - kappa) * (1 + kappa));
  }
  return model;
}

ModelCorrelation::ModelCorrelation(const ArModel& model) noexcept : model_(model) {
  // The Levinson recursion run for the correlations: rho_k = sum_{j<k} f_{k-1,j} rho_{k-j} + kappa_k * (innovation
  // share so far).
  std::array<double, kMaxOrder> f{}, before{};
  double share = 1;
  for (std::size_t k = 0; k < static_cast<std::size_t>(model.order); ++k) {
    const double kappa = model.partial[k];
    double rho = kappa * share;
    for (std::size_t j = 0; j < k; ++j) rho += before[j] * start_[k - 1 - j];
    start_[k] = rho;
    f[k] = kappa;
    for (std::size_t j = 0; j < k; ++j) f[j] = before[j] - kappa * before[k - 1 - j];
    std::copy_n(f.begin(), k + 1, before.begin());
    share *= (1 - kappa) * (1 + kappa);
  }
}

double ModelCorrelation::next() noexcept {
  const auto order = static_cast<std::size_t>(model_.order);
  double rho = 0;
  if (lag_ < order) {
    rho = start_[lag_];
  } else {
    for (std::size_t j = 0; j < order; ++j) rho += model_.coefficient[j] * recent_[j];
  }
  for (std::size_t j = order; j-- > 1;) recent_[j] = recent_[j - 1];
  if (order > 0) recent_[0] = rho;
  ++lag_;
  return rho;
}

void coefficient_bias(std::span<const double> f, std::span<const DesignFrequency> design, double* out) noexcept {
  const std::size_t p = f.size();
  if (p == 1) {  // the closed form of what follows
    out[0] = -(1 + 3 * f[0]);
    for (const auto& [omega, columns] : design) {
      const double c = std::cos(omega);
      out[0] -= columns * (1 - f[0] * f[0]) * (c - f[0]) / (1 - 2 * f[0] * c + f[0] * f[0]);
    }
    return;
  }
  if (p == 2) {
    out[0] = -(1 + f[0] + f[1]);
    out[1] = -(2 + 4 * f[1]);
  } else {
    out[0] = -(1 + f[0] + 2 * f[2]);
    out[1] = -(2 - f[0] + 4 * f[1] + f[2]);
    out[2] = -(1 + 5 * f[2]);
  }
  const std::array<double, kCorrectedOrders> rho = short_correlations(f);
  double explained = 0;
  for (std::size_t j = 0; j < p; ++j) explained += f[j] * rho[j];
  // D(w) = R^-1 (dg - dR f) is linear in dg, so the columns are added up before the one solution.
  std::array<double, kCorrectedOrders + 1> dg{};
  for (const auto& [omega, columns] : design) {
    double real = 1, imaginary = 0;
    for (std::size_t j = 0; j < p; ++j) {
      const double angle = omega * static_cast<double>(j + 1);
      real -= f[j] * std::cos(angle);
      imaginary += f[j] * std::sin(angle);
    }
    const double g = columns * (1 - explained) / (real * real + imaginary * imaginary);
    for (std::size_t k = 0; k <= p; ++k) dg[k] -= g * std::cos(omega * static_cast<double>(k));
  }
  const auto lag = [](std::size_t a, std::size_t b) { return a > b ? a - b : b - a; };
  Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, 0, kCorrectedOrders, kCorrectedOrders> r(p, p);
  Eigen::Matrix<double, Eigen::Dynamic, 1, 0, kCorrectedOrders, 1> right(p);
  for (std::size_t i = 0; i < p; ++i) {
    const auto row = static_cast<Eigen::Index>(i);
    right(row) = dg[i + 1];
    for (std::size_t j = 0; j < p; ++j) {
      r(row, static_cast<Eigen::Index>(j)) = i == j ? 1.0 : rho[lag(i, j) - 1];
      right(row) -= dg[lag(i, j)] * f[j];
    }
  }
  right = r.partialPivLu().solve(right).eval();
  for (std::size_t i = 0; i < p; ++i) out[i] += right(static_cast<Eigen::Index>(i));
}

ArModel bias_corrected(const ArModel& raw, double values, std::span<const DesignFrequency> design,
                       int passes) noexcept {
  const auto p = static_cast<std::size_t>(raw.order);
  if (p == 0 || raw.order > kCorrectedOrders) return raw;
  ArModel model = raw;
  if (!inside_bounds(raw)) {
    // Gaps can lift a sample r(1) to 1 and beyond, where no first-order model exists.
    if (p == 1 && std::abs(raw.coefficient[0]) >= 1) {
      const double bound[] = {std::copysign(kFirstOrderBound, raw.coefficient[0])};
      model = model_from_coefficients(bound);
    }
    model.near_unit_root = true;
    return model;
  }
  std::array<double, kCorrectedOrders> corrected{}, bias{};
  std::copy_n(raw.coefficient.begin(), p, corrected.begin());
  for (int pass = 0; pass < passes; ++pass) {
    coefficient_bias({corrected.data(), p}, design, bias.data());
    for (std::size_t j = 0; j < p; ++j) corrected[j] = raw.coefficient[j] - bias[j] / values;
  }
  if (p == 1) {
    const double bounded = std::clamp(corrected[0], -kFirstOrderBound, kFirstOrderBound);
    const double f[] = {bounded};
    model = model_from_coefficients(f);
    model.near_unit_root = bounded != corrected[0];
    return model;
  }
  // Shrinking by steps of .02: 50 steps lead back to the raw fit, which is inside.
  for (int step = 0; step <= 50; ++step) {
    const double kept = 1 - 0.02 * step;
    std::array<double, kCorrectedOrders> f{};
    for (std::size_t j = 0; j < p; ++j) {
      f[j] = step == 50 ? raw.coefficient[j] : raw.coefficient[j] + kept * (corrected[j] - raw.coefficient[j]);
    }
    model = model_from_coefficients({f.data(), p});
    model.near_unit_root = step > 0;
    if (inside_bounds(model)) break;
  }
  return model;
}

double log_time_error(const ArModel& model, double usable) noexcept {
  constexpr double kStep = 1e-5;
  const auto p = static_cast<std::size_t>(model.order);
  const auto size = static_cast<Eigen::Index>(p);
  SmallMatrix r(size, size);
  SmallVector gradient(size);
  std::array<double, kMaxOrder> rho{};
  ModelCorrelation correlation(model);
  for (std::size_t k = 0; k + 1 < p; ++k) rho[k] = correlation.next();
  std::array<double, kMaxOrder> f = model.coefficient;
  for (std::size_t i = 0; i < p; ++i) {
    const auto row = static_cast<Eigen::Index>(i);
    for (std::size_t j = 0; j < p; ++j) {
      r(row, static_cast<Eigen::Index>(j)) = i == j ? 1.0 : rho[(i > j ? i - j : j - i) - 1];
    }
    const auto log_time = [&](double step) {
      f[i] = model.coefficient[i] + step;
      const double value = std::log(model_from_coefficients({f.data(), p}).decorrelation_time());
      f[i] = model.coefficient[i];
      return value;
    };
    gradient(row) = (log_time(kStep) - log_time(-kStep)) / (2 * kStep);
  }
  const auto factor = r.llt();
  if (factor.info() != Eigen::Success) return kNaN;
  const double variance = gradient.dot(factor.solve(gradient)) * model.innovation_share() / usable;
  return variance >= 0 ? std::sqrt(variance) : kNaN;
}

}  // namespace lagscape
