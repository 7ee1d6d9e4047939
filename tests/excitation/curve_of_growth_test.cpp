#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <boost/multiprecision/cpp_bin_float.hpp>
#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include <trotline/base/errors.hpp>
#include <trotline/excitation/curve_of_growth.hpp>

namespace trotline {
namespace {

using Digits50 = boost::multiprecision::cpp_bin_float_50;

/// C and d ln C / d ln tau as defined, by the trapezoidal sum over x in the precision of Real. For this
/// integrand, analytic and flat at both ends, the sum converges faster than any power of the step: with 1/24
/// the error is below 1e-29 up to tau0 = 1e3 and 8e-18 at 1e6 (found by comparing with smaller steps).
template <class Real>
std::pair<Real, Real> summed(Real tau0, Real step, Real negligible) {
  using std::exp;
  using std::expm1;
  using std::sqrt;
  Real area = -expm1(-tau0) / 2;
  Real growth = exp(-tau0) / 2;  // of the integral of exp(-x^2 - tau exp(-x^2))
  for (int k = 1;; ++k) {
    const Real x = step * k;
    const Real profile = exp(-x * x);
    area -= expm1(-tau0 * profile);
    growth += profile * exp(-tau0 * profile);
    if (profile * (tau0 + 1) < negligible && profile < negligible) break;
  }
  const Real scale = 2 * step / sqrt(boost::math::constants::pi<Real>());
  area *= scale;
  growth *= scale;
  return {tau0 / area, 1 - tau0 * growth / area};
}

/// G/tau = sum of (-tau)^n / ((n+1)! sqrt(n+1)): the expansion of the exponential, integrated term by term.
Digits50 series_factor(Digits50 tau0) {
  Digits50 sum = 0;
  Digits50 term = 1;
  for (int n = 0; n < 400; ++n) {
    sum += term / sqrt(Digits50(n + 1));
    term *= -tau0 / (n + 2);
  }
  return 1 / sum;
}

double relative_error(double value, const Digits50& exact) {
  return std::abs(static_cast<double>((Digits50(value) - exact) / exact));
}

TEST(CurveOfGrowth, OracleOf50DigitsAgreesWithTheSeries) {
  const Digits50 step = Digits50(1) / 24;
  for (const double tau0 : {1e-12, 1e-3, 0.7, 5.0, 20.0}) {
    const Digits50 sum = summed<Digits50>(tau0, step, Digits50("1e-50")).first;
    const Digits50 series = series_factor(tau0);
    // the alternating series loses the digits of exp(tau0): at 20 some 17 of the 50
    EXPECT_LT(static_cast<double>(abs(sum / series - 1)), 1e-30) << tau0;
  }
}

TEST(CurveOfGrowth, ErrorBoundHoldsAgainst50Digits) {
  const Digits50 step = Digits50(1) / 24;
  std::mt19937_64 engine(20260501);
  std::uniform_real_distribution<double> exponent(-12.0, 6.0);
  for (int i = 0; i < 300; ++i) {
    const double tau0 = i == 0 ? 1e-12 : i == 1 ? 1e6 : std::pow(10.0, exponent(engine));
    const auto [factor, slope] = summed<Digits50>(tau0, step, Digits50("1e-40"));
    const OpacityCorrection correction = curve_of_growth_correction(tau0);
    EXPECT_LT(relative_error(correction.factor, factor), kCurveOfGrowthError) << tau0;
    EXPECT_LT(std::abs(correction.dln_factor_dln_tau - static_cast<double>(slope)), kCurveOfGrowthSlopeError)
        << tau0;
  }
}

TEST(CurveOfGrowth, AgreesWithBoostQuadrature) {
  for (double tau0 = 1e-12; tau0 <= 1.01e6; tau0 *= 10.0) {
    const auto integrand = [&](double x) { return -std::expm1(-tau0 * std::exp(-x * x)) / tau0; };
    double error = 0.0;
    const double edge = std::sqrt(std::log(1e18 * std::max(tau0, 1.0)));
    const double integral = 2.0 * boost::math::quadrature::gauss_kronrod<double, 61>::integrate(
                                      integrand, 0.0, edge, 15, 1e-14, &error);
    EXPECT_NEAR(curve_of_growth_correction(tau0).factor * integral / std::sqrt(M_PI), 1.0, 1e-12) << tau0;
  }
}

// A million draws over 18 decades against the trapezoidal sum in doubles, whose own rounding (some 1e-15) is
// far below the bound; that sum is the 50-digit one with fewer digits and, for thin lines, a wider step.
TEST(CurveOfGrowth, ErrorBoundHoldsOnAMillionRandomOpticalDepths) {
  std::mt19937_64 engine(20260502);
  std::uniform_real_distribution<double> exponent(-12.0, 6.0);
  double worst = 0.0;
  double worst_slope = 0.0;
  for (int i = 0; i < 1'000'000; ++i) {
    const double tau0 = std::pow(10.0, exponent(engine));
    const auto [factor, slope] = summed<double>(tau0, tau0 < 10.0 ? 1.0 / 9.0 : 1.0 / 24.0, 1e-17);
    const OpacityCorrection correction = curve_of_growth_correction(tau0);
    worst = std::max(worst, std::abs(correction.factor / factor - 1.0));
    worst_slope = std::max(worst_slope, std::abs(correction.dln_factor_dln_tau - slope));
  }
  EXPECT_LT(worst, kCurveOfGrowthError);
  EXPECT_LT(worst_slope, kCurveOfGrowthSlopeError);
  RecordProperty("worst", fmt::format("{:.2e}", worst));
  RecordProperty("worst_slope", fmt::format("{:.2e}", worst_slope));
}

TEST(CurveOfGrowth, IsLinearForThinLines) {
  for (const double tau0 : {1e-12, 1e-9, 1e-6, 1e-4}) {
    // C = 1 + tau/sqrt(8) + O(tau^2), from the series; the next coefficient is 1/8 - 1/(6 sqrt 3)
    const double second = (0.125 - 1.0 / (6.0 * std::sqrt(3.0))) * tau0 * tau0;
    EXPECT_NEAR(curve_of_growth_correction(tau0).factor, 1.0 + tau0 / std::sqrt(8.0) + second,
                2e-13 + tau0 * tau0 * tau0);
    EXPECT_NEAR(curve_of_growth_correction(tau0).dln_factor_dln_tau, tau0 / std::sqrt(8.0),
                2e-12 + tau0 * tau0);
  }
}

TEST(CurveOfGrowth, GrowsAsTheRootOfTheLogarithmForThickLines) {
  const double euler = 0.57721566490153286;
  for (const double tau0 : {1e4, 1e6, 1e9, 1e12}) {
    // integral = 2 sqrt(L) (1 + gamma/(2L) - (gamma^2 + pi^2/6)/(8 L^2) + O(L^-3)), L = ln tau0
    const double l = std::log(tau0);
    const double area =
        2.0 * std::sqrt(l) * (1.0 + euler / (2.0 * l) - (euler * euler + M_PI * M_PI / 6.0) / (8.0 * l * l));
    EXPECT_NEAR(curve_of_growth_correction(tau0).factor * area / (std::sqrt(M_PI) * tau0), 1.0,
                1.0 / (l * l * l));
  }
}

TEST(CurveOfGrowth, RisesAndStaysBelowTheLineCentreFactor) {
  double before = 1.0;
  for (double tau0 = 1e-6; tau0 < 1e12; tau0 *= 1.07) {
    const OpacityCorrection exact = curve_of_growth_correction(tau0);
    EXPECT_GT(exact.factor, before);
    EXPECT_LT(exact.factor, line_centre_correction(tau0).factor);
    EXPECT_GE(exact.dln_factor_dln_tau, 0.0);
    EXPECT_LT(exact.dln_factor_dln_tau, 1.0);
    before = exact.factor;
  }
  EXPECT_EQ(line_centre_correction(0.0).factor, 1.0);
  EXPECT_NEAR(curve_of_growth_correction(0.0).factor, 1.0, 1e-15);
}

TEST(CurveOfGrowth, HasNoStepWhereThePolynomialsMeet) {
  for (int octave = 0; octave < 39; ++octave) {
    for (int quarter = 0; quarter < 4; ++quarter) {
      const double edge = std::ldexp(1.0 + 0.25 * quarter, octave) - 1.0;
      if (edge == 0.0) continue;
      const double below = curve_of_growth_correction(std::nextafter(edge, 0.0)).factor;
      EXPECT_NEAR(curve_of_growth_correction(edge).factor / below, 1.0, 2.0 * kCurveOfGrowthError) << edge;
    }
  }
}

// Trap: the factor at line centre over-corrects integrated Gaussian lines; measured with an independent
// numerical model as 15 % at tau0 = 1, 41 % at 3 and 87 % at 10 (whole per cent).
TEST(LineCentreCorrection, OverCorrectsIntegratedLinesAsMeasured) {
  const auto excess = [](double tau0) {
    return line_centre_correction(tau0).factor / curve_of_growth_correction(tau0).factor - 1.0;
  };
  EXPECT_NEAR(excess(1.0), 0.15, 0.005);
  EXPECT_NEAR(excess(3.0), 0.41, 0.005);
  EXPECT_NEAR(excess(10.0), 0.87, 0.005);
}

TEST(LineCentreCorrection, SlopeIsThatOfTheFactor) {
  for (const double tau0 : {1e-8, 1e-3, 0.3, 2.0, 30.0, 500.0}) {
    const Digits50 tau = tau0;
    const Digits50 slope = 1 - tau / boost::multiprecision::expm1(tau);
    EXPECT_NEAR(line_centre_correction(tau0).dln_factor_dln_tau / static_cast<double>(slope), 1.0, 1e-11)
        << tau0;
  }
}

TEST(OpacityCorrections, RefuseWhatIsNoOpticalDepth) {
  for (const double tau0 : {-1.0, std::nan(""), 2e12}) {
    EXPECT_THROW((void)curve_of_growth_correction(tau0), DomainError);
    EXPECT_THROW((void)line_centre_correction(tau0), DomainError);
    EXPECT_THROW((void)opacity_correction(Opacity::thin, tau0), DomainError);
  }
}

}  // namespace
}  // namespace trotline
