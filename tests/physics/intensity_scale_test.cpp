#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numbers>

#include <trotline/base/errors.hpp>
#include <trotline/physics/intensity_scale.hpp>

namespace trotline {
namespace {

constexpr double kArcsecRad = std::numbers::pi / 648000.0;

TEST(IntensityScale, FluxPerBeamFollowsTheHandbookFormula) {
  // T[K] = 1.222e3 S[mJy/beam] / (nu^2[GHz] theta_maj theta_min [arcsec]): common practice in radio observing
  // handbooks. Its four printed digits allow 0.5 / 1222 = 4.1e-4.
  for (const auto& [ghz, major, minor] :
       {std::tuple{1.4, 45.0, 45.0}, {100.0, 2.0, 1.0}, {345.0, 0.3, 0.2}}) {
    const double expected_per_jy = 1.222e6 / (ghz * ghz * major * minor);
    const double factor = kelvin_per_jansky_per_beam(ghz * 1e9, major * kArcsecRad, minor * kArcsecRad);
    EXPECT_NEAR(factor / expected_per_jy, 1.0, 4.1e-4);
  }
}

TEST(IntensityScale, FluxPerBeamScalesAsItsFormula) {
  const double one = kelvin_per_jansky_per_beam(1e11, 1e-5, 2e-5);
  EXPECT_DOUBLE_EQ(kelvin_per_jansky_per_beam(2e11, 1e-5, 2e-5), one / 4.0);
  EXPECT_DOUBLE_EQ(kelvin_per_jansky_per_beam(1e11, 2e-5, 2e-5), one / 2.0);
  EXPECT_DOUBLE_EQ(kelvin_per_jansky_per_beam(1e11, 2e-5, 1e-5), one);
}

TEST(IntensityScale, MainBeamTemperatureIsTheLargerOne) {
  // Worked by hand: F_eff 0.94 and B_eff 0.78 give 1.2051.
  EXPECT_NEAR(main_beam_per_antenna_temperature(0.94, 0.78), 1.2051, 0.00005);
  EXPECT_EQ(main_beam_per_antenna_temperature(1.0, 1.0), 1.0);
}

TEST(IntensityScale, RefusesWhatIsOutsideItsDomain) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  for (const double bad : {0.0, -0.1, 1.1, nan})
    EXPECT_THROW((void)main_beam_per_antenna_temperature(bad, 0.5), DomainError);
  for (const double bad : {0.0, -0.1, 0.91, nan})
    EXPECT_THROW((void)main_beam_per_antenna_temperature(0.9, bad), DomainError);
  for (const double bad : {0.0, -1.0, nan, std::numeric_limits<double>::infinity()}) {
    EXPECT_THROW((void)kelvin_per_jansky_per_beam(bad, 1e-5, 1e-5), DomainError);
    EXPECT_THROW((void)kelvin_per_jansky_per_beam(1e11, bad, 1e-5), DomainError);
    EXPECT_THROW((void)kelvin_per_jansky_per_beam(1e11, 1e-5, bad), DomainError);
  }
}

}  // namespace
}  // namespace trotline
