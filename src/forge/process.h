#pragma once
#include <cstddef>
#include <vector>

namespace lagscape {

/// A stationary Gaussian process of mean 0 and variance 1, known exactly: AR(p), x_t = f_1 x_{t-1} + ... + f_p x_{t-p}
/// + e_t, or ARFIMA(0,d,0), (1 - B)^d x_t = e_t (C. W. J. Granger, R. Joyeux, J. Time Ser. Anal. 1 (1980), 15; J. R. M.
/// Hosking, Biometrika 68 (1981), 165). Both are given by their partial autocorrelations.
class Process {
 public:
  /// Coefficients f_1 .. f_p; none: white noise. Requires stationary(coefficients).
  [[nodiscard]] static Process autoregression(std::vector<double> coefficients);
  /// Exponent d, -0.5 < d < 0.5, d not 0: partial autocorrelation d / (k - d) at lag k.
  [[nodiscard]] static Process long_memory(double d);
  /// True if every partial autocorrelation, by the Durbin-Levinson recursion run backwards, lies inside (-1, 1).
  [[nodiscard]] static bool stationary(const std::vector<double>& coefficients);

  [[nodiscard]] bool is_long_memory() const noexcept { return d_ != 0; }
  [[nodiscard]] double exponent() const noexcept { return d_; }
  [[nodiscard]] const std::vector<double>& coefficients() const noexcept { return coefficients_; }
  /// Partial autocorrelation at lag k >= 1; 0 beyond the order of an autoregression.
  [[nodiscard]] double partial(std::size_t k) const noexcept;
  /// Autocorrelation at lags 0 .. max_lag.
  [[nodiscard]] std::vector<double> autocorrelation(std::size_t max_lag) const;
  /// Innovation variance: 1 - share of the variance that the whole past predicts. prod_k (1 - partial_k^2) for AR(p),
  /// Gamma(1 - d)^2 / Gamma(1 - 2 d) for ARFIMA(0,d,0).
  [[nodiscard]] double innovation_variance() const;
  /// Decorrelation time in steps: spectral density at frequency 0 over the variance, 1 + 2 sum_k rho_k
  /// = innovation variance / (1 - sum f)^2. NaN with long memory, where it does not exist.
  [[nodiscard]] double decorrelation_time() const;

 private:
  std::vector<double> coefficients_, partials_;
  double d_ = 0;
};

/// Best linear prediction of x_t from x_{t-1} .. x_0, for t = 0, 1, 2 ...: what makes the start of a series stationary
/// and every series exact (J. Durbin, Review of the International Statistical Institute 28 (1960), 233; for ARFIMA: J.
/// R. M. Hosking, Water Resources Research 20 (1984), 1898). One step costs O(t) with long memory, O(p^2) at most
/// otherwise.
class Predictor {
 public:
  explicit Predictor(const Process& process) : process_(&process) {}
  /// Weights of x_{t-1}, x_{t-2}, ...: as many as there are past values that matter.
  [[nodiscard]] const std::vector<double>& weights() const noexcept { return weights_; }
  /// Standard deviation of x_t about its prediction.
  [[nodiscard]] double error_sd() const noexcept;
  /// Goes on to step t + 1.
  void advance();

 private:
  const Process* process_;
  std::vector<double> weights_;
  double variance_ = 1;
};

}  // namespace lagscape
