#include "forge/process.h"

#include <cmath>
#include <limits>
#include <numeric>
#include <utility>

namespace lagscape {
namespace {

// Weights of order k from those of order k - 1 and the partial autocorrelation at lag k.
void raise_order(std::vector<double>& weights, double partial) {
  const std::vector<double> before = weights;
  for (std::size_t j = 0; j < before.size(); ++j) weights[j] = before[j] - partial * before[before.size() - 1 - j];
  weights.push_back(partial);
}

// The same recursion backwards: partial autocorrelations of the coefficients. Stops at the first one outside (-1, 1).
std::vector<double> partials_of(std::vector<double> weights, bool& inside) {
  std::vector<double> partials(weights.size());
  inside = true;
  while (!weights.empty()) {
    const double last = weights.back();
    partials[weights.size() - 1] = last;
    inside = std::abs(last) < 1;
    if (!inside) break;
    weights.pop_back();
    const std::vector<double> above = weights;
    for (std::size_t j = 0; j < above.size(); ++j) {
      weights[j] = (above[j] + last * above[above.size() - 1 - j]) / (1 - last * last);
    }
  }
  return partials;
}

}  // namespace

Process Process::autoregression(std::vector<double> coefficients) {
  Process process;
  bool inside = true;
  process.partials_ = partials_of(coefficients, inside);
  process.coefficients_ = std::move(coefficients);
  return process;
}

Process Process::long_memory(double d) {
  Process process;
  process.d_ = d;
  return process;
}

bool Process::stationary(const std::vector<double>& coefficients) {
  bool inside = true;
  (void)partials_of(coefficients, inside);
  return inside;
}

double Process::partial(std::size_t k) const noexcept {
  if (is_long_memory()) return d_ / (static_cast<double>(k) - d_);
  return k <= partials_.size() ? partials_[k - 1] : 0;
}

std::vector<double> Process::autocorrelation(std::size_t max_lag) const {
  std::vector<double> rho{1};
  Predictor predictor(*this);
  for (std::size_t k = 1; k <= max_lag; ++k) {
    if (is_long_memory()) {
      // Hosking (1981): rho_k = rho_{k-1} (k - 1 + d) / (k - d).
      const auto lag = static_cast<double>(k);
      rho.push_back(rho.back() * (lag - 1 + d_) / (lag - d_));
      continue;
    }
    // x_k is predicted from k past values; up to order p that prediction is what defines rho_k.
    predictor.advance();
    double value = 0;
    for (std::size_t j = 0; j < predictor.weights().size(); ++j) value += predictor.weights()[j] * rho[k - 1 - j];
    rho.push_back(value);
  }
  return rho;
}

double Process::innovation_variance() const {
  if (is_long_memory()) return std::exp(2 * std::lgamma(1 - d_) - std::lgamma(1 - 2 * d_));
  double variance = 1;
  for (const double partial : partials_) variance *= 1 - partial * partial;
  return variance;
}

double Process::decorrelation_time() const {
  if (is_long_memory()) return std::numeric_limits<double>::quiet_NaN();
  const double rest = 1 - std::accumulate(coefficients_.begin(), coefficients_.end(), 0.0);
  return innovation_variance() / (rest * rest);
}

double Predictor::error_sd() const noexcept { return std::sqrt(variance_); }

void Predictor::advance() {
  if (!process_->is_long_memory() && weights_.size() == process_->coefficients().size()) return;
  const double partial = process_->partial(weights_.size() + 1);
  raise_order(weights_, partial);
  variance_ *= 1 - partial * partial;
}

}  // namespace lagscape
