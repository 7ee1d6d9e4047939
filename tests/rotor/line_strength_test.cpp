#include <trotline/rotor/line_strength.hpp>

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/constants.hpp>

namespace trotline {
namespace {

TEST(LineStrength, EinsteinAAgreesWithTheFormulaInGaussianUnits) {
  // A = 64 pi^4 nu^3 / (3 h c^3) S mu^2 / g in cgs units (e.g. Mangum & Shirley 2015, PASP 127, 266, eq. 11).
  const double h = 6.62607015e-27;
  const double c = 2.99792458e10;
  const double nu = 115271.2018e6;
  const double s_mu2 = 1.0 * 0.11e-18 * 0.11e-18;
  const double gaussian =
      64.0 * std::pow(std::numbers::pi, 4) * nu * nu * nu / (3.0 * h * c * c * c) * s_mu2 / 3.0;
  const double mu = 0.11 * constants::kDebyeCM;
  EXPECT_NEAR(einstein_a_per_s(nu, mu * mu, 3.0) / gaussian, 1.0, 1e-9);  // eps0 is uncertain by 1.5e-10
}

TEST(LineStrength, EinsteinAAgreesWithTheTradesRoundedFactor) {
  // A = 1.16395e-20 nu^3 S mu^2 / g, nu in MHz and mu in D, as usually printed (from memory); the sixth digit
  // is not to be trusted: CODATA 2018 gives 1.163965e-20.
  const double a = einstein_a_per_s(100000.0e6, 3.0 * constants::kDebyeCM * constants::kDebyeCM, 7.0);
  EXPECT_NEAR(a / (1.16395e-20 * 1e15 * 3.0 / 7.0), 1.0, 2e-5);
}

TEST(LineStrength, EinsteinAScalesAsItsFormula) {
  const double reference = einstein_a_per_s(1e11, 1e-60, 3.0);
  EXPECT_DOUBLE_EQ(einstein_a_per_s(2e11, 1e-60, 3.0), 8.0 * reference);
  EXPECT_DOUBLE_EQ(einstein_a_per_s(1e11, 2e-60, 6.0), reference);  // +K and -K together: both double
  EXPECT_EQ(einstein_a_per_s(1e11, 0.0, 3.0), 0.0);
}

TEST(LineStrength, RefusesArgumentsOutsideItsDomain) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  EXPECT_THROW((void)einstein_a_per_s(0.0, 1.0, 1.0), DomainError);
  EXPECT_THROW((void)einstein_a_per_s(nan, 1.0, 1.0), DomainError);
  EXPECT_THROW((void)einstein_a_per_s(1.0, -1.0, 1.0), DomainError);
  EXPECT_THROW((void)einstein_a_per_s(1.0, 1.0, 0.0), DomainError);
}

}  // namespace
}  // namespace trotline
