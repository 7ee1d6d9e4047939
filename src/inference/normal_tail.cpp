#include <cmath>
#include <numbers>

#include <trotline/inference/normal_tail.hpp>

namespace trotline {
namespace {

constexpr double kAsymptotic = -30.0;
constexpr double kLnRootTwoPi = 0.91893853320467274178;

/// sum of (-1)^k (2k-1)!! / x^2k: what multiplies phi(x)/|x| in the lower tail. At x = -30 the first term
/// left out is 1e-17.
double tail_series(double x) {
  const double y = 1.0 / (x * x);
  return 1.0 - y * (1.0 - 3.0 * y * (1.0 - 5.0 * y * (1.0 - 7.0 * y * (1.0 - 9.0 * y))));
}

}  // namespace

double log_normal_cdf(double x) {
  if (x < kAsymptotic) return -0.5 * x * x - kLnRootTwoPi - std::log(-x) + std::log(tail_series(x));
  const double root_half = 1.0 / std::numbers::sqrt2;
  if (x < 0.0) return std::log(0.5 * std::erfc(-x * root_half));
  return std::log1p(-0.5 * std::erfc(x * root_half));
}

double log_normal_cdf_slope(double x) {
  if (x < kAsymptotic) return -x / tail_series(x);
  return std::exp(-0.5 * x * x - kLnRootTwoPi - log_normal_cdf(x));
}

}  // namespace trotline
