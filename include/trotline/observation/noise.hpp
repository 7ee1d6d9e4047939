#pragma once

#include <Eigen/Core>

#include <vector>

namespace trotline {

/// How the noise of one channel goes along with that of its neighbours: smoothing and spectrometers with
/// overlapping channels make n channels worth fewer than n independent ones.
struct NoiseCorrelation {
  Eigen::ArrayXd rho =
      Eigen::ArrayXd::Ones(1);  ///< autocorrelation at lags 0, 1, ...; rho(0) = 1; 0 beyond the end
  std::size_t channels =
      0;  ///< line-free channels that it was estimated from; 0: none, noise is taken as white
  bool reaches_limit = false;  ///< still correlated at the largest lag that was looked at

  /// Channels for each independent one, in a long run: 1 + 2 sum of rho.
  [[nodiscard]] double channels_per_independent_one() const;

  /// sum over i, j of a_i a_j rho(|i - j|): the variance of the sum of a_i x_i for noise x of variance 1.
  [[nodiscard]] double variance_of(const Eigen::Ref<const Eigen::VectorXd>& weights) const;

  /// Relative variance of a variance that is computed from this correlation and from the rms of `measured`
  /// channels: 2 (1 + 2 sum rho^2) / measured for the rms, and, where channels are correlated up to lag L,
  /// 2 (2 L + 1) / channels for the sum of the correlations (the scatter of a truncated spectral estimate at
  /// frequency 0, textbook knowledge, from memory). A pull's variance is larger than 1 by about so much.
  [[nodiscard]] double scatter_of_variance(std::size_t measured) const;

  /// The covariance of two sums.
  [[nodiscard]] double covariance_of(const Eigen::Ref<const Eigen::VectorXd>& a,
                                     const Eigen::Ref<const Eigen::VectorXd>& b) const;
};

/// Estimates the correlation from the channels of a spectrum that are finite and not excluded.
///
/// The channels are taken in blocks; each loses a polynomial of order 3 and outliers beyond 4 times the
/// scaled median absolute deviation. What the polynomial takes away from the autocovariance is put back (to
/// first order in correlation length over block length). Lags count until two in a row are within 1.7
/// standard errors (Bartlett) of zero; 64 are the most.
///
/// @param intensity  one value a channel; NaN is a hole
/// @param excluded   true where a line may lie; same length
[[nodiscard]] NoiseCorrelation estimate_noise_correlation(const Eigen::Ref<const Eigen::ArrayXd>& intensity,
                                                          const std::vector<bool>& excluded);

/// Median of the values; NaN for none. The order of the values is not kept.
[[nodiscard]] double median_in_place(std::vector<double>& values);

/// 1.4826 times the median absolute deviation from zero: the standard deviation for Gaussian noise about
/// zero.
[[nodiscard]] double scaled_mad_about_zero(std::vector<double> values);

}  // namespace trotline
