#include <boost/multiprecision/cpp_bin_float.hpp>
#include <gtest/gtest.h>

#include <cmath>

#include <trotline/inference/normal_tail.hpp>

namespace trotline {
namespace {

using Digits50 = boost::multiprecision::cpp_bin_float_50;

/// Phi(x) in 50 digits: by the complementary error function, or far below by the continued fraction of
/// Laplace (Abramowitz & Stegun 26.2.14), which converges fast there.
Digits50 log_phi(double x) {
  const Digits50 root_two = sqrt(Digits50(2));
  if (x > 0.0) return boost::multiprecision::log1p(-boost::math::erfc(Digits50(x) / root_two) / 2);
  if (x > -12.0) return log(boost::math::erfc(Digits50(-x) / root_two) / 2);
  const Digits50 a = -Digits50(x);
  Digits50 fraction = a;
  for (int k = 400; k >= 1; --k) fraction = a + k / fraction;
  return -a * a / 2 - log(2 * boost::math::constants::pi<Digits50>()) / 2 - log(fraction);
}

TEST(LogNormalCdf, ErrorBoundHoldsAgainst50Digits) {
  for (double x = -60.0; x <= 37.0; x += 0.0973) {
    const Digits50 exact = log_phi(x);
    EXPECT_LT(std::abs(static_cast<double>(Digits50(log_normal_cdf(x)) / exact - 1)), kLogNormalCdfError)
        << x;
    const Digits50 slope =
        exp(-Digits50(x) * x / 2 - log(2 * boost::math::constants::pi<Digits50>()) / 2 - exact);
    EXPECT_NEAR(log_normal_cdf_slope(x) / static_cast<double>(slope), 1.0, 1e-11) << x;
  }
  for (double x = -100.0; x >= -1e8; x *= 10.0) {
    EXPECT_LT(std::abs(static_cast<double>(Digits50(log_normal_cdf(x)) / log_phi(x) - 1)), kLogNormalCdfError)
        << x;
  }
}

// Trap: a probability of 1e-349 underflows, its logarithm does not.
TEST(LogNormalCdf, DoesNotUnderflow) {
  EXPECT_EQ(0.5 * std::erfc(40.0 / std::sqrt(2.0)), 0.0);
  // Abramowitz & Stegun 1972, table 26.2 (from memory): -log10 Q(x) at x = 10, 40 and 50
  EXPECT_NEAR(-log_normal_cdf(-10.0) / std::log(10.0), 23.11805, 5e-6);
  EXPECT_NEAR(-log_normal_cdf(-40.0) / std::log(10.0), 349.43701, 5e-6);
  EXPECT_NEAR(-log_normal_cdf(-50.0) / std::log(10.0), 544.96634, 5e-6);
  EXPECT_TRUE(std::isfinite(log_normal_cdf(-1e150)));
  EXPECT_EQ(log_normal_cdf(50.0), -0.0);
  EXPECT_TRUE(std::isnan(log_normal_cdf(std::nan(""))));
}

TEST(LogNormalCdf, RisesAndItsSlopeFalls) {
  for (double x = -50.0; x < 8.0; x += 0.01) {
    EXPECT_GT(log_normal_cdf(x + 0.01), log_normal_cdf(x));
    EXPECT_LT(log_normal_cdf_slope(x + 0.01), log_normal_cdf_slope(x));
  }
}

}  // namespace
}  // namespace trotline
