#include <trotline/excitation/thin_line.hpp>

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include <trotline/base/errors.hpp>
#include <trotline/physics/planck.hpp>

namespace trotline {
namespace {

// Common practice (every textbook of the trade prints it): N_u = 1.94e3 nu^2[GHz] W[K km/s] / A[1/s] cm^-2.
TEST(ThinLine, UpperColumnFollowsThePracticalFormula) {
  const LineConstants line{115.271e9, 5.53, 3.0, 7.203e-8};
  const double practical = 1.94e3 * 115.271 * 115.271 / 7.203e-8;
  EXPECT_NEAR(1.0 / intensity_per_upper_column_k_km_s_cm2(line) / practical, 1.0, 0.005 / 1.94);
}

// Rotational lines towards AFGL 2591: A&A 521, L44 (2010), Table 1, as printed: W [K km/s] and N_u [cm^-2]
// for N_u = 8 pi k nu^2 W / (h c^3 A); frequencies in GHz. Two digits are printed. The rows of o-H2O+ and
// OH+ are left out: their printed W, A and N_u disagree with one another by a factor 1.2, both are limits.
TEST(ThinLine, ReproducesPublishedUpperColumns) {
  struct Row {
    double frequency_ghz, a, w, column;
  };
  for (const Row& row : {Row{536.7611, 6.4e-4, 3.46, 3.0e12}, Row{1661.1074, 3.8e-2, 0.93, 1.3e11},
                         Row{1669.2813, 6.1e-2, 3.7, 3.3e11}}) {
    const LineConstants line{row.frequency_ghz * 1e9, 0.0, 1.0, row.a};
    const double column = row.w / intensity_per_upper_column_k_km_s_cm2(line);
    EXPECT_NEAR(column / row.column, 1.0, 0.05) << row.frequency_ghz;  // half a unit of the last digits of A, W and N together
  }
}

// In the same table CH+ 1-0 is printed with A = 6.4e-2 and N_u = 1.9e11, which do not belong together: with
// 6.4e-3 they do. A formula that is right must notice.
TEST(ThinLine, NoticesThePublishedMisprint) {
  const double printed = 0.91 / intensity_per_upper_column_k_km_s_cm2({835.1375e9, 40.08, 3.0, 6.4e-2});
  const double mended = 0.91 / intensity_per_upper_column_k_km_s_cm2({835.1375e9, 40.08, 3.0, 6.4e-3});
  EXPECT_GT(std::abs(printed / 1.9e11 - 1.0), 0.8);
  EXPECT_NEAR(mended / 1.9e11, 1.0, 0.05);
}

TEST(Background, ContrastIsThatOfThePlanckTemperatures) {
  for (const double nu : {23.7e9, 115.27e9, 691.5e9}) {
    for (const double t : {3.0, 10.0, 150.0}) {
      const double direct = 1.0 - planck_equivalent_temperature_k(nu, 2.7255) / planck_equivalent_temperature_k(nu, t);
      EXPECT_NEAR(background_contrast(nu, t, 2.7255), direct, 1e-14);
      const double h = 1e-6;
      const double slope =
          (background_contrast(nu, 1 / (1 / t + h), 2.7255) - background_contrast(nu, 1 / (1 / t - h), 2.7255)) / (2 * h);
      EXPECT_NEAR(background_contrast_slope_k(nu, t, 2.7255), slope, 1e-6 * std::abs(slope));
    }
  }
}

TEST(Background, VanishesWithoutOneAndTurnsToAbsorptionBelowIt) {
  EXPECT_EQ(background_contrast(115e9, 10.0, 0.0), 1.0);
  EXPECT_NEAR(background_contrast(115e9, 2.7255, 2.7255), 0.0, 1e-15);
  EXPECT_LT(background_contrast(115e9, 2.0, 2.7255), 0.0);
  EXPECT_EQ(background_contrast(9e14, 20.0, 0.5), 1.0);  // far into the Wien tail: no overflow
}

TEST(Filling, OfGaussianAndDiscHasTheKnownLimits) {
  EXPECT_DOUBLE_EQ(gaussian_filling(20.0, 20.0), 0.5);
  EXPECT_DOUBLE_EQ(disc_filling(20.0, 20.0), 0.5);  // by definition of the FWHM
  EXPECT_DOUBLE_EQ(gaussian_filling(std::numeric_limits<double>::infinity(), 20.0), 1.0);
  EXPECT_NEAR(gaussian_filling(0.2, 20.0), 1e-4, 1e-8);
  EXPECT_NEAR(disc_filling(0.2, 20.0), 1e-4 * std::log(2.0), 1e-8);
  EXPECT_THROW((void)gaussian_filling(-1.0, 20.0), DomainError);
  EXPECT_THROW((void)gaussian_filling(1.0, 0.0), DomainError);
}

TEST(OpticalDepth, ThinLineAreaIsItsPlanckTemperatureTimesTheIntegralOfTau) {
  const LineConstants line{97.981e9, 7.05, 5.0, 1.68e-5};
  const double column = 3e12;
  const double tau = central_optical_depth(line, column, 12.0, 1.7);
  const double gaussian_area = std::sqrt(M_PI / (4.0 * std::log(2.0))) * 1.7;
  EXPECT_NEAR(planck_equivalent_temperature_k(97.981e9, 12.0) * tau * gaussian_area,
              intensity_per_upper_column_k_km_s_cm2(line) * column, 1e-12);
}

}  // namespace
}  // namespace trotline
