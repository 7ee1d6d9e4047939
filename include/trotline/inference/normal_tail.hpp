#pragma once

namespace trotline {

/// ln Phi(x): the logarithm of the probability that a standard normal variable is below x.
///
/// Nothing underflows: for x below -30 the asymptotic series takes over, and ln Phi(-1e8) = -5e15.
/// @param x  any number; NaN gives NaN
/// Accuracy: relative error below kLogNormalCdfError against 50-digit arithmetic for -1e8 <= x <= 37; above,
///     the result is within 1e-300 of 0.
/// Reference: [AbramowitzStegun1972] 26.2.12.
[[nodiscard]] double log_normal_cdf(double x);

/// d ln Phi / dx = phi(x)/Phi(x), the inverse Mills ratio; goes to -x for x -> -infinity and to 0 above.
/// Accuracy: relative error below 1e-11 for -1e8 <= x <= 37.
[[nodiscard]] double log_normal_cdf_slope(double x);

inline constexpr double kLogNormalCdfError = 5e-13;

}  // namespace trotline
